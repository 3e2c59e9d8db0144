/**
 * Average against the mean of the whole history, and by hand: first sample, ties, how long a bit stays, the
 * largest length over the largest value, and what its check refuses.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  Average, CLAMPED, OVER_RANGE, RAILED, SETTLING, STUCK, checkAverage, type AverageConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { averageOracle } from './oracle/average.ts';

const constants = fc.record({
  kind: fc.constant<'average'>('average'),
  length: fc.oneof(fc.integer({ min: 1, max: 20 }), fc.constantFrom(1, 2, 64, 200)),
  primed: fc.constantFrom(0, 1),
});

describeStageLaws({
  name: 'average',
  make: (c, unit) => new Average(c, unit),
  cases: fc.record({ constants, unit: fc.constant(unitOf()), limit: edgy(1, 2147483647) }),
  oracle: averageOracle,
  branches: ['settling of its own', 'over range stays', 'rail stays', 'clamp stays', 'stuck stays', 'length 1',
    'primed'],
  observe(tally, c, input, output) {
    output.forEach((sample, n) => {
      const added = sample.status & ~input[n].status;
      tally.count('settling of its own', c.constants.primed === 0 && n + 1 < c.constants.length);
      tally.count('over range stays', (added & OVER_RANGE) !== 0);
      tally.count('rail stays', (added & RAILED) !== 0);
      tally.count('clamp stays', (added & CLAMPED) !== 0);
      tally.count('stuck stays', (added & STUCK) !== 0);
      tally.count('length 1', c.constants.length === 1);
      tally.count('primed', c.constants.primed === 1);
    });
  },
});

const averaged = (c: Omit<AverageConstants, 'kind'>, values: number[], status: number[] = []) =>
  feed(new Average({ kind: 'average', ...c }, unitOf()), values.map((v, n) => sampleOf(v, { status: status[n] ?? 0 })),
    [2]);

describe('average, by hand', () => {
  test('primed: the history holds the first sample', () => {
    expect(averaged({ length: 4, primed: 1 }, [8, 0, 0, 0, 0]).map((s) => Number(s.value))).toEqual([8, 6, 4, 2, 0]);
  });

  test('from zero: the history holds zero, settling until length samples are in', () => {
    const output = averaged({ length: 4, primed: 0 }, [8, 8, 8, 8, 8]);
    expect(output.map((s) => Number(s.value))).toEqual([2, 4, 6, 8, 8]);
    expect(output.map((s) => s.status)).toEqual([SETTLING, SETTLING, SETTLING, 0, 0]);
  });

  test('a tie goes up: 3/2 to 2, -3/2 to -1, -1/2 to 0', () => {
    expect(averaged({ length: 2, primed: 1 }, [1, 2]).map((s) => Number(s.value))).toEqual([1, 2]);
    expect(averaged({ length: 2, primed: 1 }, [-1, -2]).map((s) => Number(s.value))).toEqual([-1, -1]);
    expect(averaged({ length: 2, primed: 1 }, [0, -1]).map((s) => Number(s.value))).toEqual([0, 0]);
  });

  test('a lingering bit stays for exactly length - 1 samples, other bits do not stay', () => {
    const status = [0, OVER_RANGE | 1024 | 256, 0, 0, 0];
    expect(averaged({ length: 3, primed: 1 }, [0, 0, 0, 0, 0], status).map((s) => s.status))
      .toEqual([0, OVER_RANGE | 1024 | 256, OVER_RANGE, OVER_RANGE, 0]);
  });

  test('the largest length over the largest value is exact: 65536 of 2147483647', () => {
    const stage = new Average({ kind: 'average', length: 65536, primed: 1 }, unitOf());
    const output = feed(stage, [2147483647, 2147483647, -2147483647].map((v) => sampleOf(v)), [3]);
    // (65535 * m - m) / 65536 = m - m / 32768, m / 32768 = 65535.99997
    expect(output.map((s) => Number(s.value))).toEqual([2147483647, 2147483647, 2147418111]);
  });
});

describe('average refuses', () => {
  const good: AverageConstants = { kind: 'average', length: 8, primed: 1 };
  test('nothing in order', () => {
    expect(problemsOf(checkAverage, good, unitOf(), 2147483647)).toEqual([]);
    expect(problemsOf(checkAverage, good, unitOf(), 2147483647, 'reading')).toEqual([]);
  });
  test.each([
    ['length', 0], ['length', 65537], ['length', 1.5], ['primed', 2], ['primed', -1], ['length', NaN],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkAverage, { ...good, [field]: value }, unitOf(), 1), field);
  });
  test('codes', () => expectRefusal(problemsOf(checkAverage, good, unitOf(), 1, 'codes'), 'order'));
});
