/**
 * Second-order sections as three signals over all time: x, y and the error e of every rounding, each with its past in
 * front of the record. A section is one exact sum of three convolutions, divided once:
 *   y[n] = round((b * x - a * y + k * e)[n] / 2^F),   e[n] = what this rounding left over (0 up to a clamp).
 */
import { CLAMPED, SETTLING, type SectionConstants, type SectionsConstants } from '../../../lib/index.ts';
import { roundDivide, type Oracle } from './record.ts';
import { lingerOracle } from './stays.ts';

const ERROR_TAPS = [[0n, 0n], [1n, 0n], [2n, -1n]];
const PAST = 2;

interface SectionHistory {
  y: bigint[];
  clampedAt: boolean[];
  /** y ahead of the record: what a primed section behind has as its x. */
  rest: bigint;
}

/** taps[0] * signal[n] + taps[1] * signal[n - 1] + ... */
function convolve(taps: bigint[], signal: bigint[], n: number): bigint {
  return taps.reduce((sum, tap, k) => sum + tap * signal[n - k], 0n);
}

/** `first` is the x that has always been there ahead of the record. */
export function sectionOracle(c: SectionConstants, values: bigint[], primed: boolean, first: bigint): SectionHistory {
  const unity = 2n ** BigInt(c.fractionBits);
  const limit = BigInt(c.limit);
  const b = [c.b0, c.b1, c.b2].map(BigInt);
  const a = [c.a1, c.a2].map(BigInt);
  const held = (value: bigint) => (value > limit ? limit : value < -limit ? -limit : value);
  const sum = (taps: bigint[]) => taps.reduce((total, tap) => total + tap, 0n);
  const rest = primed ? held(roundDivide(first * sum(b), unity + sum(a))) : 0n;
  const x = [first, first, ...values];
  const y = [rest, rest];
  const e = [0n, 0n];
  const clampedAt: boolean[] = [];
  for (let n = PAST; n < x.length; n++) {
    const wide = convolve(b, x, n) - convolve(a, y, n - 1) + convolve(ERROR_TAPS[c.feedback], e, n - 1);
    const rounded = roundDivide(wide, unity);
    const clamped = held(rounded) !== rounded;
    if (clamped) e.fill(0n);
    y.push(held(rounded));
    e.push(clamped ? 0n : wide - rounded * unity);
    clampedAt.push(clamped);
  }
  return { y: y.slice(PAST), clampedAt, rest };
}

export const sectionsOracle: Oracle<SectionsConstants> = (constants, _unit, input) => {
  if (input.length === 0) return [];
  let values = input.map((sample) => sample.value);
  let output = input;
  let before = constants.primed === 1 ? values[0] : 0n;
  for (const section of constants.sections) {
    const { y, clampedAt, rest } = sectionOracle(section, values, constants.primed === 1, before);
    before = rest;
    output = output.map((sample, n) => ({ ...sample, status: sample.status | (clampedAt[n] ? CLAMPED : 0) }));
    values = y;
  }
  output = lingerOracle(output, constants.memorySamples);
  const settling = constants.primed === 1 ? 0 : constants.memorySamples;
  return output.map((sample, n) => ({
    ...sample, value: values[n], status: sample.status | (n < settling ? SETTLING : 0),
  }));
};
