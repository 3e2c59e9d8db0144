import { describe, expect, test } from 'vitest';
import { ErrorShape } from '../../../sim/judging/errorshape.ts';
import { settlingOf } from '../../../sim/judging/settle.ts';
import { swallowedAutomatically, swallowedOf } from '../../../sim/judging/swallowed.ts';
import { tune } from '../../../sim/tuning/tune.ts';
import { demoData, probeOf, quietProbe, QUIET_CODE_AMPERES, type Given } from '../probes.ts';
import { rowOf, verdictOf } from './proving.ts';

const INTAKE = { stage: 'intake', guardBits: 4 };
const STEADY = [{ name: 'steady', current: { shape: 'dc', level_A: 10 }, duration_ms: 20 }];

describe('a reading', () => {
  test('is off by exactly what the hardware is off by: an amplifier offset, in amperes', () => {
    // 10 mV at the input of an amplifier that sees 50 mV/mT * 0.6171 mT/A = 30.85 mV/A; a code is 0.8 mA
    const expected = 0.010 / (0.05 * (4e-4 * Math.PI / (2 + 80 / 2200)) * 1e3);
    const given = quietProbe({
      amplifier: { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 2000, offset_mV: { nominal: 0, tolerance: 10 } },
      scenarios: STEADY, requirements: [{ measure: 'reading', scenario: 'steady', amperes: 0.1 }],
    });
    // a drawn unit stands somewhere within the tolerance, without calibration its offset shows as it is
    const drawn = verdictOf(given, { trial: 3 }).rows[0];
    expect(Math.abs(drawn.value!)).toBeLessThan(expected + QUIET_CODE_AMPERES);
    expect(Math.abs(drawn.value!)).toBeGreaterThan(QUIET_CODE_AMPERES);
    expect(Math.abs(rowOf(given, 'reading@steady').value!)).toBeLessThan(QUIET_CODE_AMPERES);
  });

  test('uses its allowance as ±(percent of reading + percent of range + amperes)', () => {
    const row = rowOf(quietProbe({
      scenarios: STEADY, requirements: [{ measure: 'reading', scenario: 'steady', percentOfReading: 2, percentOfRange: 1, amperes: 0.05 }],
    }), 'reading@steady');
    expect(row.limit).toBeCloseTo(0.02 * 10 + 0.01 * 30 + 0.05, 12);
    expect(row.share).toBeCloseTo(Math.abs(row.value!) / row.limit, 12);
  });

  test('with every reading flagged it is not measured, and says so', () => {
    const row = rowOf(quietProbe({
      chain: [INTAKE, { stage: 'overRange' }, { stage: 'scale' }],
      scenarios: [{ name: 'steady', current: { shape: 'dc', level_A: 90 }, duration_ms: 20 }],
      requirements: [{ measure: 'reading', scenario: 'steady', amperes: 1 }],
    }), 'reading@steady');
    expect(row).toMatchObject({ holds: false, value: null, share: null });
    expect(row.because).toContain('every reading is flagged as unusable');
    expect(row.because).toContain('the amplifier reached its rail in 100 %');
  });
});

describe('a supply that is low', () => {
  const reading = (change: Given) => rowOf(quietProbe({
    scenarios: [{ ...STEADY[0], supply_V: 4.5 }], requirements: [{ measure: 'reading', scenario: 'steady', amperes: 0.1 }], ...change,
  }), 'reading@steady');
  const sensor = { sensitivity_mV_per_mT: 50, rest_V: 2.5, bandwidth_kHz: 2000, ratiometric: true };
  const amplifier = { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 2000 };
  const converter = { bits: 16, rate_kHz: 40, reference_V: 5, reference: 'supply' };

  test('cancels where sensor, virtual ground and reference are all shares of it', () => {
    expect(Math.abs(reading({ sensor, amplifier: { ...amplifier, ground: 'supply' }, converter }).value!)).toBeLessThan(QUIET_CODE_AMPERES);
  });

  test('is named where one of them is not', () => {
    const row = reading({ sensor, amplifier, converter });
    // the sensor rests 0.25 V lower and the ground does not: 2 * 2.25 - 2.5 = 2.0 V of 4.5 V, where 2.25 V is zero
    expect(row.value).toBeCloseTo(-0.25 / (2 * 0.9 * 50 * (4e-4 * Math.PI / (2 + 80 / 2200))), 2);
    expect(row.because).toContain('followed by the sensor and the reference but not by the virtual ground');
  });
});

