/**
 * Zero, told from the whole record instead of counters: first the attempts to take a zero are found (start-up, and
 * every rising edge of the button; an attempt ends at its decision or at the next edge), each decided from the slice
 * of samples it averages. Suspect is a search for the latest overload and what came after it. Tracking is the length
 * of the stretch of quiet samples that ends at a sample.
 */
import {
  CLAMPED, EVENT_DEGAUSSED, EVENT_ZERO, LINGERING, OVERLOAD, SETTLING, TRACKING, ZERO_REFUSED, ZERO_SUSPECT,
  type UnitConstants, type ZeroConstants,
} from '../../../lib/index.ts';
import { roundDivide, type Oracle, type Sample } from './record.ts';

/** What a power cycle keeps. */
export interface ZeroKept {
  taken: bigint;
  takenTemperature: bigint;
  suspect: boolean;
}

interface Attempt {
  start: number;
  /** Index of the sample that decides; Infinity while undecided. */
  decided: number;
  success: boolean;
  mean: bigint;
}

const size = (value: bigint) => (value < 0n ? -value : value);

export function zeroFrom(
  constants: ZeroConstants, unit: UnitConstants, input: Sample[], kept: ZeroKept,
): { output: Sample[]; kept: ZeroKept } {
  const factoryZero = BigInt(unit.factoryZero);
  const quiet = input.map((sample) => (sample.status & LINGERING) === 0);
  const attempts: Attempt[] = [];

  const isSuspect = (n: number): boolean => {
    let overload = kept.suspect ? -1 : -2;
    for (let i = 0; i <= n && constants.suspectMode === 1; i++) if (input[i].status & OVERLOAD) overload = i;
    if (overload === -2) return false;
    const degaussed = input.some((sample, i) => i > overload && i <= n && (sample.status & EVENT_DEGAUSSED) !== 0);
    return !degaussed && !attempts.some((a) => a.success && a.decided > overload && a.decided <= n);
  };
  const allQuiet = (from: number, to: number) => quiet.slice(from, to).every((q) => q);

  const decide = (start: number, end: number, wait: number, automatic: boolean): void => {
    let from = start + wait;
    while (from <= end && !allQuiet(from - wait, from)) from++;
    let next = from + constants.meanSamples;
    while (next <= end && !allQuiet(next - constants.meanSamples, next)) next++;
    const attempt: Attempt = { start, decided: Infinity, success: false, mean: 0n };
    if (next <= end) {
      const sorted = input.slice(next - constants.meanSamples, next).map((sample) => sample.value);
      sorted.sort((p, q) => (p < q ? -1 : p > q ? 1 : 0));
      attempt.decided = next - 1;
      attempt.mean = roundDivide(sorted.reduce((sum, value) => sum + value, 0n), BigInt(constants.meanSamples));
      attempt.success = sorted[sorted.length - 1] - sorted[0] <= BigInt(constants.spanLimit) &&
        size(attempt.mean - factoryZero) <= BigInt(constants.windowLimit) && !(automatic && isSuspect(next - 1));
    }
    attempts.push(attempt);
  };

  const pressed = (n: number) => n >= 0 && (input[n].status & EVENT_ZERO) !== 0;
  const edges = input.map((_, n) => n).filter((n) => constants.buttonMode === 1 && pressed(n) && !pressed(n - 1));
  if (constants.startMode === 1) decide(0, edges.length > 0 ? edges[0] : input.length, constants.settleSamples, true);
  edges.forEach((edge, k) => decide(edge, edges[k + 1] ?? input.length, 0, false));

  const busy = input.map((_, n) => attempts.some((a, k) =>
    n >= a.start && n <= a.decided && n < (attempts[k + 1]?.start ?? Infinity)));
  const follows = input.map((sample, n) => constants.trackMode === 1 && !busy[n] && quiet[n] && !isSuspect(n) &&
    size(sample.value - factoryZero) <= BigInt(constants.trackWindow));

  let tracked = 0n;
  let stretch = 0;
  const output = input.map((sample, n) => {
    const latest = attempts.filter((a) => a.decided <= n);
    const success = latest.filter((a) => a.success);
    const taken = success.length > 0 ? success[success.length - 1].mean : kept.taken;
    if (success.some((a) => a.decided === n)) tracked = 0n;
    stretch = follows[n] ? stretch + 1 : 0;
    const followed = stretch - constants.holdSamples;
    if (followed > 0 && followed % constants.stepSamples === 0) {
      const rest = sample.value - taken - tracked;
      const moved = rest > 0n ? tracked + 1n : rest < 0n ? tracked - 1n : tracked;
      if (size(moved) <= BigInt(constants.authority)) tracked = moved;
    }
    const removed = taken + tracked;
    const exact = sample.value - removed;
    const limit = BigInt(constants.limit);
    const held = exact > limit ? limit : exact < -limit ? -limit : exact;
    const refused = latest.length > 0 && !latest[latest.length - 1].success;
    const bits = (busy[n] ? SETTLING : 0) | (followed > 0 ? TRACKING : 0) | (held !== exact ? CLAMPED : 0) |
      (isSuspect(n) ? ZERO_SUSPECT : 0) | (refused ? ZERO_REFUSED : 0);
    return { ...sample, value: held, status: sample.status | bits, zero: removed };
  });
  const successes = attempts.filter((a) => a.success);
  const last = successes[successes.length - 1];
  return {
    output,
    kept: {
      taken: last === undefined ? kept.taken : last.mean,
      takenTemperature: last === undefined ? kept.takenTemperature : input[last.decided].temperature,
      suspect: input.length > 0 ? isSuspect(input.length - 1) : kept.suspect,
    },
  };
}

export function factoryKept(unit: UnitConstants): ZeroKept {
  return { taken: BigInt(unit.factoryZero), takenTemperature: 0n, suspect: false };
}

export const zeroOracle: Oracle<ZeroConstants> = (constants, unit, input) =>
  zeroFrom(constants, unit, input, factoryKept(unit)).output;
