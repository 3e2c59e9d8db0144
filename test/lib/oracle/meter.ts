/**
 * Meter from the whole record: sums of every stretch are differences of running sums, roots are exact integer roots of
 * exact integers of any size, and windows are cut by looking for the next crossing from where the last one ended.
 */
import type { MeterConstants } from '../../../lib/index.ts';
import { roundDivide, type Oracle, type Sample } from './record.ts';

/** floor(sqrt(n)) by Newton's iteration from above. */
export function integerRoot(n: bigint): bigint {
  if (n < 2n) return n;
  let root = 1n << BigInt((n.toString(2).length + 1) >> 1);
  for (;;) {
    const next = (root + n / root) / 2n;
    if (next >= root) return root;
    root = next;
  }
}

/** A record in the order of RECORD_FIELDS, over the samples from..to-1, behind those from `skipFrom` on. */
export function windowRecord(samples: Sample[], skipFrom: number, from: number, to: number, cycles: number): number[] {
  const window = samples.slice(from, to);
  const values = window.map((sample) => sample.value);
  const n = BigInt(values.length);
  const sum = values.reduce((total, value) => total + value, 0n);
  const squares = values.reduce((total, value) => total + value * value, 0n);
  const sorted = [...values].sort((p, q) => (p < q ? -1 : p > q ? 1 : 0));
  const status = samples.slice(skipFrom, to).reduce((bits, sample) => bits | sample.status, 0);
  return [
    from - skipFrom, values.length, Number(roundDivide(sum, n)), Number(integerRoot(squares / n)),
    Number(integerRoot(n * squares - sum * sum) / n), Number(sorted[sorted.length - 1]), Number(sorted[0]), cycles,
    status, Number(window[window.length - 1].zero),
  ];
}

function fixedWindows(length: number, samples: Sample[]): number[][] {
  const records: number[][] = [];
  for (let end = length; end <= samples.length; end += length) {
    records.push(windowRecord(samples, end - length, end - length, end, 0));
  }
  return records;
}

function cycleWindows(c: MeterConstants, samples: Sample[]): number[][] {
  const upTo = [0n];
  for (const sample of samples) upTo.push(upTo[upTo.length - 1] + sample.value);
  const hysteresis = BigInt(c.hysteresis);
  const records: number[][] = [];
  let reference: [number, number] | undefined;
  let skipFrom = 0;
  let from = 0;
  let crossings = -1; // -1: ahead of the first crossing
  let wasLow = false;
  for (let n = 0; n < samples.length; n++) {
    const [low, high] = reference ?? [from, n];
    const count = BigInt(high - low);
    // distance from the mean, in count-ths
    const above = samples[n].value * count - (upTo[high] - upTo[low]);
    const crossed = count > 0n && wasLow && above >= hysteresis * count;
    if (crossed) wasLow = false;
    else if (count > 0n && above <= -hysteresis * count) wasLow = true;
    if (crossed) {
      crossings++;
      if (crossings === 0) from = n;
      if (crossings === c.cycles) {
        records.push(windowRecord(samples, skipFrom, from, n, c.cycles));
        reference = [from, n];
        skipFrom = n;
        from = n;
        crossings = 0;
      }
    }
    if (n + 1 - from === c.windowSamples) {
      records.push(windowRecord(samples, skipFrom, from, n + 1, 0));
      reference = [from, n + 1];
      skipFrom = n + 1;
      from = n + 1;
      crossings = -1;
    }
  }
  return records;
}

/** Every record that the meter has ever written, oldest first. */
export function meterRecords(c: MeterConstants, samples: Sample[]): number[][] {
  return c.cycles === 0 ? fixedWindows(c.windowSamples, samples) : cycleWindows(c, samples);
}

/** A tap: the samples go on as they came. */
export const meterOracle: Oracle<MeterConstants> = (_constants, _unit, input) => input;