describe('what is left out of an error', () => {
  const chain = [INTAKE, { stage: 'overRange', hold_ms: 0 }, { stage: 'scale' }];
  // a triangle of currents would do; a sine of twice the converter's range is beyond it for two thirds of the time
  const beyond = (peak_A: number) => rowOf(quietProbe({
    chain, scenarios: [{ name: 'way', current: { shape: 'sine', peak_A, frequency_Hz: 50 }, duration_ms: 200 }],
    requirements: [{ measure: 'reading', scenario: 'way', percentOfRange: 5 }],
  }), 'reading@way');

  test('is told in the row, as the share of the readings that were flagged', () => {
    // the code range ends at 2.5 V / 61.7 mV/A = 40.5 A: a sine of 45 A is beyond it for acos(40.5/45) / (pi/2) = 28.7 %
    const row = beyond(45);
    const end = 32767.5 * QUIET_CODE_AMPERES;
    // 800 samples a period: two edges of each half wave, one sample each
    expect(Math.abs(row.leftOut - Math.acos(end / 45) / (Math.PI / 2))).toBeLessThan(4 / 800);
    expect(row.holds).toBe(true);
    expect(row.where).toMatch(/28\.\d % flagged and left out/);
  });

  test('must not be more than half: then nothing has been shown', () => {
    const row = beyond(200);
    expect(row.leftOut).toBeGreaterThan(0.5);
    expect(row.holds).toBe(false);
    expect(row.because).toContain('the few that are left prove little');
  });

  test('windows that timed out without a cycle are not measured', () => {
    const row = rowOf(quietProbe({
      chain: [INTAKE, { stage: 'scale' }, { stage: 'meter', window_ms: 100, cycles: 2, hysteresis_A: 25 }],
      scenarios: [{ name: 'way', current: { shape: 'sine', peak_A: 20, frequency_Hz: 50 }, duration_ms: 500 }],
      requirements: [{ measure: 'trueRms', scenario: 'way', amperes: 1 }],
    }), 'trueRms@way');
    expect(row).toMatchObject({ holds: false, value: null });
    expect(row.because).toContain('timed out without whole cycles');
  });
});

describe('the reason under a row that falls short', () => {
  const requirements = [{ measure: 'reading', scenario: 'way', amperes: 0.01 }];
  const staircase = { shape: 'staircase', levels_A: [0, 5, 10, 20], hold_ms: 20 };

  test('names a zero', () => {
    const given = quietProbe({
      sensor: { sensitivity_mV_per_mT: 50, rest_V: 2.5, restDrift_mV_per_K: 1, bandwidth_kHz: 2000 },
      scenarios: [{ name: 'way', current: staircase, duration_ms: 80, settle_ms: 1, temperature_C: 35 }], requirements,
    });
    // 10 K * 1 mV/K over 30.85 mV/A
    expect(rowOf(given, 'reading@way').because).toMatch(/off by a steady \+0\.324 A \(zero\)/);
  });

  test('names a gain', () => {
    const given = quietProbe({
      sensor: { sensitivity_mV_per_mT: 50, sensitivityDrift_ppm_per_K: 1000, rest_V: 2.5, bandwidth_kHz: 2000 },
      scenarios: [{ name: 'way', current: staircase, duration_ms: 80, settle_ms: 1, temperature_C: 35 }], requirements,
    });
    expect(rowOf(given, 'reading@way').because).toMatch(/\+1\.0\d* % of the true current off \(gain\)/);
  });

  test('names a lag', () => {
    const given = quietProbe({
      amplifier: { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 0.4 },
      scenarios: [{ name: 'way', current: { shape: 'sine', peak_A: 10, frequency_Hz: 5 }, duration_ms: 400 }], requirements,
    });
    // one pole: 1 / (2 pi 400 Hz) = 398 us
    expect(rowOf(given, 'reading@way').because).toMatch(/lags the stated delay by 39[789] µs/);
  });

  test('names noise', () => {
    const given = quietProbe({
      converter: { bits: 12, rate_kHz: 40, reference_V: 5, noise_codes: 3 }, scenarios: [{ ...STEADY[0], name: 'way' }], requirements,
    });
    expect(rowOf(given, 'reading@way').because).toContain('neither zero, gain nor delay');
  });
});

