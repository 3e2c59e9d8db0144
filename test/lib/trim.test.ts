import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  checkGainTrim, checkOffsetTrim, CLAMPED, GainTrim, OffsetTrim, UNITY_Q24, type GainTrimConstants,
  type OffsetTrimConstants, type UnitConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, evenly, sampleOf, unitOf } from './records.ts';
import { gainTrimOracle, offsetTrimOracle } from './oracle/trim.ts';
import { tableOracle } from './oracle/table.ts';
import type { Sample } from './oracle/record.ts';
import type { Tally } from './tally.ts';

const WITH_THERMOMETER = { temperature: true };
const knots = (low: number, high: number) => fc.uniqueArray(
  fc.oneof(edgy(-131072, 131072), edgy(-2147483648, 2147483647)), { minLength: 1, maxLength: 16 },
).chain((xs) => fc.tuple(
  fc.constant([...xs].sort((a, b) => a - b)), fc.array(edgy(low, high), { minLength: xs.length, maxLength: xs.length }),
));
const limit = fc.oneof(edgy(1, 2147483647), edgy(1, 1000), fc.constant(2147483647));
/** A part of what comes in, or 0 for a limit of any size. */
const part = fc.oneof(fc.constant(0), evenly(0, 1));
const heldAt = (drawn: { part: number; limit: number; held: number }) =>
  (drawn.part === 0 ? drawn.held : Math.max(1, Math.round(drawn.part * drawn.limit)));

const offsetCases = fc.record({
  limit: fc.oneof(edgy(1, 1000), edgy(1, 2147483647)), held: limit, part,
  table: fc.oneof(knots(-300, 300), knots(-2147483647, 2147483647)),
}).map((d) => ({
  constants: { kind: 'offsetTrim' as const, limit: heldAt(d) },
  unit: unitOf({ offsetTemperatures: d.table[0], offsets: d.table[1] }), limit: d.limit,
  // where it begins to clamp below the table
  around: Math.max(-d.limit, Math.min(d.limit, heldAt(d) + d.table[1][0])),
})).filter((c) => problemsOf(checkOffsetTrim, c.constants, c.unit, c.limit, 'counts', WITH_THERMOMETER).length === 0);

const gainCases = fc.record({
  limit: fc.oneof(edgy(1, 1000), edgy(1, 33554431), edgy(1, 2147483647)), held: limit, part,
  gainQ24: fc.oneof(fc.constant(UNITY_Q24), edgy(4194304, 67108864)), table: knots(4194304, 67108864),
}).map((d) => ({
  constants: { kind: 'gainTrim' as const, limit: heldAt(d) },
  unit: unitOf({ gainQ24: d.gainQ24, gainTemperatures: d.table[0], gainsQ24: d.table[1] }), limit: d.limit,
})).filter((c) => problemsOf(checkGainTrim, c.constants, c.unit, c.limit, 'counts', WITH_THERMOMETER).length === 0);

function countTrim(tally: Tally, held: number, temperatures: number[], input: Sample[], output: Sample[]): void {
  output.forEach((sample, n) => {
    const t = sample.temperature;
    const clamped = (sample.status & ~input[n].status & CLAMPED) !== 0;
    tally.count('clamped high', clamped && sample.value === BigInt(held));
    tally.count('clamped low', clamped && sample.value === -BigInt(held));
    tally.count('at the limit, not clamped',
      !clamped && sample.value === BigInt(held) && (input[n].status & CLAMPED) === 0);
    tally.count('below the table', t < BigInt(temperatures[0]));
    tally.count('above the table', t > BigInt(temperatures[temperatures.length - 1]));
    tally.count('between knots', t > BigInt(temperatures[0]) && t < BigInt(temperatures[temperatures.length - 1]));
    tally.count('one knot', temperatures.length === 1);
    tally.count('temperature changes', n > 0 && t !== input[n - 1].temperature);
    tally.count('temperature stays', n > 0 && t === input[n - 1].temperature);
  });
}
const BRANCHES = ['clamped high', 'clamped low', 'at the limit, not clamped', 'below the table', 'above the table',
  'between knots', 'one knot', 'temperature changes', 'temperature stays'];

describeStageLaws<OffsetTrimConstants>({
  name: 'offsetTrim',
  make: (c, unit) => new OffsetTrim(c, unit),
  cases: offsetCases,
  oracle: offsetTrimOracle,
  runs: 600,
  branches: BRANCHES,
  observe: (tally, c, input, output) => countTrim(tally, c.constants.limit, c.unit.offsetTemperatures, input, output),
});

