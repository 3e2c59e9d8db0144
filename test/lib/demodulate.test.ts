import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  CLAMPED, checkDemodulate, Demodulate, EVENT_QUARTER, EVENT_REVERSED, EVENT_ZERO, LINGERING, OVER_RANGE, RAILED,
  SETTLING, STUCK, TRACKING, type DemodulateConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { demodulateOracle, phasesOf } from './oracle/demodulate.ts';

const R = EVENT_REVERSED;
const Q = EVENT_QUARTER;

const cases = fc.record({
  quarter: fc.constantFrom(0, 1), blank: fc.oneof(fc.nat(3), fc.nat(20)),
  longest: fc.oneof(fc.integer({ min: 1, max: 6 }), fc.integer({ min: 7, max: 60 }), edgy(1, 2097152)),
  limit: fc.oneof(edgy(1, 100), edgy(1, 2147483647)),
}).map((d) => ({
  constants: {
    kind: 'demodulate' as const, quarter: d.quarter, blank: Math.min(d.blank, d.longest - 1), longest: d.longest,
  },
  unit: unitOf(),
  limit: d.limit,
  favoured: [R, Q, R | Q, R, Q, R | Q, R, Q, R | Q],
})).filter((c) => problemsOf(checkDemodulate, c.constants, c.unit, c.limit).length === 0);

const NAMES = ['0', 'R', 'Q', 'RQ'];

describeStageLaws<DemodulateConstants>({
  name: 'demodulate',
  make: (c, unit) => new Demodulate(c, unit),
  cases,
  oracle: demodulateOracle,
  runs: 600,
  branches: ['settling', 'reversal settled', 'quarter settled', 'stuck', 'not stuck at longest', 'wholly blanked',
    'over range of a mean', 'rail of a mean', 'clamp of a mean', 'settling of a mean', 'left out bit',
    'quarter ignored',
    ...NAMES.map((name) => `quarter turn, phase ${name}`)],
  observe(tally, c, input, output) {
    const { quarter, blank, longest } = c.constants;
    for (const { kind, first, length } of phasesOf(c.constants, input)) {
      tally.count('stuck', length > longest);
      tally.count('not stuck at longest', length === longest && (output[first + length - 1].status & STUCK) === 0);
      tally.count('wholly blanked', Math.min(length, longest) <= blank);
      tally.count('left out bit', blank > 0 && (input[first].status & LINGERING & ~output[first].status) !== 0);
      const turned = input.slice(first, first + length).map(({ status }) => status & Q);
      tally.count('quarter ignored', quarter === 0 && turned.some((bit) => bit !== turned[0]));
      if (quarter === 1) tally.count(`quarter turn, phase ${NAMES[kind]}`);
    }
    output.forEach(({ status, value }, n) => {
      const settled = (status & SETTLING) === 0;
      const added = status & ~input[n].status;
      tally.count('settling', !settled && value === 0n);
      tally.count('reversal settled', settled && quarter === 0);
      tally.count('quarter settled', settled && quarter === 1);
      tally.count('over range of a mean', (added & OVER_RANGE) !== 0);
      tally.count('rail of a mean', (added & RAILED) !== 0);
      tally.count('clamp of a mean', (added & CLAMPED) !== 0);
      tally.count('settling of a mean', !settled && value !== 0n);
    });
  },
});

const PLAIN: DemodulateConstants = { kind: 'demodulate', quarter: 0, blank: 0, longest: 8 };

/** Given as [value, status] of each sample; gives [value, status without events]. */
const demodulated = (part: Partial<DemodulateConstants>, given: number[][]) =>
  feed(new Demodulate({ ...PLAIN, ...part }, unitOf()), given.map(([v, status]) => sampleOf(v, { status })), [3])
    .map((s) => [Number(s.value), s.status & 65535]);

