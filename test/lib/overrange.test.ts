import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  checkOverRange, EVENT_CLEAR, OVER_RANGE, OVER_RANGE_LATCHED, OverRange, RAILED, STUCK, type OverRangeConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { causes, overRangeOracle } from './oracle/overrange.ts';

const cases = fc.record({
  limit: fc.oneof(edgy(3, 1000), edgy(3, 2147483647)),
  high: fc.constantFrom(0, 0, 1, 2), low: fc.constantFrom(0, 0, 1, 2),
  far: edgy(-2147483647, 2147483647),
  consecutive: fc.oneof(fc.integer({ min: 1, max: 4 }), edgy(1, 65535)),
  magnitudeLimit: fc.oneof(fc.constant(2147483647), edgy(0, 2147483647), fc.nat(3).map((n) => -1 - n)),
  slewLimit: fc.oneof(fc.constant(4294967295), edgy(0, 4294967295)),
  holdSamples: fc.oneof(fc.nat(12), edgy(0, 2147483647)),
  stuckAfter: fc.oneof(fc.constantFrom(0, 2, 3, 10), edgy(2, 2147483647)),
  sign: fc.constantFrom(1, -1), around: fc.constantFrom(-1, 0, 1),
}).map((d) => ({
  constants: {
    kind: 'overRange' as const,
    // rails at the end codes, just inside them, or anywhere
    highLimit: d.high === 2 ? d.far : d.limit - d.high, lowLimit: d.low === 2 ? -d.far - 1 : d.low - d.limit,
    consecutive: d.consecutive,
    // a negative draw stands for a limit that near the end codes
    magnitudeLimit: d.magnitudeLimit < 0 ? Math.max(0, d.limit + d.magnitudeLimit) : d.magnitudeLimit,
    slewLimit: d.slewLimit, holdSamples: d.holdSamples, stuckAfter: d.stuckAfter,
  },
  unit: unitOf({ sign: d.sign }),
  limit: d.limit,
  around: d.around * d.limit,
  favoured: [EVENT_CLEAR, EVENT_CLEAR],
})).filter((c) => problemsOf(checkOverRange, c.constants, c.unit, c.limit, 'samples').length === 0);

describeStageLaws<OverRangeConstants>({
  name: 'overRange',
  make: (c, unit) => new OverRange(c, unit),
  cases,
  oracle: overRangeOracle,
  runs: 600,
  branches: ['high rail', 'low rail', 'rail too short', 'beyond limit', 'slew', 'held', 'hold over', 'latched',
    'cleared',
    'clear refused', 'cleared while held', 'stuck', 'same at a rail', 'direction reversed'],
  observe(tally, c, input, output) {
    const { highLimit, lowLimit, magnitudeLimit, stuckAfter } = c.constants;
    const values = input.map((sample) => BigInt(c.unit.sign) * sample.value);
    const seen = causes(c.constants, values);
    output.forEach((sample, n) => {
      const x = values[n];
      const added = sample.status & ~input[n].status;
      const cause = seen[n].railed || seen[n].beyond;
      const atRail = x >= BigInt(highLimit) || x <= BigInt(lowLimit);
      const latched = (k: number) => k >= 0 && (output[k].status & ~input[k].status & OVER_RANGE_LATCHED) !== 0;
      const clear = (input[n].status & EVENT_CLEAR) !== 0;
      const held = !cause && (added & OVER_RANGE) !== 0;
      const far = (x < 0n ? -x : x) > BigInt(magnitudeLimit);
      tally.count('high rail', (added & RAILED) !== 0 && x >= BigInt(highLimit));
      tally.count('low rail', (added & RAILED) !== 0 && x <= BigInt(lowLimit));
      tally.count('rail too short', atRail && !seen[n].railed);
      tally.count('beyond limit', seen[n].beyond && far);
      tally.count('slew', seen[n].beyond && !far);
      tally.count('held', held);
      tally.count('hold over', !held && !cause && seen.slice(0, n).some((s) => s.railed || s.beyond));
      tally.count('latched', latched(n) && !cause);
      tally.count('cleared', clear && latched(n - 1) && !latched(n));
      tally.count('clear refused', clear && cause && latched(n));
      tally.count('cleared while held', clear && held && latched(n - 1));
      tally.count('stuck', (added & STUCK) !== 0);
      tally.count('same at a rail', stuckAfter > 0 && atRail && n > 0 && x === values[n - 1]);
      tally.count('direction reversed', c.unit.sign === -1);
    });
  },
});

const PLAIN: OverRangeConstants = {
  kind: 'overRange', highLimit: 100, lowLimit: -101, consecutive: 1, magnitudeLimit: 2147483647, slewLimit: 4294967295,
  holdSamples: 0, stuckAfter: 0,
};

/** Status of each sample without the events. */
function watched(part: Partial<OverRangeConstants>, values: number[], status: number[] = [], sign = 1): number[] {
  const stage = new OverRange({ ...PLAIN, ...part }, unitOf({ sign }));
  return feed(stage, values.map((v, n) => sampleOf(v, { status: status[n] ?? 0 })), [2]).map((s) => s.status & 65535);
}
const L = OVER_RANGE_LATCHED;

