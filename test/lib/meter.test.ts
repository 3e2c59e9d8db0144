/**
 * Meter against exact sums and roots over the whole record, by hand, against reference data for cancellation,
 * closed forms of standard waveforms and the aggregation rule of IEC 61000-4-30, and what its check refuses.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  Meter, RECORD_FIELDS, RECORD_WORDS, SETTLING, OVER_RANGE, checkMeter, loadState, powerCycle, saveState,
  type MeterConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { blockLengths, edgy, evenly, records, sampleOf, unitOf } from './records.ts';
import { integerRoot, meterOracle, meterRecords } from './oracle/meter.ts';
import { Tally } from './tally.ts';

const cases = fc.record({
  constants: fc.record({
    kind: fc.constant<'meter'>('meter'),
    windowSamples: fc.oneof({ arbitrary: fc.integer({ min: 1, max: 60 }), weight: 4 },
      { arbitrary: edgy(1, 1048576), weight: 1 }),
    cycles: fc.oneof(fc.constant(0), fc.integer({ min: 1, max: 4 }), edgy(0, 65535)),
    hysteresis: fc.oneof(edgy(1, 5), edgy(1, 2147483647)),
    capacity: fc.integer({ min: 1, max: 6 }),
  }),
  unit: fc.constant(unitOf()),
  limit: fc.oneof(edgy(1, 1000), edgy(1, 2147483647)),
}).filter((c) => problemsOf(checkMeter, c.constants, c.unit, c.limit).length === 0);

describeStageLaws<MeterConstants>({
  name: 'meter',
  make: (c, unit) => new Meter(c, unit),
  cases,
  oracle: meterOracle,
  branches: [],
  observe() {},
});

/** The records in a meter's ring, oldest first, and how many were written at all. */
function recordsOf(meter: Meter): { held: number[][]; written: number } {
  const { capacity } = meter.constants;
  const written = meter.state[meter.fields.indexOf('written')];
  const slot = meter.state[meter.fields.indexOf('slot')];
  const many = Math.min(written, capacity);
  const held = Array.from({ length: many }, (_, k) => {
    const at = ((slot - many + k + capacity) % capacity) * RECORD_WORDS;
    return [...meter.ring.slice(at, at + RECORD_WORDS)];
  });
  return { held, written };
}

const tally = new Tally(['time-out', 'whole cycles', 'skipped', 'fixed window', 'ring full',
  'status from a skipped sample']);

describe('records of a meter', () => {
  test('equal those of the oracle, newest `capacity` of them in the ring, however the record is cut', () => {
    const given = cases.chain((c) => fc.tuple(fc.constant(c), records(c.limit), blockLengths));
    fc.assert(fc.property(given, ([c, input, lengths]) => {
      const meter = new Meter(c.constants, c.unit);
      feed(meter, input, lengths);
      const all = meterRecords(c.constants, input);
      expect(recordsOf(meter)).toEqual({ held: all.slice(-c.constants.capacity), written: all.length });
      tally.count('ring full', all.length > c.constants.capacity);
      for (const record of all) {
        tally.count('fixed window', c.constants.cycles === 0);
        tally.count('time-out', c.constants.cycles > 0 && record[7] === 0);
        tally.count('whole cycles', record[7] > 0);
        tally.count('skipped', record[0] > 0);
        tally.count('status from a skipped sample', record[0] > 0 && record[8] !== 0);
      }
    }), { numRuns: 1500 });
    expect(tally.missing()).toEqual([]);
  });

  test('go on after save and load, are gone after reset and after a power cycle', () => {
    const given = cases.chain((c) => fc.tuple(fc.constant(c), records(c.limit), evenly(0, 1)));
    fc.assert(fc.property(given, ([c, input, part]) => {
      const at = Math.floor(part * input.length);
      const first = new Meter(c.constants, c.unit);
      const second = new Meter(c.constants, c.unit);
      const fresh = saveState(first);
      feed(first, input.slice(0, at), [7]);
      loadState(second, saveState(first));
      feed(second, input.slice(at), [7]);
      const all = meterRecords(c.constants, input);
      expect(recordsOf(second)).toEqual({ held: all.slice(-c.constants.capacity), written: all.length });
      powerCycle(second);
      expect(saveState(second)).toEqual(fresh);
    }), { numRuns: 200 });
  });
});

