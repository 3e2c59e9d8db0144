import { describe, expect, test } from 'vitest';
import { OVER_RANGE, SETTLING, TRACKING, ZERO_SUSPECT } from '../../../lib/index.ts';
import { RandomStream } from '../../../sim/hardware/random.ts';
import type { Measured } from '../../../sim/judging/measures.ts';
import { play } from '../../../sim/judging/play.ts';
import { ZeroAfterOverload, ZeroOverTemperature, ZeroOverTime } from '../../../sim/judging/zeros.ts';
import { tune } from '../../../sim/tuning/tune.ts';
import { probeOf, quietProbe, QUIET_CODE_AMPERES, type Given } from '../probes.ts';
import { hearReadings, scenarioOf, type MadeReading } from './heard.ts';

const PERIOD = 1e-3;
const AMPERES_PER_VOLT = 1 / (0.05 * (4e-4 * Math.PI / (2 + 80 / 2200)) * 1e3);

describe('zero after an overload', () => {
  const PULSE = { shape: 'pulse', peak_A: 90, at_ms: 100, width_us: 20_000, edge_us: 0 };
  const REQUIREMENT = { measure: 'zeroAfterOverload', scenario: 'way', limit_A: 0.1 } as const;
  const inPulse = (seconds: number): boolean => seconds >= 0.100 && seconds < 0.1205;

  function resultOf(at: (seconds: number) => MadeReading, more: Given = {}): Measured | string {
    const scenario = scenarioOf({ current: PULSE, duration_ms: 400, ...more });
    const measure = new ZeroAfterOverload(REQUIREMENT, scenario);
    hearReadings(measure, scenario, PERIOD, at);
    return measure.result();
  }

  test('is the mean error behind minus the mean error before, whatever the current outside the pulse', () => {
    for (const level of [0, -7]) {
      const measured = resultOf((seconds) => (inPulse(seconds) ? { amperes: 39, truth: 90, status: OVER_RANGE }
        : { amperes: level + (seconds < 0.1 ? 0.01 : -0.11), truth: level, status: seconds < 0.1 ? 0 : ZERO_SUSPECT })) as Measured;
      expect(measured.value).toBeCloseTo(-0.12, 12);
      expect(measured.share).toBeCloseTo(1.2, 12);
      expect(measured.shape).toContain('every reading behind it says that the zero is suspect; tracking stood still');
    }
  });

  test('a chain that says nothing is told to say nothing', () => {
    const measured = resultOf((seconds) => ({ amperes: seconds < 0.1 ? 0 : 0.2 })) as Measured;
    expect(measured.shape).toContain('no reading was flagged during the pulse, and no reading says that the zero is suspect');
  });

  test('tracking that learns the moved zero is told with how far it went', () => {
    const measured = resultOf((seconds) => (inPulse(seconds) ? { amperes: 39, status: OVER_RANGE }
      : { amperes: seconds < 0.1 ? 0 : 0.2 - 0.5 * (seconds - 0.12), status: TRACKING })) as Measured;
    expect(measured.shape).toMatch(/tracking was at work in 100 % .* learns the moved zero: \+0\.200 A at first, \+0\.0600 A in the end/);
  });

  test('flagged readings are left out, settle_ms is waited for, and judgeFrom_ms leaves out the start', () => {
    const measured = resultOf((seconds) => {
      if (seconds < 0.0495) return { amperes: 5 };
      if (seconds < 0.0995) return { amperes: 0 };
      if (seconds < 0.1205) return { amperes: 39, status: OVER_RANGE };
      if (seconds < 0.1395) return { amperes: 20 }; // unflagged, within settle_ms
      if (seconds < 0.2) return { amperes: 10, status: SETTLING };
      return { amperes: 0.05 };
    }, { judgeFrom_ms: 50, settle_ms: 20 }) as Measured;
    expect(measured.value).toBeCloseTo(0.05, 12);
  });

  test('behind a degaussing or the zero button only what follows it counts', () => {
    for (const event of ['degaussed', 'zero button']) {
      const measured = resultOf((seconds) => (inPulse(seconds) ? { amperes: 39, status: OVER_RANGE }
        : { amperes: seconds < 0.1 ? 0 : seconds < 0.2595 ? 0.3 : 0.01 }), { events: [{ at_ms: 250, for_ms: 10, event }] }) as Measured;
      expect(measured.value).toBeCloseTo(0.01, 12);
      expect(measured.where).toContain('behind');
    }
    // one ahead of the pulse brings nothing back
    const measured = resultOf((seconds) => ({ amperes: seconds < 0.1 ? 0 : 0.3 }), { events: [{ at_ms: 50, event: 'degaussed' }] }) as Measured;
    expect(measured.value).toBeCloseTo(0.3, 12);
    expect(measured.where).not.toContain('behind');
  });

  test('is refused without readings on both sides, and without a pulse', () => {
    expect(resultOf((seconds) => ({ amperes: 0, status: seconds < 0.1 ? 0 : OVER_RANGE }))).toContain('behind the pulse (281 are flagged');
    expect(resultOf(() => ({ amperes: 0 }), { judgeFrom_ms: 95 })).toContain('between judgeFrom_ms and the pulse');
    expect(resultOf(() => ({ amperes: 0 }), { current: { shape: 'dc', level_A: 1 } })).toContain('allowed "pulse"');
  });
});