describe('parts of an error', () => {
  test('are found exactly when the error is made of them', () => {
    const shape = new ErrorShape();
    for (let i = 0; i < 200; i++) {
      const truth = 10 * Math.sin(i / 7);
      const slope = 300 * Math.cos(i / 5);
      shape.hear(0.25 + 0.01 * truth - 2e-4 * slope, truth, slope);
    }
    const parts = shape.parts();
    // normal equations of 200 points: sums carry 200 * 2^-53 relative, far below these digits
    expect(parts.offsetAmperes).toBeCloseTo(0.25, 9);
    expect(parts.gain).toBeCloseTo(0.01, 9);
    expect(parts.lagSeconds).toBeCloseTo(2e-4, 9);
  });

  test('a current that never changes has an offset only', () => {
    const shape = new ErrorShape();
    for (let i = 0; i < 10; i++) shape.hear(0.5, 10, 0);
    expect(shape.parts()).toMatchObject({ offsetAmperes: 0.5, gain: 0, lagSeconds: 0 });
  });
});

describe('a meter', () => {
  // RMS of a pulse train of duty D, edges of r seconds from level to level: known in closed form (Erickson and
  // Maksimovic, Fundamentals of Power Electronics, appendix A): each linear edge contributes (a^2 + ab + b^2) / 3.
  test('reads the true RMS of PWM, triangle-free, of a sine and of DC as the textbook says', () => {
    const cases: [Given, number][] = [
      [{ shape: 'dc', level_A: 10 }, 10],
      [{ shape: 'sine', peak_A: 14, frequency_Hz: 50, offset_A: 3 }, Math.sqrt(9 + 98)],
      [{ shape: 'pwm', low_A: 0, high_A: 20, frequency_Hz: 100, duty_percent: 25, edge_us: 100 },
        20 * Math.sqrt(0.25 - 0.01 + 0.02 / 3)],
    ];
    for (const [current, rms] of cases) {
      const row = rowOf(quietProbe({
        chain: [INTAKE, { stage: 'scale' }, { stage: 'meter', window_ms: 100 }],
        scenarios: [{ name: 'way', current, duration_ms: 500 }],
        requirements: [{ measure: 'trueRms', scenario: 'way', amperes: 0.05 }],
      }), 'trueRms@way');
      expect(row.holds).toBe(true);
      expect(Number(/true ([\d.]+) A/.exec(row.where)![1])).toBeCloseTo(rms, 2);
      // 40 kHz samples of 100 us edges: 4 points on each, rectangle rule within 20 A * 25 us / 10 ms of the integral
      expect(Math.abs(row.value!)).toBeLessThan(0.05);
    }
  });

  test('a window that is longer than the scenario is refused, not guessed', () => {
    expect(() => verdictOf(quietProbe({
      chain: [INTAKE, { stage: 'scale' }, { stage: 'meter', window_ms: 100 }], scenarios: STEADY,
      requirements: [{ measure: 'mean', scenario: 'steady', amperes: 1 }],
    }))).toThrow(/window/);
  });
});

