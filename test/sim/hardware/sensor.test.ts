import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { EVENT_QUARTER, EVENT_REVERSED } from '../../../lib/status.ts';
import { biasPhases } from '../../../sim/hardware/bias.ts';
import { CLIP_SENSOR } from '../../../sim/hardware/clip.ts';
import type { SensorUnit } from '../../../sim/hardware/draw.ts';
import { Sensor, sensorLine } from '../../../sim/hardware/sensor.ts';
import { AT_HOME, sensorUnit } from './parts.ts';
import { density } from './spectrum.ts';

const STEP_SECONDS = 1e-6;

interface Settings {
  surroundings?: typeof AT_HOME;
  gridFactor?: number;
  trial?: number;
  stepSeconds?: number;
}

function sensorOf(sensor: SensorUnit, capacity: number, settings: Settings = {}): Sensor {
  const { surroundings = AT_HOME, gridFactor = 1, trial = 0, stepSeconds = STEP_SECONDS } = settings;
  const model = new Sensor(sensor, { stepSeconds, gridFactor, capacity, seed: 1, trial });
  model.surround(surroundings);
  return model;
}

function outputs(sensor: SensorUnit, field: Float64Array, settings: Settings = {}) {
  const volts = Float64Array.from(field);
  const marks = new Uint8Array(field.length);
  const model = sensorOf(sensor, field.length, settings);
  model.process(volts, marks, field.length);
  return { volts, marks, clips: model.clips };
}

test('a steady field of B gives rest + sensitivity * B', () => {
  const { volts } = outputs(sensorUnit(), new Float64Array(10).fill(12e-3));
  // 2.5 V + 50 mV/mT * 12 mT
  for (const v of volts) expect(v).toBeCloseTo(3.1, 12);
});

test('drift with temperature is counted from 25 °C', () => {
  const drifting = sensorUnit({ sensitivityDrift_ppm_per_K: -500, restDrift_mV_per_K: 0.4 });
  const cold = sensorLine(drifting, { ...AT_HOME, sensorCelsius: -40 });
  expect(cold.restVolts).toBeCloseTo(2.5 - 0.0004 * 65, 12);
  expect(cold.voltsPerTesla).toBeCloseTo(50 * (1 + 500e-6 * 65), 12);
  expect(sensorLine(drifting, AT_HOME)).toEqual({ restVolts: 2.5, voltsPerTesla: 50 });
});

test('a ratiometric sensor scales rest and sensitivity with the supply, another one does not', () => {
  const low = { ...AT_HOME, supplyRatio: 0.9 };
  expect(sensorLine(sensorUnit({ ratiometric: true }), low)).toEqual({ restVolts: 2.25, voltsPerTesla: 45 });
  expect(sensorLine(sensorUnit(), low)).toEqual({ restVolts: 2.5, voltsPerTesla: 50 });
});

test('the swing clips, and every clipped point is marked and counted', () => {
  const field = Float64Array.from({ length: 400 }, (_, n) => (n < 200 ? 60e-3 : n < 300 ? -60e-3 : 0));
  const { volts, marks, clips } = outputs(sensorUnit({ bandwidth_kHz: 1e5 }), field);
  expect(Math.max(...volts)).toBe(4.8);
  expect(Math.min(...volts)).toBe(0.2);
  const marked = [...marks].filter((mark) => mark === CLIP_SENSOR).length;
  // 60 mT * 50 mV/mT = 3 V beside rest is outside on both sides; the pole is far faster than a step
  expect(marked).toBe(300);
  expect(clips).toBe(300);
});

test('an output exactly at the limit of the swing is not clipped', () => {
  expect(outputs(sensorUnit({ rest_V: 4.8 }), new Float64Array(5)).clips).toBe(0);
});

test('white noise behind the pole is sensitivity * density * sqrt(pi/2 * corner)', () => {
  const count = 200_000;
  const noisy = sensorUnit({ noise_uT_per_rtHz: 0.5, bandwidth_kHz: 50 });
  const { volts } = outputs(noisy, new Float64Array(count));
  const power = volts.reduce((sum, v) => sum + (v - 2.5) ** 2, 0) / count;
  const expected = (50 * 0.5e-6) ** 2 * (Math.PI / 2) * 50e3;
  // correlated squares of a first-order process: variance of their mean 2/N (1 + rho^2)/(1 - rho^2)
  const rho2 = Math.exp(-4 * Math.PI * 50e3 * STEP_SECONDS);
  expect(Math.abs(power / expected - 1)).toBeLessThan(5 * Math.sqrt((2 / count) * (1 + rho2) / (1 - rho2)));
});

