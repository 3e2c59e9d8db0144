/**
 * Scale against one exact rational number rounded once, and by hand: ties, clamps at both ends, and what its
 * check refuses, the law of width one step beside its end.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { CLAMPED, Scale, checkScale, type ScaleConstants } from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { scaleOracle } from './oracle/scale.ts';

const cases = fc.record({
  constants: fc.record({
    kind: fc.constant<'scale'>('scale'), gain: edgy(1, 2147483647), shift: edgy(0, 52),
    readingsPerAmpere: fc.constantFrom(1000, 1000000), limit: edgy(1, 2147483647),
  }),
  unit: fc.constant(unitOf()),
  limit: fc.oneof(edgy(1, 4000000), edgy(1, 2147483647)),
}).filter((c) => problemsOf(checkScale, c.constants, c.unit, c.limit).length === 0);

describeStageLaws({
  name: 'scale',
  make: (c, unit) => new Scale(c, unit),
  cases,
  oracle: scaleOracle,
  branches: ['clamped high', 'clamped low', 'within', 'shift 0', 'tie'],
  observe(tally, c, input, output) {
    const { gain, shift, limit } = c.constants;
    output.forEach((sample, n) => {
      const clamped = (sample.status & ~input[n].status & CLAMPED) !== 0;
      tally.count('clamped high', clamped && sample.value === BigInt(limit));
      tally.count('clamped low', clamped && sample.value === -BigInt(limit));
      tally.count('within', !clamped);
      tally.count('shift 0', shift === 0);
      tally.count('tie', shift > 0 && BigInt.asUintN(shift, input[n].value * BigInt(gain)) === 1n << BigInt(shift - 1));
    });
  },
});

const scaled = (gain: number, shift: number, limit: number, values: number[]) =>
  feed(new Scale({ kind: 'scale', gain, shift, readingsPerAmpere: 1000, limit }, unitOf()),
    values.map((v) => sampleOf(v)), [2])
    .map((s) => [Number(s.value), s.status]);

describe('scale, by hand', () => {
  test('a tie goes up: 3/2 to 2, 1/2 to 1, -1/2 to 0, -3/2 to -1', () => {
    expect(scaled(1, 1, 100, [3, 1, -1, -3])).toEqual([[2, 0], [1, 0], [0, 0], [-1, 0]]);
  });
  test('clamps at both ends with CLAMPED; the limit itself is not clamped', () => {
    expect(scaled(3, 0, 30, [10, -10, 11, -11])).toEqual([[30, 0], [-30, 0], [30, CLAMPED], [-30, CLAMPED]]);
  });
});

describe('scale refuses', () => {
  const good: ScaleConstants = { kind: 'scale', gain: 1000, shift: 10, readingsPerAmpere: 1000, limit: 1000000 };
  test('nothing in order', () => expect(problemsOf(checkScale, good, unitOf(), 8388608)).toEqual([]));
  test.each([
    ['gain', 0], ['gain', 2147483648], ['gain', 0.5], ['shift', -1], ['shift', 53], ['limit', 0], ['limit', 2147483648],
    ['readingsPerAmpere', 1], ['readingsPerAmpere', 100000],
  ])('%s %s', (field, value) => {
    const list = problemsOf(checkScale, { ...good, [field]: value }, unitOf(), 1000);
    expectRefusal(list.slice(0, 1), field);
    expect(list.every((problem) => problem.field === field || problem.field === 'output')).toBe(true);
  });
  test('readings and codes', () => {
    expectRefusal(problemsOf(checkScale, good, unitOf(), 1, 'reading'), 'order');
    expectRefusal(problemsOf(checkScale, good, unitOf(), 1, 'codes'), 'order');
  });
  test('a product that reaches 2^53, and takes the largest one below', () => {
    const wide = { ...good, gain: 1073741824, shift: 30 }; // 2^30
    // 2^30 * 2^23 = 2^53; 2^30 * (2^23 - 1) + 2^29 is below
    expectRefusal(problemsOf(checkScale, wide, unitOf(), 8388608), '|x| * gain');
    expect(problemsOf(checkScale, wide, unitOf(), 8388607)).toEqual([]);
  });
});
