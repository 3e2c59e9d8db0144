import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { ShuntUnit } from '../../../sim/hardware/draw.ts';
import { Shunt, steadyHeating, type ShuntOptions } from '../../../sim/hardware/shunt.ts';
import { cutAt } from './frontcuts.ts';

const OPTIONS: ShuntOptions = { stepSeconds: 1e-3, capacity: 1 << 16, bits: 24, seed: 1, trial: 1 };

/** 2.5 mΩ, gain 20, ±2.5 V around 2.5 V: ±50 A; a pole far above the grid (its lag is 1.6 ns). */
function shuntOf(change: Partial<ShuntUnit> = {}): ShuntUnit {
  return {
    resistance_mOhm: 2.5, tempco_ppm_per_K: 0, thermalResistance_K_per_W: 0, timeConstant_s: 0, gain: 20, rest_V: 2.5,
    offset_mV: 0, offsetDrift_uV_per_K: 0, noise_nV_per_rtHz: 0, bandwidth_kHz: 1e5, railLow_V: 0, railHigh_V: 5,
    ...change,
  };
}

function played(unit: ShuntUnit, amperes: ArrayLike<number>, options: Partial<ShuntOptions> = {}) {
  const shunt = new Shunt(unit, unit, { ...OPTIONS, ...options });
  const volts = Float64Array.from(amperes);
  const marks = new Uint8Array(volts.length);
  shunt.process(volts, marks, volts.length);
  return { shunt, volts, marks };
}

const steady = (amperes: number, count: number): Float64Array => new Float64Array(count).fill(amperes);
/** A few roundings of sums of this size. */
const ROUNDING = 1e-13;

describe("Ohm's law", () => {
  test('30 A in 2.5 mΩ are 75 mV and 2.25 W, and 1.5 V behind a gain of 20', () => {
    const { shunt, volts } = played(shuntOf(), steady(-30, 3));
    expect(volts[2]).toBeCloseTo(2.5 - 1.5, 12);
    expect(shunt.mostVolts).toBeCloseTo(0.075, 12);
    expect(shunt.mostWatts).toBeCloseTo(2.25, 12);
  });

  test('a resistor of other temperature and other tolerance reads by that ratio', () => {
    const shunt = new Shunt(shuntOf({ resistance_mOhm: 2.6, tempco_ppm_per_K: 100 }), shuntOf(), OPTIONS);
    shunt.surround(75, 25);
    const volts = steady(10, 1);
    shunt.process(volts, new Uint8Array(1), 1);
    // half a code of 24 bits over 5 V: 1.5e-7 V, 3 µA behind 50 mV/A
    expect(Math.abs(shunt.readingAmperes(volts[0]) - 10 * 1.04 * 1.005)).toBeLessThan(3.1e-6);
  });

  test('offset and its drift at the input read as their volts over the resistance', () => {
    const shunt = new Shunt(shuntOf({ offset_mV: 0.5, offsetDrift_uV_per_K: -4 }), shuntOf(), OPTIONS);
    shunt.surround(25, 75);
    const volts = steady(0, 1);
    shunt.process(volts, new Uint8Array(1), 1);
    expect(Math.abs(shunt.readingAmperes(volts[0]) - (0.5e-3 - 200e-6) / 2.5e-3)).toBeLessThan(3.1e-6);
  });
});

describe('self-heating: one thermal resistance and one heat capacity', () => {
  const heated = { thermalResistance_K_per_W: 20, timeConstant_s: 8 };
  const WATTS = 30 * 30 * 2.5e-3;

  test.each([1, 10, 800, 8000, 60_000])('after %s ms of a steady current it is P Rth (1 - exp(-t/tau))', (steps) => {
    const { shunt } = played(shuntOf(heated), steady(30, steps + 1));
    const kelvin = WATTS * 20 * -Math.expm1(-steps / 8000);
    // one rounding a step, and that of 1 - keep: 2^-53 against h/tau = 1.25e-4
    expect(Math.abs(shunt.mostHeating / kelvin - 1)).toBeLessThan(ROUNDING + 2e-12);
  });

  test('its own warming raises the steady state to P Rth / (1 - tempco P Rth), without a time constant as well', () => {
    for (const timeConstant_s of [0, 0.5]) {
      const unit = shuntOf({ ...heated, timeConstant_s, tempco_ppm_per_K: 4000 });
      const { shunt, volts } = played(unit, steady(30, 60_000));
      const kelvin = (WATTS * 20) / (1 - 4e-3 * WATTS * 20);
      expect(shunt.mostHeating).toBeCloseTo(kelvin, 9);
      expect(steadyHeating(unit, 30)).toBeCloseTo(kelvin, 9);
      expect(shunt.mostGainShift).toBeCloseTo(4e-3 * kelvin, 9);
      expect(volts.at(-1)).toBeCloseTo(2.5 + 20 * 30 * 2.5e-3 * (1 + 4e-3 * kelvin), 9);
    }
  });

  test('a sine heats as its RMS: half of the peak squared', () => {
    const perPeriod = 1000;
    const periodSeconds = 10 / 3;
    const sine = Float64Array.from({ length: 60 * perPeriod + 1 },
      (_, n) => 30 * Math.sin((2 * Math.PI * n) / perPeriod));
    const { shunt } = played(shuntOf(heated), sine, { stepSeconds: periodSeconds / perPeriod });
    const kelvin = (WATTS / 2) * 20;
    // 25 tau; straight lines lose (2 pi/1000)^2/6; twice the frequency ripples by 1/(2 w tau) of the mean at most
    expect(shunt.mostHeating).toBeGreaterThan(kelvin * (1 - 1e-4));
    expect(shunt.mostHeating).toBeLessThan(kelvin * (1 + periodSeconds / (4 * Math.PI * 8) + 1e-4));
  });

  test('more heat than the ambient can take runs away, in finite numbers', () => {
    const unit = shuntOf({ ...heated, tempco_ppm_per_K: 4000, thermalResistance_K_per_W: 2000, timeConstant_s: 0.01 });
    expect(steadyHeating(unit, 30)).toBe(Infinity);
    const { shunt, volts } = played(unit, steady(30, 10_000));
    expect(shunt.mostHeating).toBeGreaterThan(1000);
    expect(volts.every(Number.isFinite)).toBe(true);
  });
});