test('white noise and 1/f noise in a band: density^2 * (fh - fl + fc ln(fh/fl))', () => {
  // 1 uT/rtHz, corner 1 kHz, 20 Hz to 10 kHz; grid of 32 steps for one period of the sensor's corner of 10 kHz
  const stepSeconds = 1 / 320e3;
  const noisy = sensorUnit({ noise_uT_per_rtHz: 1, noiseCorner_Hz: 1000, bandwidth_kHz: 10 });
  const { volts } = outputs(noisy, new Float64Array(2 ** 21), { stepSeconds });
  const segment = 2 ** 17;
  const hertz = 1 / (segment * stepSeconds);
  const spectrum = density(volts, segment, stepSeconds);
  let power = 0;
  const first = 8;
  const last = Math.floor(1e4 / hertz);
  for (let k = first; k <= last; k++) power += spectrum[k] * hertz * (1 + (k * hertz / 1e4) ** 2);
  const low = (first - 0.5) * hertz;
  const high = (last + 0.5) * hertz;
  const expected = (50 * 1e-6) ** 2 * (high - low + 1000 * Math.log(high / low));
  // power of the 1/f bins varies by sqrt(sum (fc/f)^2 df) = 340 of 16 200, of the white ones less, over 16 segments:
  // 0.6 %; 5 of that is 3 % in power. The grid folds r^2/12 = 0.3 %, the density is within 2 % of 1/f in its part
  expect(Math.abs(Math.sqrt(power / expected) - 1)).toBeLessThan(0.02);
  // and by octaves, each within 5/sqrt(bins * 16 * 0.8), the share of overlapped Hann segments, and that 2 %
  for (let from = 8; from < 2048; from *= 2) {
    let sum = 0;
    let exact = 0;
    for (let k = from; k < 2 * from; k++) {
      sum += spectrum[k] * (1 + (k * hertz / 1e4) ** 2);
      exact += (50 * 1e-6) ** 2 * (1 + 1000 / (k * hertz));
    }
    expect(Math.abs(sum / exact - 1)).toBeLessThan(5 / Math.sqrt(from * 16 * 0.8) + 0.02);
  }
});

test('1/f noise with a corner near that of the sensor keeps its density up to there', () => {
  // corner 20 kHz, sensor 50 kHz, 20 steps for one period of it: what noises above the grid would add is 10 % here
  const noisy = sensorUnit({ noise_uT_per_rtHz: 1, noiseCorner_Hz: 20e3 });
  const segment = 1024;
  const spectrum = density(outputs(noisy, new Float64Array(2 ** 21)).volts, segment, STEP_SECONDS);
  let ratio = 0;
  for (let k = 16; k < 32; k++) {
    const hertz = k / segment / STEP_SECONDS;
    const exact = ((50 * 1e-6) ** 2 * (1 + 20e3 / hertz)) / (1 + (hertz / 50e3) ** 2);
    ratio += spectrum[k] / exact / 16;
  }
  // 16 bins of 4095 Hann segments; the grid folds r^2/12 = 0.8 %; the rest at f = edge/4: 0.33 % of 1/f, and its ripple
  expect(Math.abs(ratio - 1)).toBeLessThan(5 / Math.sqrt(16 * 4095 * 0.8) + 0.008 + 0.007);
});

test('noise of n sensors, averaged, is down by sqrt n', () => {
  const count = 200_000;
  const powerOf = (sensors: number) => {
    const noisy = sensorUnit({ noise_uT_per_rtHz: 0.5, count: sensors });
    return outputs(noisy, new Float64Array(count)).volts.reduce((sum, v) => sum + (v - 2.5) ** 2, 0) / count;
  };
  const expected = (50 * 0.5e-6) ** 2 * (Math.PI / 2) * 50e3;
  const rho2 = Math.exp(-4 * Math.PI * 50e3 * STEP_SECONDS);
  const allowed = 5 * Math.sqrt((2 / count) * (1 + rho2) / (1 - rho2));
  for (const sensors of [2, 4, 9]) expect(Math.abs(powerOf(sensors) * sensors / expected - 1)).toBeLessThan(allowed);
});