type NamedRecord = Record<string, number>;

function metered(part: Partial<MeterConstants>, values: readonly number[], status: number[] = []): NamedRecord[] {
  const constants: MeterConstants = {
    kind: 'meter', windowSamples: 1048576, cycles: 0, hysteresis: 1, capacity: 128, ...part,
  };
  const limit = values.reduce((most, v) => Math.max(most, Math.abs(v)), 1);
  expect(problemsOf(checkMeter, constants, unitOf(), limit)).toEqual([]);
  const meter = new Meter(constants, unitOf());
  feed(meter, values.map((v, n) => sampleOf(v, { status: status[n] ?? 0, zero: BigInt(n) })), [13]);
  return recordsOf(meter).held.map((words) => Object.fromEntries(RECORD_FIELDS.map((field, i) => [field, words[i]])));
}

describe('meter, by hand', () => {
  test('fixed windows stand one directly behind the other; an unfinished one gives no record', () => {
    const [one, two, ...more] = metered({ windowSamples: 3 }, [1, 2, 2, -3, 0, 0, 9, 9]);
    expect(one).toEqual({
      skipped: 0, count: 3, mean: 2, trueRms: 1, acRms: 0, highest: 2, lowest: 1, cycles: 0, status: 0, zero: 2,
    }); // mean 5/3, rms sqrt(9/3) = 1.73, ac sqrt(27 - 25) / 3 = 0.47
    // rms sqrt(3), ac sqrt(27 - 9) / 3 = 1.41
    expect(two).toMatchObject({ mean: -1, trueRms: 1, acRms: 1, highest: 0, lowest: -3, zero: 5 });
    expect(more).toEqual([]);
  });

  test('a tie of the mean goes up', () => {
    expect(metered({ windowSamples: 2 }, [1, 2, -1, -2]).map((r) => r.mean)).toEqual([2, -1]);
  });

  test('status is the OR over the window, and a record does not carry that of the next', () => {
    const output = metered({ windowSamples: 2 }, [0, 0, 0, 0, 0, 0], [SETTLING, 1 << 20, 0, 0, OVER_RANGE]);
    expect(output.map((r) => r.status)).toEqual([SETTLING | (1 << 20), 0, OVER_RANGE]);
  });

  test('whole cycles run from crossing to crossing, what is ahead of the first is skipped with its status', () => {
    const square = [5, 5, -5, -5];
    const input = [...square, ...square, ...square, ...square, 5];
    const output = metered({ cycles: 2 }, input, [OVER_RANGE]);
    // mean so far 5, 5, 1.67: low at -5; up at sample 4 (mean 0 there). Cycles end at 8 and 12 (both means 0 and above)
    expect(output[0]).toEqual({
      skipped: 4, count: 8, mean: 0, trueRms: 5, acRms: 5, highest: 5, lowest: -5, cycles: 2, status: OVER_RANGE,
      zero: 11,
    });
    expect(output).toHaveLength(1);
  });

  test('a crossing needs mean - hysteresis and then mean + hysteresis, both reached exactly', () => {
    // one window of a cycle with mean 0 becomes the reference, then swings of 3 or of 2 around it
    const start = [0, 4, -4, 4, -4, 4, -4];
    const crossings = (swing: number) =>
      metered({ cycles: 1, hysteresis: 3 }, [...start, swing, -swing, swing, -swing, swing, -swing, 4]).map((r) =>
        r.count);
    expect(crossings(3)).toEqual([2, 2, 2, 2, 2]);
    expect(crossings(2)).toEqual([2, 8]);
  });

  test('windowSamples without an end close the window with cycles 0, skipping or not', () => {
    const output = metered({ cycles: 1, windowSamples: 5 }, [...new Array(5).fill(7), 6, 8, ...new Array(5).fill(8)]);
    // 7 five times: time-out. 6 arms, 8 crosses after one skipped sample; no crossing for five samples: time-out
    expect(output.map((r) => [r.skipped, r.count, r.cycles])).toEqual([[0, 5, 0], [1, 5, 0]]);
  });

  test('a steady input never crosses, whatever its level', () => {
    fc.assert(fc.property(edgy(-2000000000, 2000000000), fc.integer({ min: 1, max: 30 }), (level, windowSamples) => {
      const output = metered({ cycles: 1, windowSamples, hysteresis: 1 }, new Array(100).fill(level));
      expect(output.every((r) => r.cycles === 0 && r.skipped === 0 && r.mean === level && r.acRms === 0)).toBe(true);
      expect(output).toHaveLength(Math.floor(100 / windowSamples));
    }), { numRuns: 100 });
  });

  test('the extremes are exact: 2^20 samples at 2^31 - 1 or alternating', () => {
    const most = 2147483647;
    // the hysteresis takes a part of the width: (2^31 - 1 + 1) * 2^20 = 2^51
    const [flat] = metered({}, new Array(1048576).fill(-most));
    expect(flat).toMatchObject({ mean: -most, trueRms: most, acRms: 0, highest: -most, lowest: -most, count: 1048576 });
    const [swing] = metered({}, Array.from({ length: 1048576 }, (_, n) => (n % 2 ? -most : most)));
    expect(swing).toMatchObject({ mean: 0, trueRms: most, acRms: most, highest: most, lowest: -most });
  });

  test('frequency is cycles over samples: windows of a sine of 50 Hz at 10 kHz hold 200 samples a cycle', () => {
    const sine = Array.from({ length: 10000 }, (_, n) => Math.round(100000 * Math.sin(2 * Math.PI * n / 200 + 1)));
    const output = metered({ cycles: 10, hysteresis: 1000 }, sine);
    expect(output.length).toBeGreaterThanOrEqual(3);
    // the first two crossings may fall on a moving reference; the period is a whole number of samples, so the rest is
    // exact
    for (const r of output.slice(1)) expect([r.cycles, r.count]).toEqual([10, 2000]);
  });
});

