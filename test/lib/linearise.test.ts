/**
 * Linearise against a search among the knots, and by hand: knots, ties, both ways beyond the ends, clamps, and
 * what its check refuses.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { CLAMPED, Linearise, checkLinearise, type LineariseConstants } from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, evenly, sampleOf, unitOf } from './records.ts';
import { lineariseOracle } from './oracle/linearise.ts';

const cases = fc.record({
  limit: fc.oneof(edgy(1, 100000), edgy(1, 2147483647)),
  gridBits: fc.oneof(edgy(0, 12), edgy(0, 30)),
  beyond: fc.constantFrom(0, 1),
  held: edgy(1, 2147483647),
  knots: fc.oneof(
    fc.array(edgy(-100000, 100000), { minLength: 2, maxLength: 20 }),
    fc.array(edgy(-2147483648, 2147483647), { minLength: 2, maxLength: 4 }),
    fc.array(edgy(-1000, 1000), { minLength: 257, maxLength: 257 }),
  ),
  // where the grid begins, as a part of what comes in
  start: evenly(-1, 1),
  nearEnd: fc.constantFrom(0, 1),
}).map((d) => {
  const origin = Math.round(d.start * d.limit);
  const end = Math.min(d.limit, origin + (d.knots.length - 1) * 2 ** d.gridBits);
  return {
    constants: {
      kind: 'linearise' as const, origin, gridBits: d.gridBits, knots: d.knots, beyond: d.beyond, limit: d.held,
    },
    unit: unitOf(),
    limit: d.limit,
    around: d.nearEnd === 1 ? end : origin,
  };
}).filter((c) => problemsOf(checkLinearise, c.constants, c.unit, c.limit).length === 0);

describeStageLaws<LineariseConstants>({
  name: 'linearise',
  make: (c, unit) => new Linearise(c, unit),
  cases,
  oracle: lineariseOracle,
  branches: ['below, held', 'below, end slope', 'above, held', 'above, end slope', 'at a knot', 'at the last knot',
    'between',
    'clamped to limit'],
  runs: 300,
  observe(tally, c, input, output) {
    const { origin, gridBits, knots, beyond } = c.constants;
    const step = 2n ** BigInt(gridBits);
    const end = BigInt(origin) + step * BigInt(knots.length - 1);
    input.forEach(({ value: x, status }, n) => {
      tally.count('below, held', x < BigInt(origin) && beyond === 0);
      tally.count('below, end slope', x < BigInt(origin) && beyond === 1);
      tally.count('above, held', x > end && beyond === 0);
      tally.count('above, end slope', x > end && beyond === 1);
      const within = x >= BigInt(origin) && x <= end;
      tally.count('at a knot', within && (x - BigInt(origin)) % step === 0n);
      tally.count('at the last knot', x === end);
      tally.count('between', within && (x - BigInt(origin)) % step !== 0n);
      tally.count('clamped to limit', within && (output[n].status & ~status & CLAMPED) !== 0);
    });
  },
});

const linearised = (part: Partial<LineariseConstants>, values: number[]) => feed(new Linearise({
  kind: 'linearise', origin: -8, gridBits: 3, knots: [-10, 0, 6], beyond: 0, limit: 1000, ...part,
}, unitOf()), values.map((v) => sampleOf(v)), [3]).map((s) => [Number(s.value), s.status]);

describe('linearise, by hand', () => {
  test('exact at the knots, the last one included, without CLAMPED', () => {
    expect(linearised({}, [-8, 0, 8])).toEqual([[-10, 0], [0, 0], [6, 0]]);
  });
  test('rounded between: -10 + round(10 * 1 / 8) = -9, round(6 * 1 / 8) = 1, a tie round(6 * 2 / 8 = 1.5) = 2', () => {
    expect(linearised({}, [-7, 1, 2])).toEqual([[-9, 0], [1, 0], [2, 0]]);
    // falling: 0 + round(-6 * 2 / 8 = -1.5) = -1: a tie goes up
    expect(linearised({ knots: [0, 0, -6] }, [2])).toEqual([[-1, 0]]);
  });
  test('beyond 0 holds the end value with CLAMPED from one count beyond', () => {
    expect(linearised({}, [-9, 9, 1000])).toEqual([[-10, CLAMPED], [6, CLAMPED], [6, CLAMPED]]);
  });
  test('beyond 1 goes on with the end slope: 10 and 6 counts a step of 8', () => {
    expect(linearised({ beyond: 1 }, [-16, 16, -12, 12])).toEqual([[-20, 0], [12, 0], [-15, 0], [9, 0]]);
  });
  test('clamps to the limit at both ends; the limit itself is not clamped', () => {
    expect(linearised({ beyond: 1, limit: 12 }, [16, 18, -16])).toEqual([[12, 0], [12, CLAMPED], [-12, CLAMPED]]);
  });
});

describe('linearise refuses', () => {
  const good: LineariseConstants = { kind: 'linearise', origin: -8, gridBits: 3, knots: [-10, 0, 6], beyond: 0,
    limit: 1000 };
  test('nothing in order', () => expect(problemsOf(checkLinearise, good, unitOf(), 1000)).toEqual([]));
  test.each<[keyof LineariseConstants, unknown]>([
    ['origin', 2147483648], ['origin', -2147483649], ['origin', 0.5], ['gridBits', -1], ['gridBits', 31], ['beyond', 2],
    ['limit', 0], ['knots', [1]], ['knots', new Array(258).fill(0)], ['knots', [0, 0.5]],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkLinearise, { ...good, [field]: value }, unitOf(), 1000), field);
  });
  test('a knot beyond 32 bits', () => {
    expect(problemsOf(checkLinearise, { ...good, knots: [0, 2147483648] }, unitOf(), 1)[0].field).toBe('knots');
  });
  test('codes and readings', () => {
    expectRefusal(problemsOf(checkLinearise, good, unitOf(), 1, 'codes'), 'order');
    expectRefusal(problemsOf(checkLinearise, good, unitOf(), 1, 'reading'), 'order');
  });
  test('knots so steep that the product reaches 2^53', () => {
    // 2^31 a step times 2^22 = 2^53
    const steep = { ...good, origin: 0, gridBits: 0, knots: [-1073741824, 1073741824] };
    expectRefusal(problemsOf(checkLinearise, steep, unitOf(), 4194304), 'knot difference * |x - origin|');
    expect(problemsOf(checkLinearise, steep, unitOf(), 2097152)).toEqual([]);
  });
  test('an end knot that lifts the product to 2^53', () => {
    // 2^22 * (2^31 - 403) + 2^31 - 1 = 2^53 + 457179135 on the end slope, although the product is below 2^53
    const lifted = { ...good, origin: 0, gridBits: 0, beyond: 1, knots: [2147483647 - 4194304, 2147483647] };
    expectRefusal(problemsOf(checkLinearise, lifted, unitOf(), 2147483648 - 402), 'knot difference * |x - origin|');
  });
});