describe('several sensors', () => {
  test('mismatch is uniform for each sensor, and none in trial 0', () => {
    const field = new Float64Array(1).fill(10e-3);
    const unit = (count: number) => sensorUnit({ count, mismatch_percent: 10, noise_uT_per_rtHz: 0 });
    expect(outputs(unit(4), field).volts[0]).toBeCloseTo(3, 12);
    let squares = 0;
    const trials = 4000;
    for (let trial = 1; trial <= trials; trial++) {
      const relative = (outputs(unit(4), field, { trial }).volts[0] - 2.5) / 0.5 - 1;
      expect(Math.abs(relative)).toBeLessThanOrEqual(0.1);
      squares += relative * relative / trials;
    }
    // mean of four uniforms of half-width 0.1: variance 0.01/3/4, its square nearly normal
    expect(Math.abs(squares / (0.01 / 12) - 1)).toBeLessThan(5 * Math.sqrt(2 / trials));
  });

  test('one that clips alone is marked, and pulls the mean', () => {
    const unit = sensorUnit({ count: 2, mismatch_percent: 50 });
    // the weaker and the stronger one in the mean of two: somewhere the stronger one clips first
    const field = Float64Array.from({ length: 400 }, (_, n) => n * 0.3e-3);
    const { volts, marks } = outputs({ ...unit, bandwidth_kHz: 1e5 }, field, { trial: 1 });
    const first = marks.indexOf(CLIP_SENSOR);
    expect(first).toBeGreaterThan(0);
    expect(volts[first]).toBeLessThan(4.8);
    const slope = volts[first - 1] - volts[first - 2];
    const later = volts[first + 2] - volts[first + 1];
    expect(later).toBeLessThan(slope * 0.9);
    expect(later).toBeGreaterThan(0);
  });
});

describe('nonlinearity', () => {
  test.each([1.5, -2])('%s %% at 50 mT is that share there, an eighth of it at half, odd in the field', (share) => {
    const bent = sensorUnit({ nonlinearity_percent: share, linearTo_mT: 50, swingLow_V: -10, swingHigh_V: 10 });
    const at = (field: number) => outputs(bent, Float64Array.of(field)).volts[0] - 2.5;
    expect(at(50e-3)).toBeCloseTo(2.5 * (1 + share / 100), 12);
    expect(at(25e-3)).toBeCloseTo(1.25 + 2.5 * share / 100 / 8, 12);
    expect(at(-30e-3)).toBeCloseTo(-at(30e-3), 12);
  });

  test('a sine gets a third harmonic of A^3/4 times the coefficient', () => {
    // B + c B^3 with B = A sin: third harmonic -c A^3/4 (textbook identity); c A^2 = 2 %
    const bent = sensorUnit({ nonlinearity_percent: 2, linearTo_mT: 40, bandwidth_kHz: 1e5 });
    const points = 1000;
    const field = Float64Array.from({ length: points }, (_, n) => 40e-3 * Math.sin(2 * Math.PI * n / points));
    const { volts } = outputs(bent, field);
    let third = 0;
    for (let n = 0; n < points; n++) third += (2 / points) * (volts[n] - 2.5) * Math.sin(6 * Math.PI * n / points);
    // pole and straight lines: (3/1000)^2 and the lag of 1.6e-3 steps, and the start
    expect(Math.abs(third + 2 * 0.02 / 4)).toBeLessThan(1e-5);
  });

  test('a falling cubic is held where it would turn back, and marked', () => {
    const bent = sensorUnit({ nonlinearity_percent: -20, linearTo_mT: 10, swingHigh_V: 100 });
    // turns at 10 mT/sqrt(0.6) = 12.91 mT, where f is two thirds of that
    const { volts, marks } = outputs(bent, new Float64Array(3).fill(30e-3));
    expect(volts[2] - 2.5).toBeCloseTo(50 * (2 / 3) * 0.01 / Math.sqrt(0.6), 12);
    expect(marks[2]).toBe(CLIP_SENSOR);
  });
});

test('wander is a random walk of the rest output: after an hour its deviation is the figure of the file', () => {
  // 1 kHz grid, so that an hour of many units stays cheap: 36 s, a tenth of the root of an hour
  let squares = 0;
  const trials = 200;
  const unit = sensorUnit({ wander_uT_per_rth: 400, bandwidth_kHz: 10 });
  for (let trial = 1; trial <= trials; trial++) {
    const { volts } = outputs(unit, new Float64Array(36_001), { trial, stepSeconds: 1e-3 });
    squares += (volts[36_000] - 2.5) ** 2 / trials;
  }
  expect(Math.abs(squares / (50 * 400e-6 / 10) ** 2 - 1)).toBeLessThan(5 * Math.sqrt(2 / trials));
});