describeStageLaws<GainTrimConstants>({
  name: 'gainTrim',
  make: (c, unit) => new GainTrim(c, unit),
  cases: gainCases,
  oracle: gainTrimOracle,
  runs: 300,
  branches: [...BRANCHES, 'tie', 'gain above 4'],
  observe(tally, c, input, output) {
    const { gainQ24, gainTemperatures, gainsQ24 } = c.unit;
    countTrim(tally, c.constants.limit, gainTemperatures, input, output);
    for (const { value, temperature } of input) {
      // the two gains as one product of 48 fraction bits, before any rounding
      const gain = BigInt(gainQ24) * tableOracle(gainTemperatures, gainsQ24, temperature);
      const exact = gain % 2n ** 24n === 0n;
      tally.count('tie', exact && BigInt.asUintN(24, value * (gain >> 24n)) === 2n ** 23n);
      tally.count('gain above 4', gain > 4n * 2n ** 48n);
    }
  },
});

type Trim = typeof OffsetTrim | typeof GainTrim;

/** Given as [value, temperature]; gives [value, status]. */
function trimmed(Stage: Trim, unit: Partial<UnitConstants>, given: number[][], held = 2147483647): number[][] {
  const constants = { kind: Stage === OffsetTrim ? 'offsetTrim' : 'gainTrim', limit: held };
  return feed(new Stage(constants as never, unitOf(unit)),
    given.map(([v, t]) => sampleOf(v, { temperature: BigInt(t) })), [2])
    .map((s) => [Number(s.value), s.status]);
}

describe('offset trim, by hand', () => {
  const table = { offsetTemperatures: [0, 256], offsets: [10, 20] };
  test('takes away the offset of the temperature, held beyond the ends of the table', () => {
    expect(trimmed(OffsetTrim, table, [[100, 0], [100, 256], [100, 128], [100, -9999], [100, 9999]]))
      .toEqual([[90, 0], [80, 0], [85, 0], [90, 0], [80, 0]]);
  });
  test('a temperature of 0 at the first sample is looked up like any other', () => {
    expect(trimmed(OffsetTrim, { offsets: [7] }, [[0, 0], [0, 0]])).toEqual([[-7, 0], [-7, 0]]);
  });
  test('clamps at both ends with CLAMPED; the limit itself is not clamped', () => {
    expect(trimmed(OffsetTrim, table, [[60, 0], [61, 0], [-40, 0], [-41, 0]], 50))
      .toEqual([[50, 0], [50, CLAMPED], [-50, 0], [-50, CLAMPED]]);
  });
  test('the largest value and offset are exact before they are clamped', () => {
    expect(trimmed(OffsetTrim, { offsets: [-2147483647] }, [[2147483647, 0], [-2147483647, 0]]))
      .toEqual([[2147483647, CLAMPED], [0, 0]]);
  });
});

describe('gain trim, by hand', () => {
  const HALF = UNITY_Q24 / 2;
  test('a tie goes up: 3/2 to 2, 1/2 to 1, -1/2 to 0, -3/2 to -1', () => {
    expect(trimmed(GainTrim, { gainQ24: HALF }, [[3, 0], [1, 0], [-1, 0], [-3, 0]]))
      .toEqual([[2, 0], [1, 0], [0, 0], [-1, 0]]);
  });
  test('unity is exact up to 2^29 - 33, the most that the law of width leaves it', () => {
    expect(trimmed(GainTrim, {}, [[536870879, 0], [-536870879, 0]])).toEqual([[536870879, 0], [-536870879, 0]]);
  });
  test('unit gain times table gain, rounded once to 24 fraction bits', () => {
    expect(trimmed(GainTrim, { gainQ24: 3 * HALF, gainsQ24: [3 * HALF] }, [[1000, 0]])).toEqual([[2250, 0]]);
    // (2^24 + 1) * (2^24 + 2^23) / 2^24 = 2^24 + 2^23 + 1.5, up to 2; times 2^23 / 2^24
    expect(trimmed(GainTrim, { gainQ24: UNITY_Q24 + 1, gainsQ24: [3 * HALF] }, [[8388608, 0]]))
      .toEqual([[12582913, 0]]);
  });
  test('gains of 4 each make 16; a quarter each makes 1/16', () => {
    const four = 4 * UNITY_Q24;
    expect(trimmed(GainTrim, { gainQ24: four, gainsQ24: [four] }, [[33554431, 0]])).toEqual([[16 * 33554431, 0]]);
    expect(trimmed(GainTrim, { gainQ24: UNITY_Q24 / 4, gainsQ24: [UNITY_Q24 / 4] }, [[160, 0], [-8, 0]]))
      .toEqual([[10, 0], [0, 0]]);
  });
  test('follows the temperature between knots', () => {
    const table = { gainTemperatures: [0, 256], gainsQ24: [UNITY_Q24, 2 * UNITY_Q24] };
    expect(trimmed(GainTrim, table, [[100, 0], [100, 64], [100, 256], [100, -1], [100, 300]]).map(([v]) => v))
      .toEqual([100, 125, 200, 100, 200]);
  });
  test('clamps at both ends with CLAMPED; the limit itself is not clamped', () => {
    expect(trimmed(GainTrim, { gainQ24: 2 * UNITY_Q24 }, [[15, 0], [16, 0], [-15, 0], [-16, 0]], 30))
      .toEqual([[30, 0], [30, CLAMPED], [-30, 0], [-30, CLAMPED]]);
  });
});

