/**
 * Zero against its oracle, which finds the attempts to take a zero in the whole record, and by hand: start-up,
 * button, refusals at their limits and one beside, suspect, tracking, power cycle, and what its check refuses.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  CLAMPED, EVENT_DEGAUSSED, EVENT_ZERO, OVER_RANGE, RAILED, SETTLING, TRACKING, ZERO_REFUSED, ZERO_SUSPECT, Zero,
  checkZero, powerCycle, type ZeroConstants,
} from '../../lib/index.ts';
import { expectSamples, feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { blockLengths, edgy, evenly, records, sampleOf, unitOf } from './records.ts';
import { factoryKept, zeroFrom, zeroOracle } from './oracle/zero.ts';

const flag = fc.constantFrom(0, 1);
const fewSamples = fc.oneof({ arbitrary: fc.nat(12), weight: 6 }, { arbitrary: edgy(0, 2147483647), weight: 1 });

const cases = fc.record({
  limit: fc.oneof(edgy(1, 100000), edgy(1, 2147483647)),
  factory: evenly(-1, 1),
  constants: fc.record({
    kind: fc.constant<'zero'>('zero'), startMode: flag, settleSamples: fewSamples,
    meanSamples: fc.oneof({ arbitrary: fc.integer({ min: 1, max: 12 }), weight: 6 },
      { arbitrary: edgy(1, 16777216), weight: 1 }),
    spanLimit: fc.oneof(fc.nat(10), edgy(0, 4294967295), fc.constant(4294967295)),
    windowLimit: fc.oneof(fc.nat(10), edgy(0, 2147483647), fc.constant(2147483647)),
    buttonMode: fc.constantFrom(0, 1, 1), trackMode: flag, trackWindow: fc.oneof(fc.nat(10), edgy(0, 2147483647)),
    holdSamples: fewSamples,
    stepSamples: fc.oneof(fc.integer({ min: 1, max: 5 }), edgy(1, 2147483647)),
    authority: fc.oneof(fc.nat(4), edgy(0, 2147483647)),
    suspectMode: flag, limit: fc.oneof(edgy(1, 2147483647), fc.constant(2147483647)),
  }),
}).map((d) => {
  const factoryZero = Math.round(d.factory * d.limit);
  return {
    constants: d.constants, unit: unitOf({ factoryZero }), limit: d.limit, around: factoryZero,
    favoured: [EVENT_ZERO, EVENT_DEGAUSSED, OVER_RANGE],
  };
}).filter((c) => problemsOf(checkZero, c.constants, c.unit, c.limit).length === 0);

describeStageLaws<ZeroConstants>({
  name: 'zero',
  make: (c, unit) => new Zero(c, unit),
  cases,
  oracle: zeroOracle,
  branches: ['settling', 'tracking', 'clamped', 'suspect', 'refused', 'taken', 'taken after a refusal', 'tracked up',
    'tracked down', 'at the authority', 'degaussed', 'button', 'suspect cleared'],
  observe(tally, c, input, output) {
    const factoryZero = BigInt(c.unit.factoryZero);
    output.forEach((sample, n) => {
      const before = n > 0 ? output[n - 1].status & ~input[n - 1].status : 0;
      const added = sample.status & ~input[n].status;
      const fell = (bit: number) => (before & bit) !== 0 && (sample.status & bit) === 0;
      const moved = sample.zero - (n > 0 ? output[n - 1].zero : factoryZero);
      const tracking = (added & TRACKING) !== 0;
      tally.count('settling', (added & SETTLING) !== 0);
      tally.count('tracking', tracking);
      tally.count('clamped', (added & CLAMPED) !== 0);
      tally.count('suspect', (added & ZERO_SUSPECT) !== 0);
      tally.count('refused', (added & ZERO_REFUSED) !== 0);
      tally.count('taken', !tracking && moved !== 0n);
      tally.count('taken after a refusal', fell(ZERO_REFUSED));
      tally.count('tracked up', tracking && moved === 1n);
      tally.count('tracked down', tracking && moved === -1n);
      const away = sample.zero - factoryZero;
      tally.count('at the authority', tracking && moved === 0n && c.constants.authority > 0 &&
        (away === BigInt(c.constants.authority) || away === -BigInt(c.constants.authority)));
      tally.count('degaussed', (input[n].status & EVENT_DEGAUSSED) !== 0 && fell(ZERO_SUSPECT));
      tally.count('button', c.constants.buttonMode === 1 && (added & SETTLING) !== 0 &&
        (input[n].status & EVENT_ZERO) !== 0);
      tally.count('suspect cleared', fell(ZERO_SUSPECT));
    });
  },
  runs: 2200,
});

describe('zero over a power cycle', () => {
  test('goes on from taken, its temperature and suspect; what was tracked or refused is gone', () => {
    fc.assert(fc.property(cases.chain((c) => fc.tuple(fc.constant(c), records(c.limit, c.around, c.favoured),
      records(c.limit, c.around, c.favoured),
      blockLengths)), ([c, first, second, lengths]) => {
      const stage = new Zero(c.constants, c.unit);
      feed(stage, first, lengths);
      powerCycle(stage);
      const { kept } = zeroFrom(c.constants, c.unit, first, factoryKept(c.unit));
      expect([stage.state[0], stage.state[1], stage.state[2]])
        .toEqual([Number(kept.taken), Number(kept.takenTemperature), Number(kept.suspect)]);
      expectSamples(feed(stage, second, lengths), zeroFrom(c.constants, c.unit, second, kept).output);
    }), { numRuns: 200 });
  });
});

const PLAIN: ZeroConstants = {
  kind: 'zero', startMode: 0, settleSamples: 0, meanSamples: 2, spanLimit: 4, windowLimit: 10, buttonMode: 0,
  trackMode: 0,
  trackWindow: 5, holdSamples: 2, stepSamples: 1, authority: 3, suspectMode: 0, limit: 1000,
};

/** [value, zero, status without the events] of each sample. */
function zeroed(part: Partial<ZeroConstants>, values: number[], status: number[] = [], factoryZero = 0): number[][] {
  const stage = new Zero({ ...PLAIN, ...part }, unitOf({ factoryZero }));
  return feed(stage, values.map((v, n) => sampleOf(v, { status: status[n] ?? 0 })), [3])
    .map((s) => [Number(s.value), Number(s.zero), s.status & 65535]);
}

