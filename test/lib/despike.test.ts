import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  CLAMPED, checkDespike, Despike, OVER_RANGE, RAILED, SETTLING, STUCK, TRACKING, type DespikeConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { despikeOracle } from './oracle/despike.ts';

const constants = fc.record({
  kind: fc.constant<'despike'>('despike'), window: fc.constantFrom(3, 5), primed: fc.constantFrom(0, 1),
});
const AGES = [0, 1, 2, 3, 4];

describeStageLaws<DespikeConstants>({
  name: 'despike',
  make: (c, unit) => new Despike(c, unit),
  cases: fc.record({ constants, unit: fc.constant(unitOf()), limit: fc.oneof(edgy(1, 100), edgy(1, 2147483647)) }),
  oracle: despikeOracle,
  branches: ['settling of its own', 'over range stays', 'rail stays', 'clamp stays', 'stuck stays', 'primed',
    ...AGES.flatMap((age) => (age < 3 ? [`3: only x[n-${age}]`, `5: only x[n-${age}]`] : [`5: only x[n-${age}]`]))],
  observe(tally, c, input, output) {
    const { window, primed } = c.constants;
    output.forEach((sample, n) => {
      const added = sample.status & ~input[n].status;
      tally.count('settling of its own', primed === 0 && n + 1 < window);
      tally.count('over range stays', (added & OVER_RANGE) !== 0);
      tally.count('rail stays', (added & RAILED) !== 0);
      tally.count('clamp stays', (added & CLAMPED) !== 0);
      tally.count('stuck stays', (added & STUCK) !== 0);
      tally.count('primed', primed === 1);
      if (n + 1 < window) return;
      const ages = AGES.slice(0, window).filter((age) => input[n - age].value === sample.value);
      if (ages.length === 1) tally.count(`${window}: only x[n-${ages[0]}]`);
    });
  },
});

const median = (window: number, primed: number, values: number[], status: number[] = []) =>
  feed(new Despike({ kind: 'despike', window, primed }, unitOf()),
    values.map((v, n) => sampleOf(v, { status: status[n] ?? 0 })), [2]);
const valuesOf = (samples: { value: bigint }[]) => samples.map((s) => Number(s.value));

describe('despike, by hand', () => {
  test('a spike of one sample is gone with window 3, of two samples with window 5; a step stays, (window-1)/2 late',
    () => {
    expect(valuesOf(median(3, 1, [4, 4, 900, 4, 4]))).toEqual([4, 4, 4, 4, 4]);
    expect(valuesOf(median(3, 1, [4, 900, 900, 4, 4]))).toEqual([4, 4, 900, 900, 4]);
    expect(valuesOf(median(5, 1, [4, 4, 900, -900, 4, 4, 4]))).toEqual([4, 4, 4, 4, 4, 4, 4]);
    expect(valuesOf(median(5, 1, [4, 900, 900, 4, 4, 4]))).toEqual([4, 4, 4, 4, 4, 4]);
    expect(valuesOf(median(3, 1, [0, 7, 7, 7]))).toEqual([0, 0, 7, 7]);
    expect(valuesOf(median(5, 1, [0, 7, 7, 7, 7]))).toEqual([0, 0, 0, 7, 7]);
  });

  test('every order of five values has the same median, every order of three too', () => {
    const orders = (list: number[]): number[][] => list.length === 0 ? [[]] :
      list.flatMap((item, i) => orders(list.toSpliced(i, 1)).map((rest) => [item, ...rest]));
    for (const order of orders([-2147483647, -1, 0, 5, 2147483647])) {
      expect(valuesOf(median(5, 0, order)).at(-1)).toBe(0);
    }
    for (const order of orders([1, 1, 3, 2, 2])) expect(valuesOf(median(5, 1, order)).at(-1)).toBe(2);
    for (const order of orders([-8, 3, 4])) expect(valuesOf(median(3, 0, order)).at(-1)).toBe(3);
  });

  test('primed: the history holds the first sample, nothing settles', () => {
    expect(median(5, 1, [9, 1]).map((s) => [Number(s.value), s.status])).toEqual([[9, 0], [9, 0]]);
  });

  test('from zero: the history holds zero, settling until window samples are in', () => {
    expect(median(3, 0, [9, 9, 9]).map((s) => [Number(s.value), s.status]))
      .toEqual([[0, SETTLING], [9, SETTLING], [9, 0]]);
    expect(median(5, 0, [9, 9, 9, 9, 9]).map((s) => s.status)).toEqual([SETTLING, SETTLING, SETTLING, SETTLING, 0]);
  });

  test('a lingering bit stays for exactly window - 1 samples, other bits do not stay', () => {
    const status = [0, STUCK | TRACKING];
    expect(median(3, 1, [0, 0, 0, 0, 0], status).map((s) => s.status)).toEqual([0, STUCK | TRACKING, STUCK, STUCK, 0]);
    expect(median(5, 1, [0, 0, 0, 0, 0, 0, 0], status).map((s) => s.status))
      .toEqual([0, STUCK | TRACKING, STUCK, STUCK, STUCK, STUCK, 0]);
  });
});

describe('despike refuses', () => {
  const good: DespikeConstants = { kind: 'despike', window: 5, primed: 1 };
  test('nothing in order', () => {
    expect(problemsOf(checkDespike, good, unitOf(), 2147483647)).toEqual([]);
    expect(problemsOf(checkDespike, { ...good, window: 3, primed: 0 }, unitOf(), 1, 'samples')).toEqual([]);
  });
  test.each<[keyof DespikeConstants, number]>([
    ['window', 1], ['window', 4], ['window', 7], ['window', 3.5], ['primed', 2], ['primed', -1], ['primed', 0.5],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkDespike, { ...good, [field]: value }, unitOf(), 1), field);
  });
  test('codes and readings', () => {
    expectRefusal(problemsOf(checkDespike, good, unitOf(), 1, 'codes'), 'order');
    expectRefusal(problemsOf(checkDespike, good, unitOf(), 1, 'reading'), 'order');
  });
});