describe('trims refuse', () => {
  const offset: OffsetTrimConstants = { kind: 'offsetTrim', limit: 1000 };
  const gain: GainTrimConstants = { kind: 'gainTrim', limit: 1000 };
  const twoKnots = unitOf({
    offsetTemperatures: [0, 1], offsets: [0, 1], gainTemperatures: [0, 1], gainsQ24: [UNITY_Q24, UNITY_Q24],
  });

  test('nothing in order: a table of one knot needs no thermometer', () => {
    expect(problemsOf(checkOffsetTrim, offset, unitOf(), 2147483647)).toEqual([]);
    expect(problemsOf(checkGainTrim, gain, unitOf(), 1000, 'samples')).toEqual([]);
  });
  test('a table of several knots without a thermometer ahead', () => {
    expectRefusal(problemsOf(checkOffsetTrim, offset, twoKnots, 1), 'order');
    expectRefusal(problemsOf(checkGainTrim, gain, twoKnots, 1), 'order');
    expect(problemsOf(checkOffsetTrim, offset, twoKnots, 1, 'counts', WITH_THERMOMETER)).toEqual([]);
    expect(problemsOf(checkGainTrim, gain, twoKnots, 1, 'counts', WITH_THERMOMETER)).toEqual([]);
  });
  test('an absolute offset behind a zero; a gain may stand there', () => {
    const list = problemsOf(checkOffsetTrim, offset, unitOf(), 1, 'counts', { zeroed: true });
    expectRefusal(list, 'order');
    expect(list[0].remedy).toBe('the zero has already removed this offset');
    expect(problemsOf(checkGainTrim, gain, unitOf(), 1, 'counts', { zeroed: true })).toEqual([]);
  });
  test.each([0, -1, 0.5, NaN])('limit %s', (value) => {
    expectRefusal(problemsOf(checkOffsetTrim, { ...offset, limit: value }, unitOf(), 1), 'limit');
    expectRefusal(problemsOf(checkGainTrim, { ...gain, limit: value }, unitOf(), 1), 'limit');
  });
  test('a limit beyond 32 bits', () => {
    const beyond = { limit: 2147483648 };
    expect(problemsOf(checkOffsetTrim, { ...offset, ...beyond }, unitOf(), 1)[0].field).toBe('limit');
    expect(problemsOf(checkGainTrim, { ...gain, ...beyond }, unitOf(), 1)[0].field).toBe('limit');
  });
  test.each(['codes', 'reading'] as const)('%s', (domain) => {
    expectRefusal(problemsOf(checkOffsetTrim, offset, unitOf(), 1, domain), 'order');
    expectRefusal(problemsOf(checkGainTrim, gain, unitOf(), 1, domain), 'order');
  });
  test('a product that reaches 2^53, and takes all below 2^25 at gains of 4', () => {
    const four = unitOf({ gainQ24: 67108864, gainsQ24: [67108864] });
    // 2^25 * 2^28 = 2^53
    expectRefusal(problemsOf(checkGainTrim, gain, four, 33554432), '|x| * gain');
    expect(problemsOf(checkGainTrim, gain, four, 33554430)).toEqual([]);
    // 2^29 * (2^24 + 1) is beyond; (2^29 - 33) * (2^24 + 1) + 2^23 = 2^53 - 8388641
    expectRefusal(problemsOf(checkGainTrim, gain, unitOf(), 536870912), '|x| * gain');
    expect(problemsOf(checkGainTrim, gain, unitOf(), 536870912 - 33)).toEqual([]);
  });
  test('a product that reaches 2^53 only because the gain is rounded up', () => {
    // (2^24 + 1) * 1.5 = 25165825.5 is used as 25165826; the largest value that 25165825 would leave below 2^53
    const unit = unitOf({ gainQ24: UNITY_Q24 + 1, gainsQ24: [1.5 * UNITY_Q24] });
    const most = Math.floor((2 ** 53 - 1 - 2 ** 23) / 25165825);
    expect(BigInt(most) * 25165826n + 2n ** 23n > 2n ** 53n).toBe(true);
    expectRefusal(problemsOf(checkGainTrim, gain, unit, most), '|x| * gain');
  });
});