// NIST Statistical Reference Datasets, univariate summary statistics NumAcc1 to NumAcc4, scaled to integers. The
// certified standard deviations divide by n - 1; the meter's by n: sd * sqrt((n - 1) / n).
describe('cancellation (NIST StRD NumAcc1 to NumAcc4)', () => {
  const pairs = (middle: number, low: number, high: number) =>
    [middle, ...Array.from({ length: 1000 }, (_, n) => (n % 2 ? high : low))];
  test.each([
    ['NumAcc1', [10000001, 10000003, 10000002], 1, 10000002, 1],
    ['NumAcc1 times 100', [1000000100, 1000000300, 1000000200], 100, 1000000200, 1],
    ['NumAcc2 times 10^6', pairs(1200000, 1100000, 1300000), 1000000, 1200000, 0.1],
    ['NumAcc3 times 10^3', pairs(1000000200, 1000000100, 1000000300), 1000, 1000000200, 0.1],
    ['NumAcc4 times 10^2', pairs(1000000020, 1000000010, 1000000030), 100, 1000000020, 0.1],
  ])('%s', (_name, values, scale, mean, deviation) => {
    const [r] = metered({ windowSamples: values.length }, values);
    expect(r.mean).toBe(mean);
    // floor of the exact value; sd * scale * sqrt((n - 1) / n) is no integer in any of these
    expect(r.acRms).toBe(Math.floor(deviation * scale * Math.sqrt((values.length - 1) / values.length)));
  });
});