test('a temperature that changes moves the output through the pole, without a jump at the change', () => {
  const drifting = sensorUnit({ restDrift_mV_per_K: 10 });
  const model = sensorOf(drifting, 100);
  const volts = new Float64Array(100);
  model.process(volts.subarray(0, 50), new Uint8Array(50), 50);
  model.surround({ ...AT_HOME, sensorCelsius: 35 });
  model.process(volts.subarray(50), new Uint8Array(50), 50);
  expect(volts[49]).toBe(2.5);
  // 50 kHz: tau = 3.18 steps; a ramp of one step, then exp
  const tau = 1 / (2 * Math.PI * 0.05);
  for (let n = 50; n < 100; n++) {
    const left = -tau * Math.expm1(-1 / tau) * Math.exp(-(n - 50) / tau);
    expect(volts[n]).toBeCloseTo(2.5 + 0.1 * (1 - left), 12);
  }
});

describe('switched bias', () => {
  const field = 3e-3;
  const plate = 2;

  /** Mean of the last point of each phase, when the fast pole has settled, with the event bits of the phase. */
  function phaseVolts(bias: SensorUnit['bias'], phases: number): number[] {
    const samples = 4;
    const factor = 8;
    const unit = sensorUnit({ bias, biasPhase_samples: samples, plateOffset_mT: plate, bandwidth_kHz: 1e4 });
    const { volts } = outputs(unit, new Float64Array(samples * factor * phases).fill(field), { gridFactor: factor });
    return Array.from({ length: phases }, (_, k) => volts[samples * factor * (k + 1) - 1]);
  }

  test('steady bias adds no plate offset: it is part of the rest output', () => {
    expect(phaseVolts('steady', 2)).toEqual([2.65, 2.65]);
  });

  test('reversal: half the difference keeps the signal and the plate offset, and drops the rest output', () => {
    const [v0, v1, again] = phaseVolts('reversal', 3);
    expect((v0 - v1) / 2).toBeCloseTo(50 * (field + plate * 1e-3), 12);
    expect((v0 + v1) / 2).toBeCloseTo(2.5, 12);
    expect(again).toBeCloseTo(v0, 12);
  });

  test('quarter turn: (V0 + V90 - V180 - V270)/4 keeps only the signal', () => {
    const [v0, v90, v180, v270, again] = phaseVolts('quarter turn', 5);
    expect((v0 + v90 - v180 - v270) / 4).toBeCloseTo(50 * field, 12);
    expect((v0 - v90 - v180 + v270) / 4).toBeCloseTo(50 * plate * 1e-3, 12);
    expect((v0 + v90 + v180 + v270) / 4).toBeCloseTo(2.5, 12);
    expect(again).toBeCloseTo(v0, 12);
  });

  test('the event bits say in which phases the signal is reversed', () => {
    for (const bias of ['steady', 'reversal', 'quarter turn'] as const) {
      for (const phase of biasPhases(bias)) expect((phase.events & EVENT_REVERSED) !== 0).toBe(phase.signal === -1);
    }
    expect(new Set(biasPhases('quarter turn').map((phase) => phase.events)))
      .toEqual(new Set([0, EVENT_QUARTER, EVENT_REVERSED, EVENT_REVERSED | EVENT_QUARTER]));
  });

  test('how the input is cut changes nothing, phases and noise included', () => {
    const unit = sensorUnit({
      bias: 'quarter turn', biasPhase_samples: 3, plateOffset_mT: 1, noise_uT_per_rtHz: 1, noiseCorner_Hz: 1e4,
      wander_uT_per_rth: 1e4, nonlinearity_percent: -3, count: 2, mismatch_percent: 5,
    });
    const settings = { gridFactor: 5, trial: 1 };
    fc.assert(fc.property(fc.array(fc.integer({ min: 1, max: 30 }), { minLength: 1, maxLength: 10 }), (cuts) => {
      const length = cuts.reduce((sum, cut) => sum + cut, 0);
      const given = Float64Array.from({ length }, (_, n) => 1e-3 * Math.sin(n));
      const whole = outputs(unit, given, settings).volts;
      const parts = Float64Array.from(given);
      const model = sensorOf(unit, 30, settings);
      let start = 0;
      for (const cut of cuts) {
        model.process(parts.subarray(start, start + cut), new Uint8Array(cut), cut);
        start += cut;
      }
      expect([...parts]).toEqual([...whole]);
    }));
  });
});
