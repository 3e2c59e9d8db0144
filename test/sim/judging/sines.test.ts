import { describe, expect, test } from 'vitest';
import { frequenciesOf, temperaturesOf } from '../../../sim/judging/band.ts';
import { longestPeriodSeconds } from '../../../sim/judging/period.ts';
import type { Requirement } from '../../../sim/probe/fields.ts';
import { probeOf, quietProbe, QUIET_CODE_AMPERES, type Given } from '../probes.ts';
import { rowOf, verdictOf, type Alter } from './proving.ts';

const INTAKE = { stage: 'intake', guardBits: 4 };
const SCALE = { stage: 'scale' };
/** Sensor of the quiet probe; on a grid of 320 kHz straight lines between points cost (pi f / 320 kHz)^2 / 3. */
const SENSOR_HZ = 2e6;

/** An amplifier with one pole, everything else as fast as in the quiet probe. */
const poleAt = (kilohertz: number): Given => ({ gain: 2, virtualGround_V: 2.5, bandwidth_kHz: kilohertz });

function sineProbe(hertz: number, measures: Given[], change: Given = {}, scenario: Given = {}): Given {
  return quietProbe({
    scenarios: [{
      name: 'sine', current: { shape: 'sine', peak_A: 10, frequency_Hz: hertz }, duration_ms: 700, judgeFrom_ms: 200, ...scenario,
    }],
    requirements: measures.map((measure) => ({ scenario: 'sine', ...measure })),
    ...change,
  });
}

const GAIN = { measure: 'gain', limit_percent: 1 };
const PHASE = { measure: 'phase', limit_deg: 1 };

describe('gain and phase of a sine', () => {
  test.each([50, 133.7, 400])('behind one pole of 400 Hz, at %f Hz: 1 / sqrt(1 + r^2) and -atan(r)', (hertz) => {
    const { rows } = verdictOf(sineProbe(hertz, [GAIN, PHASE], { amplifier: poleAt(0.4) }));
    const [gain, phase] = ['gain@sine', 'phase@sine'].map((id) => rows.find((row) => row.id === id)!.value!);
    const ratio = hertz / 400;
    // gain: 1 ppm of the chain's scale, 5 ppm of the grid, quantisation 0.23 mA * sqrt(2 / 20000) of 10 A: below 1e-5
    expect(Math.abs(gain / 100 + 1 - 1 / Math.hypot(1, ratio))).toBeLessThan(2e-5);
    // the sensor's pole turns the phase by f / 2 MHz; its lag is the only other one
    const expected = (-(Math.atan(ratio) + hertz / SENSOR_HZ) * 180) / Math.PI;
    expect(Math.abs(phase - expected)).toBeLessThan(2e-3);
  });

  test('a mean of N has the gain sin(N x) / (N sin x), and its phase is that of the stated delay', () => {
    // 2.5 ms at 40 kHz: N = 100, half a sample of delay beyond whole ones; x = pi * f / rate
    const { rows } = verdictOf(sineProbe(150, [GAIN, PHASE], { chain: [INTAKE, { stage: 'average', length_ms: 2.5 }, SCALE] }));
    const x = (Math.PI * 150) / 40e3;
    const [gain, phase] = ['gain@sine', 'phase@sine'].map((id) => rows.find((row) => row.id === id)!.value!);
    expect(Math.abs(gain / 100 + 1 - Math.sin(100 * x) / (100 * Math.sin(x)))).toBeLessThan(2e-5);
    // two poles of 2 MHz; a delay wrong by half a sample (12.5 us) would show as 0.675 degrees
    expect(Math.abs(phase + (2 * 150 * 180) / (SENSOR_HZ * Math.PI))).toBeLessThan(2e-3);
  });

  test('a share is that of the limit, and a phase of the wrong sign counts as much', () => {
    const row = rowOf(sineProbe(50, [{ measure: 'phase', limit_deg: 5 }], { amplifier: poleAt(0.4) }), 'phase@sine');
    expect(row.value).toBeLessThan(-7);
    expect(row).toMatchObject({ unit: '°', limit: 5, better: 'less', holds: false });
    expect(row.share).toBeCloseTo(-row.value! / 5, 12);
    expect(row.because).toContain('later than the stated delay');
  });
});

