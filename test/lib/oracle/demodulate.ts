/**
 * Demodulate by cutting the whole record into phases first: each phase gives one mean, known from the sample behind
 * its last one (or behind its `longest`-th). A sample then looks up the latest mean of each kind of phase.
 */
import {
  EVENT_QUARTER, EVENT_REVERSED, LINGERING, SETTLING, STUCK, type DemodulateConstants,
} from '../../../lib/index.ts';
import { roundDivide, type Oracle, type Sample } from './record.ts';

export interface Phase {
  /** Reversal: 0 or 1; quarter turn: plus 2 where turned. */
  kind: number;
  first: number;
  length: number;
}

interface Mean {
  kind: number;
  knownFrom: number;
  mean: bigint;
  bits: number;
}

export function phasesOf(c: DemodulateConstants, input: Sample[]): Phase[] {
  const kinds = input.map(({ status }) => {
    const reversed = (status & EVENT_REVERSED) !== 0 ? 1 : 0;
    const quarter = c.quarter === 1 && (status & EVENT_QUARTER) !== 0 ? 2 : 0;
    return reversed + quarter;
  });
  const starts = kinds.flatMap((kind, n) => (n === 0 || kind !== kinds[n - 1] ? [n] : []));
  return starts.map((first, i) => ({ kind: kinds[first], first, length: (starts[i + 1] ?? input.length) - first }));
}

function meansOf(c: DemodulateConstants, input: Sample[], phases: Phase[]): Mean[] {
  return phases.flatMap(({ kind, first, length }) => {
    const used = Math.min(length, c.longest);
    const samples = input.slice(Math.min(first + c.blank, first + used), first + used);
    if (samples.length === 0) return [];
    const sum = samples.reduce((total, sample) => total + sample.value, 0n);
    const bits = samples.reduce((all, sample) => all | (sample.status & LINGERING), 0);
    return [{ kind, knownFrom: first + used, mean: roundDivide(sum, BigInt(samples.length)), bits }];
  });
}

export const demodulateOracle: Oracle<DemodulateConstants> = (constants, _unit, input) => {
  const phases = phasesOf(constants, input);
  const means = meansOf(constants, input, phases);
  // kinds with a plus: 0 and Q; with a minus: R and RQ
  const signs = constants.quarter === 1 ? [1n, -1n, 1n, -1n] : [1n, -1n];
  return input.map((sample, n) => {
    const latest = signs.map((_, kind) => means.findLast((mean) => mean.kind === kind && mean.knownFrom <= n));
    const phase = phases.findLast(({ first }) => first <= n);
    const missing = latest.includes(undefined);
    const total = latest.reduce((sum, mean, kind) => sum + signs[kind] * (mean?.mean ?? 0n), 0n);
    const tooLong = phase !== undefined && n - phase.first >= constants.longest;
    const bits = latest.reduce((all, mean) => all | (mean?.bits ?? 0), missing ? SETTLING : 0);
    return {
      ...sample, value: missing ? 0n : roundDivide(total, BigInt(signs.length)),
      status: (sample.status & ~LINGERING) | bits | (tooLong ? STUCK : 0),
    };
  });
};
