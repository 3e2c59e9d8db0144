import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { EVENT_QUARTER, EVENT_REVERSED } from '../../../lib/status.ts';
import { biasPhases } from '../../../sim/hardware/bias.ts';
import { CLIP_SENSOR } from '../../../sim/hardware/clip.ts';
import { nominalUnit, type SensorUnit } from '../../../sim/hardware/draw.ts';
import { RandomStream } from '../../../sim/hardware/random.ts';
import { Sensor, sensorLine } from '../../../sim/hardware/sensor.ts';
import { standProbe } from './stand.ts';

const STEP_SECONDS = 1e-6;
const AT_HOME = { celsius: 25, supplyRatio: 1 };

function sensorUnit(change: Partial<SensorUnit> = {}): SensorUnit {
  return { ...nominalUnit(standProbe()).sensor, ...change };
}

function outputs(sensor: SensorUnit, field: Float64Array, surroundings = AT_HOME, gridFactor = 1) {
  const volts = Float64Array.from(field);
  const marks = new Uint8Array(field.length);
  const model = new Sensor(sensor, surroundings, STEP_SECONDS, gridFactor, new RandomStream(1, 0, 's'), field.length);
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
  const cold = sensorLine(drifting, { celsius: -40, supplyRatio: 1 });
  expect(cold.restVolts).toBeCloseTo(2.5 - 0.0004 * 65, 12);
  expect(cold.voltsPerTesla).toBeCloseTo(50 * (1 + 500e-6 * 65), 12);
  expect(sensorLine(drifting, AT_HOME)).toEqual({ restVolts: 2.5, voltsPerTesla: 50 });
});

test('a ratiometric sensor scales rest and sensitivity with the supply, another one does not', () => {
  const low = { celsius: 25, supplyRatio: 0.9 };
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

describe('switched bias', () => {
  const field = 3e-3;
  const plate = 2;

  /** Mean of the last point of each phase, when the fast pole has settled, with the event bits of the phase. */
  function phaseVolts(bias: SensorUnit['bias'], phases: number): number[] {
    const samples = 4;
    const factor = 8;
    const unit = sensorUnit({ bias, biasPhase_samples: samples, plateOffset_mT: plate, bandwidth_kHz: 1e4 });
    const { volts } = outputs(unit, new Float64Array(samples * factor * phases).fill(field), AT_HOME, factor);
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
    const unit = sensorUnit({ bias: 'quarter turn', biasPhase_samples: 3, plateOffset_mT: 1, noise_uT_per_rtHz: 1 });
    fc.assert(fc.property(fc.array(fc.integer({ min: 1, max: 30 }), { minLength: 1, maxLength: 10 }), (cuts) => {
      const length = cuts.reduce((sum, cut) => sum + cut, 0);
      const given = Float64Array.from({ length }, (_, n) => 1e-3 * Math.sin(n));
      const whole = outputs(unit, given, AT_HOME, 5).volts;
      const parts = Float64Array.from(given);
      const model = new Sensor(unit, AT_HOME, STEP_SECONDS, 5, new RandomStream(1, 0, 's'), 30);
      let start = 0;
      for (const cut of cuts) {
        model.process(parts.subarray(start, start + cut), new Uint8Array(cut), cut);
        start += cut;
      }
      expect([...parts]).toEqual([...whole]);
    }));
  });
});