describe('zero, by hand', () => {
  test('without modes the factory zero is removed', () => {
    expect(zeroed({}, [7, -7], [], 5)).toEqual([[2, 5, 0], [-12, 5, 0]]);
  });

  test('start-up: settleSamples waited, then the mean of meanSamples, a tie up; SETTLING until decided', () => {
    // mean (3 + 4) / 2 = 3.5 -> 4, and the deciding sample already has it removed
    expect(zeroed({ startMode: 1, settleSamples: 2 }, [9, 9, 3, 4, 4]))
      .toEqual([[9, 0, SETTLING], [9, 0, SETTLING], [3, 0, SETTLING], [0, 4, SETTLING], [0, 4, 0]]);
  });

  test('a disturbed sample starts the wait anew, then the mean anew', () => {
    const busy = zeroed({ startMode: 1, settleSamples: 2 }, new Array(9).fill(4),
      [0, RAILED, 0, 0, 0, OVER_RANGE, 0, 0, 0]);
    expect(busy.map((s) => s[1])).toEqual([0, 0, 0, 0, 0, 0, 0, 4, 4]);
    expect(busy.map((s) => s[2] & SETTLING)).toEqual([...new Array(8).fill(SETTLING), 0]);
  });

  test('a rising edge takes a zero, a level does not take another', () => {
    const button = [0, EVENT_ZERO, EVENT_ZERO, EVENT_ZERO, 0, EVENT_ZERO, 0];
    const output = zeroed({ buttonMode: 1 }, [6, 6, 6, 2, 2, 2, 2], button);
    expect(output.map((s) => s[1])).toEqual([0, 0, 6, 6, 6, 6, 2]);
  });

  test('span at the limit is taken, one more is refused until one succeeds', () => {
    const button = { buttonMode: 1 };
    expect(zeroed(button, [0, 4], [EVENT_ZERO])[1]).toEqual([2, 2, SETTLING]);
    expect(zeroed(button, [0, 5, 5, 1, 1, 1], [EVENT_ZERO, 0, 0, EVENT_ZERO]).map((s) => [s[1], s[2]])).toEqual([
      [0, SETTLING], [0, SETTLING | ZERO_REFUSED], [0, ZERO_REFUSED], [0, SETTLING | ZERO_REFUSED], [1, SETTLING],
      [1, 0],
    ]);
  });

  test('a mean at the window around the factory zero is taken, one beyond is refused, on either side', () => {
    const taken = (value: number) => zeroed({ buttonMode: 1 }, [value, value], [EVENT_ZERO], 100)[1];
    expect([taken(110)[1], taken(90)[1], taken(111)[1], taken(89)[1]]).toEqual([110, 90, 100, 100]);
    expect(taken(111)[2] & ZERO_REFUSED).toBe(ZERO_REFUSED);
  });

  test('a zero at start-up is refused while suspect; a zero on the button is taken and ends suspect', () => {
    const start = { startMode: 1, suspectMode: 1, buttonMode: 1 };
    const output = zeroed(start, [3, 3, 3, 3, 3], [OVER_RANGE, 0, 0, EVENT_ZERO, 0]);
    expect(output.map((s) => [s[1], s[2]])).toEqual([
      [0, OVER_RANGE | SETTLING | ZERO_SUSPECT], [0, SETTLING | ZERO_SUSPECT],
      [0, SETTLING | ZERO_SUSPECT | ZERO_REFUSED], [0, SETTLING | ZERO_SUSPECT | ZERO_REFUSED], [3, SETTLING],
    ]);
  });

  test('a degauss event ends suspect; an overload at the same sample begins it again', () => {
    const output = zeroed({ suspectMode: 1 }, [0, 0, 0, 0], [RAILED, EVENT_DEGAUSSED, EVENT_DEGAUSSED | RAILED, 0]);
    expect(output.map((s) => s[2] & ZERO_SUSPECT)).toEqual([ZERO_SUSPECT, 0, ZERO_SUSPECT, ZERO_SUSPECT]);
  });

  test('tracking: after exactly holdSamples, one count every stepSamples, up to the authority and back', () => {
    const output = zeroed({ trackMode: 1, stepSamples: 2, authority: 1 }, [5, 5, 5, 5, 5, 5, -5, -5, -5]);
    expect(output.map((s) => s[2])).toEqual([0, 0, ...new Array(7).fill(TRACKING)]);
    expect(output.map((s) => s[1])).toEqual([0, 0, 0, 1, 1, 1, 1, 0, 0]);
  });

  test('tracking looks at x within the window of the factory zero, also when the stored zero is elsewhere', () => {
    // window 5 around 100: 105 is followed, 106 starts the hold anew
    const output = zeroed({ trackMode: 1 }, [105, 105, 105, 106, 105, 105, 105], [], 100);
    expect(output.map((s) => s[2])).toEqual([0, 0, TRACKING, 0, 0, 0, TRACKING]);
  });

  test('tracking is frozen while disturbed, while suspect and while a zero is taken', () => {
    const frozen = zeroed({ trackMode: 1, suspectMode: 1, holdSamples: 0 }, new Array(4).fill(3),
      [0, SETTLING, OVER_RANGE, 0]);
    expect(frozen.map((s) => s[2] & TRACKING)).toEqual([TRACKING, 0, 0, 0]);
    const busy = zeroed({ trackMode: 1, buttonMode: 1, holdSamples: 0, meanSamples: 2 }, new Array(4).fill(3),
      [0, EVENT_ZERO]);
    expect(busy.map((s) => s[2] & TRACKING)).toEqual([TRACKING, 0, 0, TRACKING]);
    expect(busy.map((s) => s[1])).toEqual([1, 1, 3, 3]);
  });

  test('a direct current that is on from the start is eaten up to window and authority, never more', () => {
    const output = zeroed({ startMode: 1, buttonMode: 1, trackMode: 1, trackWindow: 2147483647 },
      new Array(200).fill(11));
    expect(output[199]).toEqual([8, 3, TRACKING | ZERO_REFUSED]);
  });

  test('clamped to the limit with CLAMPED; the limit itself is not clamped', () => {
    expect(zeroed({ limit: 10 }, [15, 16, -5, -6], [], 5).map((s) => [s[0], s[2]]))
      .toEqual([[10, 0], [10, CLAMPED], [-10, 0], [-10, CLAMPED]]);
  });
});