describe('over-range, by hand', () => {
  test('a rail is flagged at its limit, not one count inside', () => {
    expect(watched({}, [99, 100])).toEqual([0, RAILED | L]);
    expect(watched({}, [-100, -101])).toEqual([0, RAILED | L]);
  });
  test('from the consecutive-th sample in a row; those ahead stay unflagged, one between starts anew', () => {
    expect(watched({ consecutive: 3 }, [100, 120, 99, 100, 101, 102, 103]))
      .toEqual([0, 0, 0, 0, 0, RAILED | L, RAILED | L]);
  });
  test('both rails count on their own', () => {
    expect(watched({ consecutive: 2 }, [100, -101, 100, -101, -101])).toEqual([0, 0, 0, 0, RAILED | L]);
  });
  test('rails are in code direction: with direction -1 the high rail is the lowest value', () => {
    expect(watched({}, [-99, -100, 100, 101], [], -1)).toEqual([0, RAILED | L, L, RAILED | L]);
  });
  test('limit: beyond it, not at it, on both sides', () => {
    const wide = { magnitudeLimit: 50, highLimit: 1000, lowLimit: -1000 };
    expect(watched(wide, [50, -50, 0, 51])).toEqual([0, 0, 0, OVER_RANGE | L]);
    expect(watched(wide, [-51])).toEqual([OVER_RANGE | L]);
  });
  test('slew: beyond it, not at it, up and down; none at the first sample', () => {
    expect(watched({ slewLimit: 10 }, [90, 80, 90, 79])).toEqual([0, 0, 0, OVER_RANGE | L]);
    expect(watched({ slewLimit: 10 }, [0, 11, 11])).toEqual([0, OVER_RANGE | L, L]);
  });
  test('the largest slew is seen whole: 2 * 2147483647 is not beyond 4294967294, and beyond one less', () => {
    const open = { highLimit: 2147483647, lowLimit: -2147483647, consecutive: 65535 };
    expect(watched({ ...open, slewLimit: 4294967294 }, [-2147483647, 2147483647])).toEqual([0, 0]);
    expect(watched({ ...open, slewLimit: 4294967293 }, [-2147483647, 2147483647])).toEqual([0, OVER_RANGE | L]);
  });
  test('hold: exactly holdSamples samples behind the last cause, which starts it anew', () => {
    expect(watched({ holdSamples: 2 }, [100, 0, 100, 0, 0, 0]))
      .toEqual([RAILED | L, OVER_RANGE | L, RAILED | L, OVER_RANGE | L, OVER_RANGE | L, L]);
  });
  test('latch: until a clear on a sample that is no cause; a clear on a cause does nothing', () => {
    const clear = [0, 0, EVENT_CLEAR, EVENT_CLEAR, 0];
    expect(watched({}, [0, 100, 100, 0, 0], clear)).toEqual([0, RAILED | L, RAILED | L, 0, 0]);
  });
  test('a clear while it holds clears the latch; the hold goes on', () => {
    expect(watched({ holdSamples: 2 }, [100, 0, 0, 0], [0, EVENT_CLEAR]))
      .toEqual([RAILED | L, OVER_RANGE, OVER_RANGE, 0]);
  });
  test('stuck: from the stuckAfter-th same value in a row, until it moves by one', () => {
    expect(watched({ stuckAfter: 3 }, [5, 5, 5, 5, 6, 5])).toEqual([0, 0, STUCK, STUCK, 0, 0]);
  });
  test('stuck is not at a rail, and 0 does not watch', () => {
    expect(watched({ stuckAfter: 2 }, [100, 100, 100])).toEqual([RAILED | L, RAILED | L, RAILED | L]);
    expect(watched({ stuckAfter: 2, consecutive: 9 }, [-101, -101, -101])).toEqual([0, 0, 0]);
    expect(watched({ stuckAfter: 0 }, [5, 5, 5])).toEqual([0, 0, 0]);
  });
  test('a first value of 0 counts as one, not as two', () => {
    expect(watched({ stuckAfter: 2 }, [0, 0])).toEqual([0, STUCK]);
  });
  test('values pass unchanged', () => {
    const stage = new OverRange({ ...PLAIN, magnitudeLimit: 1 }, unitOf({ sign: -1 }));
    expect(feed(stage, [7, -200, 200].map((v) => sampleOf(v)), [1]).map((s) => Number(s.value)))
      .toEqual([7, -200, 200]);
  });
});

describe('over-range refuses', () => {
  test('nothing in order', () => {
    expect(problemsOf(checkOverRange, PLAIN, unitOf(), 2147483647, 'samples')).toEqual([]);
  });
  test.each<[keyof OverRangeConstants, number]>([
    ['highLimit', 2147483648], ['highLimit', 99.5], ['lowLimit', -2147483648], ['lowLimit', -0.5], ['lowLimit', 100],
    ['consecutive', 0], ['consecutive', 65536], ['magnitudeLimit', -1], ['magnitudeLimit', 2147483648],
    ['slewLimit', -1], ['slewLimit', 4294967296], ['holdSamples', -1], ['holdSamples', 2147483648], ['stuckAfter', -1],
    ['stuckAfter', 1], ['stuckAfter', 2147483648],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkOverRange, { ...PLAIN, [field]: value }, unitOf(), 1, 'samples'), field);
  });
  test.each(['codes', 'counts', 'reading'] as const)('what is no undisturbed sample: %s', (domain) => {
    expectRefusal(problemsOf(checkOverRange, PLAIN, unitOf(), 1, domain), 'order');
  });
});