// Closed forms of waveforms with unit peak (mean, rms, ac rms), the usual table of power electronics textbooks (R. W.
// Erickson, D. Maksimovic, Fundamentals of Power Electronics, appendix on rms values); digits from the closed forms.
describe('rms of standard waveforms', () => {
  const PEAK = 1000000000;
  const SAMPLES = 20000;
  const at = (shape: (phase: number) => number) =>
    Array.from({ length: SAMPLES }, (_, n) => Math.round(PEAK * shape((n + 0.5) / SAMPLES)));
  const sine = (phase: number) => Math.sin(2 * Math.PI * phase);
  const pulse = (duty: number) => (phase: number) => (phase < duty ? 1 : 0);
  test.each<[string, (phase: number) => number, number, number, number]>([
    ['sine', sine, 0, 0.707106781187, 0.707106781187],
    ['full-wave rectified sine', (p) => Math.abs(sine(p)), 0.636619772368, 0.707106781187, 0.307758453061],
    ['half-wave rectified sine', (p) => Math.max(0, sine(p)), 0.318309886184, 0.5, 0.385588921466],
    ['triangle', (p) => (p < 0.5 ? 4 * p - 1 : 3 - 4 * p), 0, 0.577350269190, 0.577350269190],
    ['sawtooth', (p) => 2 * p - 1, 0, 0.577350269190, 0.577350269190],
    ['square', (p) => (p < 0.5 ? 1 : -1), 0, 1, 1],
    ['pulse, duty 0.1', pulse(0.1), 0.1, 0.316227766017, 0.3],
    ['pulse, duty 0.25', pulse(0.25), 0.25, 0.5, 0.433012701892],
    ['pulse, duty 0.8', pulse(0.8), 0.8, 0.894427191, 0.4],
    ['inductor current 10 + triangle of 4 peak to peak, over 12', (p) => (10 + 4 * (p - 0.5)) / 12, 10 / 12,
      10.066445913694333 / 12,
      1.1547005383792517 / 12],
    ['DC 3 + sine of 10, over 13', (p) => (3 + 10 * sine(p)) / 13, 3 / 13, 7.681145747868608 / 13,
      0.707106781187 * 10 / 13],
  ])('%s', (_name, shape, mean, rms, acRms) => {
    const [r] = metered({ windowSamples: SAMPLES }, at(shape));
    // midpoint rule: error of a mean below (pi / n)^2 of the peak for slopes and corners of these shapes (|f''| of x
    // and x^2 at most (2 pi)^2 * 2 a period: h^2 / 24 * that = 8.3e-9), of a root of it the same over twice the root
    // (smallest 0.09: factor 6); rounding of samples, floor and the table's 12 digits add 3 counts.
    const tolerance = (8.3e-9 * 6) * PEAK + 3;
    expect(Math.abs(r.mean - mean * PEAK)).toBeLessThanOrEqual(tolerance);
    expect(Math.abs(r.trueRms - rms * PEAK)).toBeLessThanOrEqual(tolerance);
    expect(Math.abs(r.acRms - acRms * PEAK)).toBeLessThanOrEqual(tolerance);
  });

  // IEC 61000-4-30: longer intervals are the root of the mean of the squares of the shorter, contiguous ones.
  test('eight windows of 229 and seven of 231 aggregate to 229.9354982 as one window does', () => {
    const windows = Array.from({ length: 15 }, (_, n) => (n < 8 ? 229 : 231) * 1000000);
    const values = windows.flatMap((v) => new Array(20).fill(v).map((x, n) => (n % 2 ? -x : x)));
    const short = metered({ windowSamples: 20 }, values).map((r) => r.trueRms);
    const [long] = metered({ windowSamples: 300 }, values);
    expect(long.trueRms).toBe(229935498); // floor of 229.9354982018508 million
    expect(Number(integerRoot(short.reduce((sum, r) => sum + BigInt(r) ** 2n, 0n) / 15n))).toBe(long.trueRms);
  });
});

describe('meter refuses', () => {
  const good: MeterConstants = { kind: 'meter', windowSamples: 100, cycles: 0, hysteresis: 1, capacity: 4 };
  test('nothing in order, on counts, samples and readings', () => {
    for (const domain of ['counts', 'samples', 'reading'] as const) {
      expect(problemsOf(checkMeter, good, unitOf(), 2147483647, domain)).toEqual([]);
    }
  });
  test.each<[keyof MeterConstants, number]>([
    ['windowSamples', 0], ['windowSamples', 1048577], ['windowSamples', 1.5], ['cycles', -1], ['cycles', 65536],
    ['hysteresis', 0], ['hysteresis', 2147483648], ['capacity', 0], ['capacity', 65537],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkMeter, { ...good, [field]: value }, unitOf(), 1000), field);
  });
  test('codes', () => expectRefusal(problemsOf(checkMeter, good, unitOf(), 1, 'codes'), 'order'));
});