describe('zero refuses', () => {
  test('nothing in order', () => expect(problemsOf(checkZero, PLAIN, unitOf(), 1000)).toEqual([]));
  test.each<[keyof ZeroConstants, number]>([
    ['startMode', 2], ['buttonMode', -1], ['trackMode', 0.5], ['suspectMode', 2], ['settleSamples', -1],
    ['settleSamples', 2147483648], ['meanSamples', 0], ['meanSamples', 16777217], ['spanLimit', -1],
    ['spanLimit', 4294967296],
    ['windowLimit', -1], ['windowLimit', 2147483648], ['trackWindow', -1], ['trackWindow', 2147483648],
    ['holdSamples', -1],
    ['holdSamples', 2147483648], ['stepSamples', 0], ['stepSamples', 2147483648], ['authority', -1], ['limit', 0],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkZero, { ...PLAIN, [field]: value }, unitOf(), 1000), field);
  });
  test('a zero lane that would not fit 32 bits', () => {
    expect(problemsOf(checkZero, { ...PLAIN, authority: 2147482647 }, unitOf(), 1000)).toEqual([]);
    expectRefusal(problemsOf(checkZero, { ...PLAIN, authority: 2147482648 }, unitOf(), 1000), 'authority');
  });
  test('a factory zero that no input can reach', () => {
    expect(problemsOf(checkZero, PLAIN, unitOf({ factoryZero: -1000 }), 1000)).toEqual([]);
    expectRefusal(problemsOf(checkZero, PLAIN, unitOf({ factoryZero: 1001 }), 1000), 'factoryZero');
    expectRefusal(problemsOf(checkZero, PLAIN, unitOf({ factoryZero: -1001 }), 1000), 'factoryZero');
  });
  test('a mean whose sum, plus the count for the rounding, reaches 2^53: 2^24 samples of 2^29 - 1', () => {
    const long = { ...PLAIN, meanSamples: 16777216 };
    expectRefusal(problemsOf(checkZero, long, unitOf(), 536870911), 'meanSamples * |x|');
    expect(problemsOf(checkZero, long, unitOf(), 536870910)).toEqual([]);
  });
  test('codes and readings', () => {
    expectRefusal(problemsOf(checkZero, PLAIN, unitOf(), 1000, 'codes'), 'order');
    expectRefusal(problemsOf(checkZero, PLAIN, unitOf(), 1000, 'reading'), 'order');
  });
});