describe('demodulate, by hand', () => {
  test('reversal: half the difference of the means, from the sample behind the second phase on, held between', () => {
    // means 13 and -7: a current of 10 and 3 behind the plate
    const bias = [[12, 0], [14, 0], [-6, R], [-8, R], [99, 0], [99, 0]];
    expect(demodulated({}, bias))
      .toEqual([[0, SETTLING], [0, SETTLING], [0, SETTLING], [0, SETTLING], [10, 0], [10, 0]]);
  });

  test('a tie goes up twice: mean 3/2 to 2, and (0 - 3)/2 to -1', () => {
    expect(demodulated({}, [[1, 0], [2, 0], [0, R], [0, 0]])[3]).toEqual([1, 0]);
    expect(demodulated({}, [[-1, 0], [-2, 0], [0, R], [0, 0]])[3]).toEqual([0, 0]); // (-1 - 0) / 2
    expect(demodulated({}, [[0, 0], [3, R], [0, 0]])[2]).toEqual([-1, 0]);
  });

  test('quarter turn: (0 + Q - R - RQ) / 4, settling until all four have been seen', () => {
    const turns = [[10, 0], [21, Q], [-30, R], [-41, R | Q], [0, 0]];
    expect(demodulated({ quarter: 1 }, turns).slice(3)).toEqual([[0, SETTLING], [26, 0]]); // 102 / 4 = 25.5
  });

  test('quarter turn removes an offset behind the plate and the plate\'s own; reversal keeps the plate\'s own', () => {
    // current 100, amplifier 7 always; the plate's offset 20 turns with the bias, and against it on the quarter
    const bias = [[100 + 7 + 20, 0], [100 + 7 - 20, Q], [-100 + 7 - 20, R], [-100 + 7 + 20, R | Q], [0, 0]];
    expect(demodulated({ quarter: 1 }, bias)[4]).toEqual([100, 0]);
    expect(demodulated({}, [[127, 0], [-113, R], [0, 0]])[2]).toEqual([120, 0]);
  });

  test('reversal looks at EVENT_REVERSED alone: a quarter level does not end a phase', () => {
    expect(demodulated({}, [[2, 0], [4, Q], [-1, R | Q], [0, 0]])[3]).toEqual([2, 0]); // (3 + 1) / 2
  });

  test('the first `blank` samples of a phase are left out, with their bits', () => {
    const bias = [[999, RAILED], [4, 0], [-999, R | RAILED], [-4, R], [0, 0]];
    expect(demodulated({ blank: 1 }, bias)[4]).toEqual([4, 0]);
  });

  test('a phase wholly blanked keeps the old mean', () => {
    const bias = [[0, 0], [4, 0], [0, R], [-4, R], [999, 0], [0, R], [-8, R], [0, 0]];
    expect(demodulated({ blank: 1 }, bias)[7]).toEqual([6, 0]); // (4 + 8) / 2
  });

  test('a phase of exactly `longest` samples is not stuck; one more is, and gives its mean at once', () => {
    const bias = (count: number) => [...new Array(count).fill([-4, R]), [6, 0], [6, 0], [500, 0], [500, 0], [1, R]];
    const output = demodulated({ longest: 2 }, bias(2));
    expect(output.slice(0, 4).map(([, status]) => status)).toEqual([SETTLING, SETTLING, SETTLING, SETTLING]);
    expect(output.slice(4)).toEqual([[5, STUCK], [5, STUCK], [5, 0]]);
    expect(demodulated({ longest: 2 }, bias(3)).slice(2, 4)).toEqual([[0, SETTLING | STUCK], [0, SETTLING]]);
  });

  test('lingering bits of a mean stay with all made from it, until the next mean of the same phase', () => {
    const bias = [[4, 0], [4, OVER_RANGE], [-4, R], [-4, R], [4, 0], [4, 0], [-4, R], [-4, R]];
    expect(demodulated({}, bias).map(([, status]) => status)).toEqual([
      SETTLING, SETTLING, SETTLING | OVER_RANGE, SETTLING | OVER_RANGE, OVER_RANGE, OVER_RANGE, 0, 0,
    ]);
  });

  test('lingering bits of a sample do not come out with it, other bits and events do', () => {
    const stage = new Demodulate(PLAIN, unitOf());
    const given = [[0, 0], [0, R], [0, OVER_RANGE | STUCK | TRACKING | EVENT_ZERO]];
    expect(feed(stage, given.map(([v, status]) => sampleOf(v, { status })), [1]).map((s) => s.status))
      .toEqual([SETTLING, SETTLING | R, TRACKING | EVENT_ZERO]);
  });

  test('samples that were still settling give their mean like any other, with SETTLING on all made from it', () => {
    expect(demodulated({}, [[4, SETTLING], [-4, R], [8, 0], [-8, R], [0, 0]]))
      .toEqual([[0, SETTLING], [0, SETTLING], [4, SETTLING], [6, 0], [8, 0]]);
  });

  test('one in, one out: full scale of both signs comes out as it is, twice full scale cannot be', () => {
    expect(demodulated({}, [[2147483647, 0], [-2147483647, R], [0, 0]])[2]).toEqual([2147483647, 0]);
  });
});

describe('demodulate refuses', () => {
  const good: DemodulateConstants = { kind: 'demodulate', quarter: 1, blank: 3, longest: 64 };
  test('nothing in order', () => {
    expect(problemsOf(checkDemodulate, good, unitOf(), 1000)).toEqual([]);
    expect(problemsOf(checkDemodulate, { ...good, quarter: 0, blank: 63 }, unitOf(), 1000, 'samples')).toEqual([]);
  });
  test.each<[keyof DemodulateConstants, number]>([
    ['quarter', 2], ['quarter', -1], ['longest', 2097153], ['longest', 64.5], ['blank', -1], ['blank', 64],
    ['blank', 0.5],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkDemodulate, { ...good, [field]: value }, unitOf(), 1), field);
  });
  test('longest 0, where nothing can be blanked either', () => {
    expect(problemsOf(checkDemodulate, { ...good, blank: 0, longest: 0 }, unitOf(), 1)[0])
      .toMatchObject({ field: 'longest' });
  });
  test('a sum that reaches 2^53 cannot be drawn from 32 bits: the longest phase is held first', () => {
    // 2^21 * 2^31 = 2^52
    expect(problemsOf(checkDemodulate, { ...good, longest: 2097152 }, unitOf(), 2147483647)).toEqual([]);
    expectRefusal(problemsOf(checkDemodulate, { ...good, longest: 2097152 }, unitOf(), 2 ** 32), 'longest * |x|');
  });
  test('codes and readings', () => {
    expectRefusal(problemsOf(checkDemodulate, good, unitOf(), 1, 'codes'), 'order');
    expectRefusal(problemsOf(checkDemodulate, good, unitOf(), 1, 'reading'), 'order');
  });
});
