/**
 * Over-range by search over the whole record: a sample is a cause when the last `consecutive` samples are all at one
 * rail, or it is beyond the limit or the slew itself; holding and latching look back for the last cause.
 */
import {
  EVENT_CLEAR, OVER_RANGE, OVER_RANGE_LATCHED, RAILED, STUCK, type OverRangeConstants,
} from '../../../lib/index.ts';
import type { Oracle, Sample } from './record.ts';

interface Seen {
  railed: boolean;
  beyond: boolean;
}

const size = (x: bigint): bigint => (x < 0n ? -x : x);

/** true when the last `length` values up to the n-th exist and all pass. */
function lastAll(values: bigint[], n: number, length: number, passes: (x: bigint) => boolean): boolean {
  return n + 1 >= length && values.slice(n + 1 - length, n + 1).every(passes);
}

/** What each sample shows by itself and in a row: at a rail, or beyond limit or slew. */
export function causes(c: OverRangeConstants, values: bigint[]): Seen[] {
  return values.map((x, n) => ({
    railed: lastAll(values, n, c.consecutive, (v) => v >= BigInt(c.highLimit)) ||
      lastAll(values, n, c.consecutive, (v) => v <= BigInt(c.lowLimit)),
    beyond: size(x) > BigInt(c.magnitudeLimit) || (n > 0 && size(x - values[n - 1]) > BigInt(c.slewLimit)),
  }));
}

function heldOrLatched(c: OverRangeConstants, seen: Seen[], input: Sample[], n: number): number {
  const last = seen.findLastIndex((cause, k) => k <= n && (cause.railed || cause.beyond));
  if (last === -1) return 0;
  const held = n > last && n - last <= c.holdSamples;
  const cleared = input.slice(last + 1, n + 1).some((sample) => (sample.status & EVENT_CLEAR) !== 0);
  return (held ? OVER_RANGE : 0) | (cleared ? 0 : OVER_RANGE_LATCHED);
}

export const overRangeOracle: Oracle<OverRangeConstants> = (constants, unit, input) => {
  const { highLimit, lowLimit, stuckAfter } = constants;
  const values = input.map((sample) => BigInt(unit.sign) * sample.value);
  const seen = causes(constants, values);
  return input.map((sample, n) => {
    const x = values[n];
    const between = x < BigInt(highLimit) && x > BigInt(lowLimit);
    const stuck = stuckAfter > 0 && between && lastAll(values, n, stuckAfter, (v) => v === x);
    const status = sample.status | heldOrLatched(constants, seen, input, n) | (seen[n].railed ? RAILED : 0) |
      (seen[n].beyond ? OVER_RANGE : 0) | (stuck ? STUCK : 0);
    return { ...sample, status };
  });
};
