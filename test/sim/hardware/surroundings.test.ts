import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Scenario } from '../../../sim/probe/fields.ts';
import { nominalUnit, type Unit } from '../../../sim/hardware/draw.ts';
import { ChangingSurroundings, epochSamples } from '../../../sim/hardware/surroundings.ts';
import { exact, standProbe, standScenario, standThermometer } from './stand.ts';

const DC = { shape: 'dc', level_A: 0 } as const;

function unitWith(sensor_s: number, amplifier_s: number, thermometer_s: number): Unit {
  const probe = standProbe();
  probe.thermometer = standThermometer();
  probe.sensor.timeConstant_s = exact(sensor_s);
  probe.amplifier.timeConstant_s = exact(amplifier_s);
  probe.thermometer.timeConstant_s = exact(thermometer_s);
  return nominalUnit(probe);
}

function surroundingsOf(
  change: Partial<Scenario>, sensor_s = 0, amplifier_s = 0, thermometer_s = 0,
): ChangingSurroundings {
  return new ChangingSurroundings(standScenario(DC, change), unitWith(sensor_s, amplifier_s, thermometer_s), 5);
}

const points = (...list: [number, number][]) => list.map(([at_ms, temperature_C]) => ({ at_ms, temperature_C }));

test('without profile and sag everything stays at temperature_C and nominal supply', () => {
  const steady = surroundingsOf({ temperature_C: -7 }, 3, 4, 5);
  expect(steady.changes).toBe(false);
  for (const seconds of [0, 1, 1e6]) {
    expect(steady.at(seconds)).toEqual({
      sensorCelsius: -7, amplifierCelsius: -7, converterCelsius: -7, thermometerCelsius: -7, supplyRatio: 1,
    });
  }
});

describe('temperatures', () => {
  test('without time constant a part has the ambient: straight lines, held beyond the ends', () => {
    const profile = surroundingsOf({ ambient: points([1000, 10], [3000, 30], [4000, 20]) });
    expect(profile.changes).toBe(true);
    [[0, 10], [1, 10], [2, 20], [3, 30], [3.5, 25], [4, 20], [100, 20]].forEach(([seconds, celsius]) => {
      expect(profile.at(seconds).sensorCelsius).toBeCloseTo(celsius, 12);
    });
  });

  test('a jump is approached by 1 - 1/e in one time constant, each part with its own', () => {
    const jump = surroundingsOf({ ambient: points([0, 0], [0.001, 100]) }, 2, 5, 10);
    const { sensorCelsius, amplifierCelsius, converterCelsius, thermometerCelsius } = jump.at(2);
    // the jump takes 1 us: 1e-6/2 of a time constant, times 100 K
    expect(Math.abs(sensorCelsius - 100 * (1 - Math.exp(-1)))).toBeLessThan(1e-4);
    expect(Math.abs(amplifierCelsius - 100 * (1 - Math.exp(-0.4)))).toBeLessThan(1e-4);
    expect(Math.abs(thermometerCelsius - 100 * (1 - Math.exp(-0.2)))).toBeLessThan(1e-4);
    expect(converterCelsius).toBe(amplifierCelsius);
  });

  test('behind a long ramp a part lags by slope times time constant', () => {
    const ramp = surroundingsOf({ ambient: points([0, 0], [1e5, 50]) }, 2);
    // 0.5 K/s; 80 s are 40 time constants, e^-40 is below rounding
    expect(ramp.at(80).sensorCelsius).toBeCloseTo(0.5 * (80 - 2), 10);
  });

  test('obeys tau dy/dt = a - y along any profile, starting in equilibrium', () => {
    const step = fc.tuple(fc.integer({ min: 1, max: 4000 }), fc.integer({ min: -40, max: 85 }));
    const profile = fc.array(step, { minLength: 1, maxLength: 6 });
    fc.assert(fc.property(profile, fc.double({ min: 0.2, max: 30, noNaN: true }), (steps, tau) => {
      let at = 0;
      const ambient = points(...steps.map(([wait, celsius]): [number, number] => {
        at += wait;
        return [at - steps[0][0], celsius];
      }));
      const lag = surroundingsOf({ ambient }, tau);
      const air = surroundingsOf({ ambient });
      expect(lag.at(0).sensorCelsius).toBe(air.at(0).sensorCelsius);
      // midpoint rule with steps of 0.5 ms, which meet every corner of the profile
      const h = 5e-4;
      let own = ambient[0].temperature_C;
      const count = 2 * (at + 1000);
      for (let n = 0; n < count; n++) {
        own = (own * (1 - h / 2 / tau) + (h / tau) * air.at((n + 0.5) * h).sensorCelsius) / (1 + h / 2 / tau);
      }
      const end = count * h;
      // local error h^3/12 of a third derivative below 125 K/(1 ms)/tau^2, over the 1/h steps of a time constant
      const bound = (h * h / 12) * (125e3 / tau) + 1e-6;
      expect(Math.abs(lag.at(end).sensorCelsius - own)).toBeLessThan(bound);
    }), { numRuns: 25 });
  });

  test('do not depend on when they are asked before, and have no jump', () => {
    const ambient = points([500, 5], [1500, 25], [1501, 60]);
    const asked = surroundingsOf({ ambient }, 3, 1, 0.2);
    fc.assert(fc.property(fc.double({ min: 0, max: 5, noNaN: true }), (seconds) => {
      expect(asked.at(seconds)).toEqual(surroundingsOf({ ambient }, 3, 1, 0.2).at(seconds));
      const { thermometerCelsius: before } = asked.at(Math.max(0, seconds - 1e-6));
      // the fastest change: 35 K/ms for 1 us
      expect(Math.abs(asked.at(seconds).thermometerCelsius - before)).toBeLessThanOrEqual(0.036);
    }), { examples: [[0.5], [1.5], [1.501]] });
  });

  test('keep their digits with a time constant far longer than the time', () => {
    // y = s t^2/(2 tau) (1 - t/(3 tau) + ...): 1 K/s for 1 s at 1e5 s; the second term is 3e-6 of it
    const slow = surroundingsOf({ ambient: points([0, 0], [10_000, 10]) }, 1e5);
    expect(Math.abs(slow.at(1).sensorCelsius / 5e-6 - 1)).toBeLessThan(1e-5);
  });
});

describe('supply', () => {
  test('falls on a straight line from where it starts, and never below zero', () => {
    const sagging = surroundingsOf({ supply_V: 4.8, supplySag_mV_per_s: 100 });
    expect(sagging.changes).toBe(true);
    expect(sagging.at(0).supplyRatio).toBeCloseTo(0.96, 14);
    expect(sagging.at(2).supplyRatio).toBeCloseTo(0.92, 14);
    expect(sagging.at(100).supplyRatio).toBe(0);
  });
});

test('an epoch is a whole number of samples of at most 1 ms, or one sample', () => {
  expect([40e3, 1e3, 999, 1, 1500, 29e3].map(epochSamples)).toEqual([40, 1, 1, 1, 1, 29]);
});