describe('SINAD and effective bits', () => {
  test('of a reading that only quantisation disturbs are those of the converter (IEEE Std 1057: log2(FSR / (NAD sqrt 12)))', () => {
    // 12 bits: a code is 16 * 0.8 mA; a reading is rounded far below that
    const code = 16 * QUIET_CODE_AMPERES;
    const given = sineProbe(53.1, [{ measure: 'sinad', atLeast_dB: 60 }, { measure: 'effectiveBits', atLeast_bits: 10 }], {
      converter: { bits: 12, rate_kHz: 40, reference_V: 5 }, chain: [{ stage: 'intake', guardBits: 8 }, SCALE],
    });
    const { rows } = verdictOf(given);
    const [sinad, bits] = ['sinad@sine', 'effectiveBits@sine'].map((id) => rows.find((row) => row.id === id)!);
    // Bennett (1948): NAD = code / sqrt 12, within 1 % at 781 codes of amplitude
    expect(Math.abs(sinad.value! - 20 * Math.log10((10 / Math.SQRT2 / code) * Math.sqrt(12)))).toBeLessThan(0.1);
    expect(Math.abs(bits.value! - Math.log2(60 / code))).toBeLessThan(0.02);
    expect(sinad).toMatchObject({ better: 'more', holds: true, unit: 'dB' });
    // 20 dB above the least SINAD is a tenth of the noise that it allows; one bit above the least is half of it
    expect(sinad.share).toBeCloseTo(10 ** ((60 - sinad.value!) / 20), 12);
    expect(bits.share).toBeCloseTo(2 ** (10 - bits.value!), 12);
  });

  test('below the least value a row falls short', () => {
    const row = rowOf(sineProbe(53.1, [{ measure: 'effectiveBits', atLeast_bits: 20 }]), 'effectiveBits@sine');
    expect(row.holds).toBe(false);
    expect(row.share).toBeGreaterThan(1);
  });
});

describe('a record that cannot be fitted is refused', () => {
  const because = (given: Given, alter?: Alter): string | null => {
    const row = rowOf(given, 'gain@sine', alter);
    expect(row).toMatchObject({ value: null, share: null, holds: false, unit: '%', limit: 1 });
    return row.because;
  };

  /** Rules of the probe file refuse these already; a measure does not rely on that. */
  const altered = (hertz: number): Alter => (probe) => {
    const { current } = probe.scenarios[0];
    if (current.shape === 'sine') current.frequency_Hz = hertz;
  };

  test('shorter than five periods', () => {
    expect(because(sineProbe(50, [GAIN]), altered(9))).toContain('holds 4.50 periods, a fit needs 5');
    expect(rowOf(sineProbe(10, [GAIN]), 'gain@sine').value).not.toBeNull();
  });

  test('fewer readings than the fit needs', () => {
    const chain = [INTAKE, { stage: 'decimate', order: 1, ratio: 400 }, SCALE];
    expect(because(sineProbe(11, [GAIN], { chain }))).toContain('holds 50 readings, a fit needs 64');
  });

  test('a sine beyond half the reading rate', () => {
    const chain = [INTAKE, { stage: 'decimate', order: 1, ratio: 100 }, SCALE];
    expect(because(sineProbe(50, [GAIN], { chain }), altered(230))).toContain('is not below half the reading rate of 400');
  });

  test('flagged readings inside', () => {
    const chain = [INTAKE, { stage: 'overRange', limit_A: 8 }, SCALE];
    expect(because(sineProbe(50, [GAIN], { chain }))).toContain('are flagged as unusable');
  });

  test('a reading without the sine in it: a low-pass takes it away, converter noise is left', () => {
    const chain = [INTAKE, { stage: 'sections', filter: 'low-pass', corner_Hz: 20, order: 8 }, SCALE];
    const converter = { bits: 12, rate_kHz: 40, reference_V: 5, noise_codes: 4 };
    expect(because(sineProbe(2000, [GAIN], { chain, converter }))).toMatch(/does not converge|determine a sine/);
  });
});

