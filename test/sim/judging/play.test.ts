import { describe, expect, test } from 'vitest';
import { play, type Observer, type Played, type Readings, type Record } from '../../../sim/judging/play.ts';
import { Truth } from '../../../sim/judging/truth.ts';
import { tune } from '../../../sim/tuning/tune.ts';
import { probeOf, quietProbe, QUIET_CODE_AMPERES, type Given } from '../probes.ts';

interface Heard {
  played: Played;
  readings: { seconds: number; amperes: number; truth: number; slope: number; status: number; judged: number }[];
  records: Record[];
}

function hear(change: Given): Heard {
  const probe = probeOf(quietProbe(change));
  const readings: Heard['readings'] = [];
  const records: Record[] = [];
  const observer: Observer = {
    passes: 1,
    readings(block: Readings) {
      for (let i = 0; i < block.count; i++) {
        const { seconds, amperes, truth, slope, status, judged } = block;
        readings.push({ seconds: seconds[i], amperes: amperes[i], truth: truth[i], slope: slope[i], status: status[i], judged: judged[i] });
      }
    },
    record(record) {
      records.push(record);
    },
  };
  const played = play(probe, probe.scenarios[0], tune(probe), { seed: 1, trial: 0, folder: '.' }, [observer]);
  return { played, readings, records };
}

const CHAIN = [
  { stage: 'intake', guardBits: 4 }, { stage: 'despike' }, { stage: 'decimate', order: 2, ratio: 8 },
  { stage: 'average', length_ms: 2 }, { stage: 'scale' },
];

/** A steady slope: a step whose edge lasts longer than the scenario. */
const SLOPE = [{ name: 'slope', current: { shape: 'step', from_A: -20, to_A: 20, at_ms: 0, edge_us: 200_000 }, duration_ms: 190 }];
const REQUIREMENTS = [{ measure: 'reading', scenario: 'slope', amperes: 1 }];

describe('a streamed reading', () => {
  test('stands beside the true current delayed by the stated delay: on a slope nothing but quantisation is left', () => {
    const { readings } = hear({ chain: CHAIN, scenarios: SLOPE, requirements: REQUIREMENTS });
    const settled = readings.filter(({ seconds }) => seconds > 0.02);
    expect(settled.length).toBeGreaterThan(800);
    // The analog poles (2 MHz each) lag by 1/(2 pi f) = 80 ns each: 200 A/s * 160 ns = 32 uA. Quantisation: half a
    // code, averaged further down. A delay wrong by one input sample (25 us) would show as 5 mA, a code is 0.8 mA.
    for (const { amperes, truth } of settled) expect(Math.abs(amperes - truth)).toBeLessThan(QUIET_CODE_AMPERES / 2 + 40e-6);
    for (const { slope } of settled) expect(slope).toBeCloseTo(200, 3);
  });

  test.each([
    ['reversal', 0, []], ['reversal', 9, []], ['quarter turn', 0, []], ['quarter turn', 12, []],
    ['quarter turn', 4, [{ stage: 'decimate', order: 1, ratio: 4 }]],
  ])('behind a %s with %i samples blanked the stated delay is that of the held means, on average', (bias, blank, ahead) => {
    const phase = 40;
    const { readings } = hear({
      sensor: { sensitivity_mV_per_mT: 50, rest_V: 2.5, bandwidth_kHz: 2000, bias, biasPhase_samples: phase },
      chain: [{ stage: 'intake', guardBits: 4 }, ...ahead, { stage: 'demodulate', bias, blank_samples: blank }, { stage: 'scale' }],
      scenarios: SLOPE, requirements: REQUIREMENTS,
    });
    const ratio = ahead.length > 0 ? 4 : 1;
    // whole phases, so that the held output is as often late as it is early
    const whole = readings.slice((20 * phase) / ratio, (180 * phase) / ratio);
    const mean = whole.reduce((sum, { amperes, truth }) => sum + amperes - truth, 0) / whole.length;
    // 200 A/s: a delay wrong by one input sample of 25 us is 5 mA; analog lag 32 uA, rounding of means and codes averaged.
    // A reading is held for `ratio` inputs and told at the last of them, the truth follows every input: no bias there.
    expect(Math.abs(mean)).toBeLessThan(0.5e-3);
  });

  test('its time is that of the last input sample in it', () => {
    const { readings } = hear({ chain: CHAIN, scenarios: SLOPE, requirements: REQUIREMENTS });
    // ratio 8, 40 kHz, 8 grid points a sample, taken at the last: (8 * 8 - 1) / 320 kHz
    expect(readings[0].seconds).toBeCloseTo(63 / 320e3, 12);
    expect(readings[1].seconds - readings[0].seconds).toBeCloseTo(8 / 40e3, 12);
  });

  test('a power cycle starts the decimator anew and readings keep their place in time', () => {
    const scenarios = [{ ...SLOPE[0], events: [{ at_ms: 95.07, event: 'power cycle' }] }];
    const { readings } = hear({ chain: CHAIN, scenarios, requirements: REQUIREMENTS });
    const late = readings.filter(({ seconds }) => seconds > 0.12);
    for (const { amperes, truth } of late) expect(Math.abs(amperes - truth)).toBeLessThan(QUIET_CODE_AMPERES / 2 + 40e-6);
    const steps = readings.slice(1).map(({ seconds }, i) => Math.round((seconds - readings[i].seconds) * 40e3));
    // one gap that is no multiple of the ratio, or the cycle did nothing
    expect(steps.filter((step) => step !== 8).length).toBe(1);
  });

  test('direction -1 counts the current the other way, truth and reading alike', () => {
    const { readings } = hear({ direction: -1, chain: CHAIN, scenarios: SLOPE, requirements: REQUIREMENTS });
    const last = readings[readings.length - 1];
    expect(last.truth).toBeLessThan(-17);
    expect(Math.abs(last.amperes - last.truth)).toBeLessThan(QUIET_CODE_AMPERES / 2 + 40e-6);
  });
});