describe('zero over time', () => {
  const REQUIREMENT = { measure: 'zeroOverTime', scenario: 'way', tau_s: 0.1, limit_A: 0.02 } as const;
  const STEADY = { current: { shape: 'dc', level_A: 5 }, duration_ms: 20_000 };

  function resultOf(at: (seconds: number, n: number) => MadeReading, more: Given = {}, tau_s = 0.1): Measured | string {
    const scenario = scenarioOf({ ...STEADY, ...more });
    const measure = new ZeroOverTime({ ...REQUIREMENT, tau_s }, scenario);
    hearReadings(measure, scenario, PERIOD, at);
    return measure.result();
  }

  test('of a drift of d amperes a second is d tau / sqrt 2, and named', () => {
    const measured = resultOf((seconds) => ({ amperes: 5 + 0.3 * seconds })) as Measured;
    expect(measured.value).toBeCloseTo((0.3 * 0.1) / Math.SQRT2, 9);
    expect(measured.where).toContain('200 of them in the record');
    expect(measured.shape).toContain('drift');
  });

  test('of white noise is s / sqrt m, and named', () => {
    const random = new RandomStream(2, 0, 'zeros test');
    const measured = resultOf(() => ({ amperes: 5 + 0.1 * random.normal() })) as Measured;
    // 200 groups: 1 / sqrt(2 * 200) = 5 %, five of them
    expect(Math.abs(measured.value / 0.01 - 1)).toBeLessThan(0.25);
    expect(measured.shape).toContain('white noise');
  });

  test('begins with the first usable judged reading', () => {
    const measured = resultOf((seconds) => ({ amperes: seconds < 2.0005 ? 100 : 5, status: seconds < 2.0005 ? SETTLING : 0 }), { judgeFrom_ms: 1000 }) as Measured;
    expect(measured.value).toBe(0);
    expect(measured.share).toBe(0);
  });

  test('is refused for a record shorter than three tau, with gaps, with too short a tau, and for a current that moves', () => {
    expect(resultOf(() => ({ amperes: 5 }), {}, 7)).toContain('shorter than three averaging times');
    expect(typeof resultOf(() => ({ amperes: 5 }), { duration_ms: 300 })).toBe('object');
    expect(resultOf(() => ({ amperes: 5 }), { duration_ms: 298 })).toContain('shorter than three averaging times');
    expect(resultOf((_, n) => ({ amperes: 5, status: n === 5000 ? OVER_RANGE : 0 }))).toMatch(/^2? ?\d* readings in the record are missing or flagged/);
    expect(resultOf(() => ({ amperes: 5 }), {}, 1e-4)).toContain('shorter than the time between two readings');
    expect(resultOf(() => ({ amperes: 5 }), { current: { shape: 'sine', peak_A: 1, frequency_Hz: 50 } })).toContain('allowed "dc"');
  });
});

describe('zero over temperature', () => {
  function resultOf(given: Given, lowest_C: number, highest_C: number): { result: Measured | string; played: number[] } {
    const requirement = { measure: 'zeroOverTemperature', lowest_C, highest_C, limit_A: 1 } as const;
    const probe = probeOf(quietProbe({ requirements: [requirement], ...given }));
    const study = new ZeroOverTemperature(requirement, probe);
    for (const { scenario, observer } of study.plays) play(probe, scenario, tune(probe), { seed: 1, trial: 0, folder: '.' }, [observer]);
    return { result: study.result(), played: study.plays.map(({ scenario }) => scenario.temperature_C) };
  }
  const drifting = { sensitivity_mV_per_mT: 50, rest_V: 2.5, restDrift_mV_per_K: 1, bandwidth_kHz: 2000 };

  test('is what the drift of the rest output makes at the temperature furthest from 25 °C', () => {
    const { result, played } = resultOf({ sensor: drifting }, -10, 40);
    expect(played).toEqual([-10, 25, 40]);
    const measured = result as Measured;
    // 35 K * 1 mV/K over the volts an ampere makes
    expect(Math.abs(measured.value + 0.035 * AMPERES_PER_VOLT)).toBeLessThan(QUIET_CODE_AMPERES);
    expect(measured.where).toBe('at -10 °C');
  });

  test('25 °C is tried only when it lies inside, and one temperature is tried once', () => {
    expect(resultOf({}, 30, 40).played).toEqual([30, 40]);
    expect(resultOf({}, 25, 40).played).toEqual([25, 40]);
    expect(resultOf({}, 30, 30).played).toEqual([30]);
  });

  test('a zero at start-up takes the drift away, and the row says so', () => {
    const chain = [
      { stage: 'intake', guardBits: 4 },
      { stage: 'zero', atStart: true, settle_ms: 1, mean_ms: 1, span_A: 1, window_A: 5 }, { stage: 'average', length_ms: 5 }, { stage: 'scale' },
    ];
    const measured = resultOf({ sensor: drifting, chain }, -10, 40).result as Measured;
    expect(Math.abs(measured.value)).toBeLessThan(QUIET_CODE_AMPERES);
    expect(measured.shape).toContain('taken at each of these temperatures');
  });

  test('a chain whose readings are all flagged is refused', () => {
    const chain = [{ stage: 'intake', guardBits: 4 }, { stage: 'overRange', stuckAfter_samples: 2 }, { stage: 'scale' }];
    expect(resultOf({ chain }, 0, 40).result).toContain('usable readings at 0 °C');
  });
});