describe('bandwidth', () => {
  const bandwidth = (atLeast_Hz: number, change: Given, alter?: Alter) =>
    rowOf(quietProbe({ requirements: [{ measure: 'bandwidth', atLeast_Hz, peak_A: 10 }], ...change }), 'bandwidth@10 A', alter);

  /** Where |H(f)|^2 = |H(reference)|^2 / 2, by bisection of the closed form. */
  const crossing = (power: (hertz: number) => number, reference: number): number => {
    let low = reference;
    let high = 20e3;
    for (let i = 0; i < 60; i++) {
      const middle = (low + high) / 2;
      if (power(middle) > power(reference) / 2) low = middle;
      else high = middle;
    }
    return low;
  };
  const pole = (corner: number) => (hertz: number): number => 1 / (1 + (hertz / corner) ** 2);
  /** The straight line in the last bracket of 1/128 octave bends by (ln 2 / 128)^2 / 8; the fits add 1e-5. */
  const CLOSE = 1e-4;

  test('of a pole is its corner, below, near and above what is asked for', () => {
    // the low frequency is a twentieth of what is asked for; 75 Hz is too near to what is found, a twentieth of that follows
    for (const [asked, low] of [[150, 7.5], [400, 20], [1500, crossing(pole(400), 75) / 20]]) {
      const { value, share, limit } = bandwidth(asked, { amplifier: poleAt(0.4) });
      expect(Math.abs(value! / crossing(pole(400), low) - 1)).toBeLessThan(CLOSE);
      expect(share).toBeCloseTo(limit / value!, 12);
    }
  });

  test('of a pole ahead of a digital Butterworth section is that of both (bilinear: tan^4 law)', () => {
    const corner = 500;
    const warped = (hertz: number): number => Math.tan((Math.PI * hertz) / 40e3);
    const section = (hertz: number): number => 1 / (1 + (warped(hertz) / warped(corner)) ** 4);
    const { value, holds } = bandwidth(300, {
      amplifier: poleAt(0.4), chain: [INTAKE, { stage: 'sections', filter: 'low-pass', corner_Hz: corner, order: 2 }, SCALE],
    });
    const expected = crossing((hertz) => pole(400)(hertz) * section(hertz), 15);
    expect(Math.abs(value! / expected - 1)).toBeLessThan(CLOSE);
    expect(holds).toBe(true);
  });

  test('far below what is asked for: the low frequency follows down', () => {
    const row = bandwidth(2000, { amplifier: poleAt(0.04) });
    // a twentieth of 40 Hz, which the pole weakens by 0.125 %
    expect(Math.abs(row.value! / 40 - 1)).toBeLessThan(0.005);
    expect(row.holds).toBe(false);
    expect(row.because).toContain('has lost 3 dB at');
  });

  test('beyond half the reading rate it is refused; where the readings show no end it is at least their highest sine', () => {
    const chain = [INTAKE, { stage: 'decimate', order: 1, ratio: 20 }, SCALE];
    const asked: Alter = ({ requirements: [requirement] }) => {
      if (requirement.measure === 'bandwidth') requirement.atLeast_Hz = 1100;
    };
    expect(bandwidth(900, { chain }, asked).because).toContain('not below half the reading rate of 2000');
    // a mean of 20 has fallen by 3.6 dB at its half output rate, so this one is behind no filter
    const row = bandwidth(12e3, {});
    expect(row.value).toBeCloseTo(19e3, 6);
    expect(row.where).toContain('still');
    expect(row.holds).toBe(true);
  });

  test('plays nothing of the probe file, and is left out when one scenario is asked for', () => {
    const { rows } = verdictOf(quietProbe({
      requirements: [{ measure: 'reading', scenario: 'steady', amperes: 1 }, { measure: 'bandwidth', atLeast_Hz: 300, peak_A: 10 }],
    }), { only: 'steady' });
    expect(rows.map(({ id }) => id)).toEqual(['reading@steady', 'hiddenClipping', 'unexplainedFlags']);
  });
});