describe('noise', () => {
  test('of a converter comes out as the closed form says', () => {
    const codes = 3;
    const given = quietProbe({
      converter: { bits: 12, rate_kHz: 40, reference_V: 5, noise_codes: codes },
      chain: [{ stage: 'intake', guardBits: 8 }, { stage: 'average', length_ms: 0.4 }, { stage: 'scale' }],
      scenarios: [{ ...STEADY[0], duration_ms: 5000 }], requirements: [{ measure: 'noise', scenario: 'steady', limit_A: 1 }],
    });
    const code = QUIET_CODE_AMPERES * 16;
    // white noise and quantisation (Bennett, 1948: q / sqrt 12), mean of 16
    const expected = (code * Math.sqrt(codes ** 2 + 1 / 12)) / 4;
    // 200000 readings, 12500 independent: standard deviation of the estimate 1 / sqrt(2 * 12500) = 0.63 %, five of them
    expect(Math.abs(rowOf(given, 'noise@steady').value! / expected - 1)).toBeLessThan(0.032);
  });
});

describe('settling', () => {
  const scenarios = [{ name: 'jump', current: { shape: 'step', from_A: 0, to_A: 10, at_ms: 10, edge_us: 0 }, duration_ms: 100 }];

  test('of a single pole is tau * ln(100) to 1 %', () => {
    const given = quietProbe({
      amplifier: { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 0.2 }, scenarios,
      requirements: [{ measure: 'settling', scenario: 'jump', band_percent: 1, limit_ms: 50 }],
    });
    const tauMs = 1e3 / (2 * Math.PI * 200);
    // a reading every 25 us, taken up to 25 us late; quantisation 0.8 mA of a band of 100 mA moves it by tau * 0.008
    expect(Math.abs(rowOf(given, 'settling@jump').value! - tauMs * Math.log(100))).toBeLessThan(0.025 + 0.008 * tauMs + 0.025);
  });

  test('of the chain alone is that of its integers: a mean of N settles linearly', () => {
    const probe = probeOf(quietProbe({ chain: [INTAKE, { stage: 'average', length_ms: 10 }, { stage: 'scale' }] }));
    // 400 samples; after 396 of them the mean is 1 % off, after 397 less
    expect(settlingOf(probe, tune(probe))).toEqual({ onePercentMs: 395 / 40, oneThousandthMs: 399 / 40 });
  });
});