describe('a meter record', () => {
  const chain = [...CHAIN, { stage: 'meter', window_ms: 20 }];
  const requirements = [{ measure: 'mean', scenario: 'sine', amperes: 1 }];

  test('stands beside the same statistics of the true current over the same input samples', () => {
    const scenarios = [{ name: 'sine', current: { shape: 'sine', peak_A: 10, frequency_Hz: 50, offset_A: 3 }, duration_ms: 200 }];
    const { records } = hear({ chain, scenarios, requirements });
    expect(records.length).toBe(10);
    for (const { truth, count } of records) {
      expect(count).toBe(100);
      // whole cycles on an equidistant grid: exact up to the last bits of sums of 6400 terms
      expect(truth.mean).toBeCloseTo(3, 10);
      expect(truth.acRms).toBeCloseTo(10 / Math.SQRT2, 10);
      expect(truth.trueRms).toBeCloseTo(Math.hypot(3, 10 / Math.SQRT2), 10);
    }
  });

  test('windows of a single sample are all read, although the ring of the meter is smaller than a block', () => {
    const scenarios = [{ name: 'sine', current: { shape: 'sine', peak_A: 10, frequency_Hz: 50 }, duration_ms: 20 }];
    const { records } = hear({
      chain: [{ stage: 'intake', guardBits: 4 }, { stage: 'scale' }, { stage: 'meter', window_ms: 0.025 }], scenarios, requirements,
    });
    expect(records.length).toBe(800);
    // at most 10 A * 2 pi * 50 Hz = 3142 A/s: 0.08 A from the begin of a period of 25 us to its end, where it is sampled
    records.forEach(({ mean, truth }) => expect(Math.abs(mean - truth.mean)).toBeLessThan(0.1));
  });

  test('windows follow one another without gap or overlap, also behind a power cycle', () => {
    const scenarios = [{
      name: 'sine', current: { shape: 'sine', peak_A: 10, frequency_Hz: 50 }, duration_ms: 200,
      events: [{ at_ms: 70, event: 'power cycle' }],
    }];
    const { records } = hear({ chain, scenarios, requirements });
    const gaps = records.slice(1).map((record, i) => Math.round((record.fromSeconds - records[i].seconds) * 40e3));
    // 10 ms of the window that was open at 70 ms are lost with the power: 400 samples and the one between windows
    expect(gaps).toEqual([1, 1, 401, 1, 1, 1, 1, 1]);
  });
});

describe('what a scenario leaves behind', () => {
  const requirements = [{ measure: 'reading', scenario: 'surge', amperes: 1 }];
  const chain = [{ stage: 'intake', guardBits: 4 }, { stage: 'overRange', hold_ms: 1 }, ...CHAIN.slice(1)];

  test('clipping at each node is counted and flagged readings are explained by it', () => {
    const scenarios = [{ name: 'surge', current: { shape: 'step', from_A: 60, to_A: 0, at_ms: 10 }, duration_ms: 40 }];
    const { played } = hear({ chain, scenarios, requirements, range_A: 30 });
    // 60 A: sensor 2.5 V + 60 A * 30.9 mV/A = 4.35 V inside its swing; amplifier 2.5 V + 3.7 V beyond 5 V
    expect(played.clipped.sensor).toBe(0);
    // the edge begins at 10 ms, on the first grid point of the period of sample 400, where it is still 60 A
    expect(played.clipped.amplifier).toBe(401);
    expect(played.unusable).toBeGreaterThan(0);
    expect(played.unexplained).toBe(0);
  });

  test('a flag without a cause is counted: an over-range limit inside the range', () => {
    const scenarios = [{ name: 'surge', current: { shape: 'dc', level_A: 20 }, duration_ms: 40 }];
    const tight = [chain[0], { stage: 'overRange', limit_A: 15 }, ...CHAIN.slice(1)];
    const { played } = hear({ chain: tight, scenarios, requirements, range_A: 30 });
    expect(played.unexplained).toBe(played.judged);
    expect(played.judged).toBeGreaterThan(100);
  });

  test('settling times after each level are not judged', () => {
    const scenarios = [{
      name: 'surge', current: { shape: 'staircase', levels_A: [0, 5, 10], hold_ms: 20 }, duration_ms: 60, settle_ms: 8, judgeFrom_ms: 3,
    }];
    const { readings } = hear({ chain, scenarios, requirements });
    for (const { seconds, judged } of readings) {
      const ms = seconds * 1e3;
      expect(judged).toBe(ms < 3 || (ms >= 20 && ms < 28) || (ms >= 40 && ms < 48) ? 0 : 1);
    }
  });
});

describe('the truth that is kept', () => {
  test('between samples it lies on the straight line, means are over whole samples, and what is gone is refused', () => {
    const truth = new Truth(10);
    for (let i = 0; i < 25; i++) truth.push(i, 2 * i, i * i);
    expect(truth.at(20.25)).toBe(20.25);
    expect(truth.over(20, 22)).toEqual({ mean: 41, meanSquare: (400 + 441) / 2 });
    expect(() => truth.at(25)).toThrow(RangeError);
    expect(() => truth.at(13)).toThrow(RangeError);
    expect(truth.at(14)).toBe(14);
  });
});