describe('a band', () => {
  const METER = { stage: 'meter', window_ms: 100 };
  const chain = [INTAKE, SCALE, METER];
  const band = (requirement: Given, change: Given = {}) => {
    const { rows } = verdictOf(quietProbe({ chain, requirements: [{ measure: 'band', peak_A: 10, amperes: 0.1, ...requirement }], ...change }));
    return rows[0];
  };

  test('is judged at its worst frequency: behind a pole the highest, by 1 - 1 / sqrt(1 + r^2) of the true RMS', () => {
    const row = band({ from_Hz: 50, to_Hz: 400, points: 4 }, { amplifier: poleAt(0.4) });
    // the meter rounds to 1 mA at most; its window holds 40 whole periods
    expect(Math.abs(row.value! - (10 / Math.SQRT2) * (Math.SQRT1_2 - 1))).toBeLessThan(1e-3);
    expect(row.where).toBe('worst of 4: 400 Hz, 25 °C');
    expect(row).toMatchObject({ id: 'band@10 A, 50 to 400 Hz, 25 °C', holds: false });
    expect(row.because).toMatch(/off by −29\.3 % at 400 Hz, 25 °C \(−0\.77\d % at 50 Hz, 25 °C, /);
  });

  test('is judged at its worst temperature, direct current by its mean', () => {
    const sensor = { sensitivity_mV_per_mT: 50, rest_V: 2.5, bandwidth_kHz: 2000, sensitivityDrift_ppm_per_K: 1000 };
    const row = band({ from_Hz: 0, to_Hz: 100, points: 3, lowest_C: -10, highest_C: 40 }, { sensor });
    // 35 K below 25 °C: -3.5 % of 10 A; the mean of a window is known to half a code
    expect(Math.abs(row.value! + 0.35)).toBeLessThan(QUIET_CODE_AMPERES);
    expect(row.where).toBe('worst of 9: direct current, -10 °C');
  });

  test('with a zero at start-up, direct current begins behind it and is not taken for the zero', () => {
    const zero = { stage: 'zero', atStart: true, settle_ms: 5, mean_ms: 20, span_A: 2, window_A: 0.5 };
    const row = band({ from_Hz: 0, to_Hz: 0, peak_A: 0.3 }, { chain: [INTAKE, zero, SCALE, METER] });
    expect(Math.abs(row.value!)).toBeLessThan(2 * QUIET_CODE_AMPERES);
  });

  test('with a meter of whole cycles each frequency has three of its windows', () => {
    const cycles = { stage: 'meter', window_ms: 2000, cycles: 10, hysteresis_A: 1 };
    const row = band({ from_Hz: 50, to_Hz: 400, points: 4 }, { chain: [INTAKE, SCALE, cycles] });
    expect(row.holds).toBe(true);
  });

  test('a window shorter than a period is refused', () => {
    const row = band({ from_Hz: 5, to_Hz: 50, points: 2 });
    expect(row.value).toBeNull();
    expect(row.because).toContain('at 5 Hz, 25 °C: a window of meter "meter" (100.0 ms) is shorter than a period');
  });

  type Band = Extract<Requirement, { measure: 'band' }>;
  const asked = (from_Hz: number, to_Hz: number, points: number) => frequenciesOf({ from_Hz, to_Hz, points } as Band, { window_ms: 100 });

  test('frequencies lie evenly in octaves; from direct current they go down from the upper end as far as a window holds', () => {
    expect(asked(50, 50, 5)).toEqual([50]);
    expect(asked(0, 0, 5)).toEqual([0]);
    expect(asked(25, 400, 5).map((hertz) => Math.round(hertz * 1e6) / 1e6)).toEqual([25, 50, 100, 200, 400]);
    expect(asked(25, 400, 1)).toEqual([400]);
    expect(asked(0, 400, 4)).toEqual([0, 100, 200, 400]);
    expect(asked(0, 40, 9)).toEqual([0, 10, 20, 40]);
    expect(asked(0, 4, 3)).toEqual([0, 4]);
  });

  test('temperatures are the ends, and 25 °C where it lies between them', () => {
    expect(temperaturesOf(-10, 40)).toEqual([-10, 25, 40]);
    expect(temperaturesOf(25, 40)).toEqual([25, 40]);
    expect(temperaturesOf(30, 30)).toEqual([30]);
    expect(temperaturesOf(30, 40)).toEqual([30, 40]);
  });
});

test('the period of a current is that of its slowest periodic part, and none where nothing repeats', () => {
  const periodOf = (current: Given): number | null =>
    longestPeriodSeconds(probeOf(quietProbe({ scenarios: [{ name: 'steady', current, duration_ms: 100 }] })).scenarios[0].current);
  expect(periodOf({ shape: 'dc', level_A: 1 })).toBeNull();
  expect(periodOf({ shape: 'sine', peak_A: 1, frequency_Hz: 50 })).toBeCloseTo(0.02, 15);
  expect(periodOf({ shape: 'sweep', peak_A: 1, from_Hz: 500, to_Hz: 20, over_ms: 50 })).toBeCloseTo(0.05, 15);
  const parts = [{ shape: 'dc', level_A: 1 }, { shape: 'pwm', high_A: 1, frequency_Hz: 8000, duty_percent: 50 }, { shape: 'sine', peak_A: 1, frequency_Hz: 50 }];
  expect(periodOf({ shape: 'sum', parts })).toBeCloseTo(0.02, 15);
});