describe('swallowed', () => {
  test('adds the window of the start-up zero and what tracking may take; the button is told apart', () => {
    const probe = probeOf(quietProbe({
      chain: [INTAKE, {
        stage: 'zero', atStart: true, mean_ms: 1, span_A: 1, window_A: 0.5, tracking: true, trackWindow_A: 0.3, trackAuthority_A: 0.2,
      }, { stage: 'scale' }],
    }));
    const { constants, countsPerAmpere } = tune(probe);
    const list = swallowedOf(constants.design, countsPerAmpere, 0);
    expect(list.map(({ by }) => by)).toEqual(['start-up', 'tracking', 'button']);
    // both are rounded down to whole counts
    expect(Math.abs(swallowedAutomatically(list) - 0.7)).toBeLessThan(2 / countsPerAmpere);
  });

  test('a zero that drifts lets a larger current be swallowed, and the row says so', () => {
    const given = quietProbe({
      sensor: { sensitivity_mV_per_mT: 50, rest_V: 2.5, restDrift_mV_per_K: 0.2, bandwidth_kHz: 2000 },
      chain: [INTAKE, { stage: 'zero', atStart: true, settle_ms: 1, mean_ms: 1, span_A: 1, window_A: 0.5 }, { stage: 'scale' }],
      scenarios: [{ name: 'hot', current: { shape: 'dc', level_A: -0.8 }, duration_ms: 20, judgeFrom_ms: 5, temperature_C: 75 }],
      requirements: [{ measure: 'reading', scenario: 'hot', amperes: 1 }, { measure: 'swallowed', limit_A: 1 }],
    });
    // 50 K * 0.2 mV/K over 30.85 mV/A = 0.324 A of drift: it hides 0.8 A within a window of 0.5 A
    expect(rowOf(given, 'reading@hot').value).toBeCloseTo(0.8, 2);
    expect(rowOf(given, 'swallowed').value).toBeCloseTo(0.5 + 0.324, 2);
  });

  test('a window as large as the limit does not exceed it', () => {
    const row = rowOf(quietProbe({
      chain: [INTAKE, { stage: 'zero', atStart: true, mean_ms: 1, span_A: 1, window_A: 0.5 }, { stage: 'scale' }],
      requirements: [{ measure: 'reading', scenario: 'steady', amperes: 1 }, { measure: 'swallowed', limit_A: 0.5 }],
    }), 'swallowed');
    expect(row.holds).toBe(true);
  });

  test('a zero at start-up really takes a direct current as large as its window, and refuses a larger one', () => {
    const chain = [INTAKE, { stage: 'zero', atStart: true, settle_ms: 1, mean_ms: 1, span_A: 1, window_A: 0.5 }, { stage: 'scale' }];
    const readingAt = (level_A: number): number => rowOf(quietProbe({
      chain, scenarios: [{ name: 'steady', current: { shape: 'dc', level_A }, duration_ms: 20, judgeFrom_ms: 5 }],
      requirements: [{ measure: 'reading', scenario: 'steady', amperes: 1 }],
    }), 'reading@steady').value!;
    expect(readingAt(0.49)).toBeCloseTo(-0.49, 2);
    expect(Math.abs(readingAt(0.51))).toBeLessThan(2 * QUIET_CODE_AMPERES);
  });
});

describe('a warning', () => {
  // the grid of the quiet probe is coarse on purpose, and that is told as well
  const warningsOf = (change: Given) => verdictOf(quietProbe(change)).summary.warnings.filter((text) => !text.startsWith('gridFactor'));

  test('tells a range that the converter has no codes for', () => {
    expect(warningsOf({ range_A: 1000 }).join()).toMatch(/range_A: 1000 A is beyond the last code of the converter, 40\.5\d A/);
    expect(warningsOf({ range_A: 40 })).toEqual([]);
  });

  test('tells over-range codes that the amplifier cannot reach', () => {
    const amplifier = { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 2000, railLow_V: 0.5, railHigh_V: 4 };
    const chain = (more: Given) => [INTAKE, { stage: 'overRange', ...more }, { stage: 'scale' }];
    // 4 V of 5 V in 16 bits is code 52428.8, 0.5 V is 6553.6
    const [text] = warningsOf({ amplifier, chain: chain({}) });
    expect(text).toContain('highCode 65535 (the amplifier ends at code 52428) and lowCode 0 (the amplifier ends at code 6554)');
    expect(warningsOf({ amplifier, chain: chain({ highCode: 52428, lowCode: 6554 }) })).toEqual([]);
  });
});

describe('the verdict', () => {
  test('the same seed and trial give the same rows; another seed does not', () => {
    const one = verdictOf(demoData(), { trial: 2, only: 'rest' });
    expect(verdictOf(demoData(), { trial: 2, only: 'rest' })).toEqual(one);
    expect(verdictOf(demoData(), { trial: 2, only: 'rest', seed: 2 }).rows).not.toEqual(one.rows);
  });

  test('every row has an id of its own', () => {
    const ids = verdictOf(demoData(), { trial: 1 }).rows.map(({ id }) => id);
    expect(new Set(ids).size).toBe(ids.length);
  });

  test('a trial without calibration shows the tolerance of its parts', () => {
    const { calibration: _, ...rest } = demoData();
    const verdict = verdictOf(rest, { trial: 1, only: 'staircase' });
    expect(verdict.holds).toBe(false);
    expect(verdictOf(demoData(), { trial: 1, only: 'staircase' }).holds).toBe(true);
  });
});