describe('amplifier and converter', () => {
  test('what the rails cut off is marked, and reads as the rail', () => {
    const { shunt, volts, marks } = played(shuntOf(), [60, 40, -40, -60]);
    expect([...marks].map((mark) => mark !== 0)).toEqual([true, false, false, true]);
    expect(volts[0]).toBe(5);
    // the highest code is one code short of 50 A
    expect(shunt.readingAmperes(volts[0])).toBeCloseTo(50 - 100 / 2 ** 24, 9);
    expect(shunt.readingAmperes(volts[3])).toBe(-50);
  });

  test('the ideal converter is off by half a code at most, at any resolution', () => {
    const ends = fc.constantFrom(-50, -49.999, 0, 1e-9);
    const anyAmperes = fc.oneof(ends, fc.double({ min: -50, max: 50, noNaN: true }));
    fc.assert(fc.property(fc.integer({ min: 6, max: 24 }), anyAmperes, (bits, amperes) => {
      const { shunt, volts } = played(shuntOf(), [amperes], { bits });
      const code = 100 / 2 ** bits;
      const limit = amperes > 50 - code / 2 ? code : code / 2;
      expect(Math.abs(shunt.readingAmperes(volts[0]) - amperes)).toBeLessThanOrEqual(limit + 50 * ROUNDING);
    }));
  });

  test('white noise behind one pole has the standard deviation gain * density * sqrt(pi/2 * corner)', () => {
    const count = 40_000;
    // 1 ms at 10 kHz: 63 time constants from draw to draw, so the draws are independent
    const unit = shuntOf({ noise_nV_per_rtHz: 100, bandwidth_kHz: 10 });
    const { volts } = played(unit, steady(0, count));
    const deviation = Math.sqrt(volts.reduce((sum, value) => sum + (value - 2.5) ** 2, 0) / count);
    const expected = 20 * 100e-9 * Math.sqrt((Math.PI / 2) * 1e4);
    // five standard deviations of a standard deviation
    expect(Math.abs(deviation / expected - 1)).toBeLessThan(5 / Math.sqrt(2 * count));
  });

  test('its pole lags a ramp by 1/(2 pi corner)', () => {
    const ramp = Float64Array.from({ length: 100 }, (_, n) => n * 0.1);
    const { volts } = played(shuntOf({ bandwidth_kHz: 0.05 }), ramp);
    const lagSteps = 1 / (2 * Math.PI * 50) / 1e-3;
    // the start has decayed by exp(-99/3.2) = 3e-14
    expect(volts[99]).toBeCloseTo(2.5 + 0.05 * 0.1 * (99 - lagSteps), 11);
  });
});

test('how blocks are cut changes no value', () => {
  const unit = shuntOf({
    tempco_ppm_per_K: 3000, thermalResistance_K_per_W: 50, timeConstant_s: 0.1, noise_nV_per_rtHz: 50, bandwidth_kHz: 1,
  });
  const amperes = Float64Array.from({ length: 300 }, (_, n) => 60 * Math.sin(n / 7));
  const whole = played(unit, amperes);
  fc.assert(fc.property(fc.array(fc.integer({ min: 1, max: 60 }), { maxLength: 20 }), (cuts) => {
    const pieces = cutAt(new Shunt(unit, unit, OPTIONS), amperes, cuts);
    expect(pieces.volts).toEqual(whole.volts);
    expect(pieces.marks).toEqual(whole.marks);
  }));
});
