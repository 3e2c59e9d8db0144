import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { ThermometerUnit } from '../../../sim/hardware/draw.ts';
import {
  celsiusOfCode, elementOhms, thermometerCode, thermometerCodeUnrounded,
} from '../../../sim/hardware/thermometer.ts';

function unitOf(change: Partial<ThermometerUnit> = {}): ThermometerUnit {
  return {
    element: 'thermistor', resistance_ohm: 10000, beta_K: 3435, series_ohm: 10000, slope_mV_per_K: 10, at25_V: 0.75,
    reference_V: 3.3, bits: 12, timeConstant_s: 0, every_ms: 100, ...change,
  };
}

const PLATINUM = unitOf({ element: 'platinum', resistance_ohm: 100, series_ohm: 1000, bits: 16 });

test.each([
  // beta equation computed in Python, R25 = 10 kohm; printed to 1e-4 ohm
  [3380, [235830.7559, 28223.7251, 10000, 4160.1389, 1496.8997, 1024.3201, 579.9997]],
  [3435, [248276.5246, 28704.2904, 10000, 4101.1899, 1451.3471, 987.0368, 553.7402]],
  [3950, [401859.7246, 33620.6037, 10000, 3588.1826, 1086.6708, 697.5198, 358.8339]],
])('thermistor of beta %s K at -40, 0, 25, 50, 85, 100, 125 °C', (beta_K, expected) => {
  [-40, 0, 25, 50, 85, 100, 125].forEach((celsius, i) => {
    expect(Math.abs(elementOhms(unitOf({ beta_K }), celsius) / expected[i] - 1)).toBeLessThan(1e-6);
  });
});

test.each([
  // IEC 60751:2008, table of the 100 ohm element, printed to 0.01 ohm
  [-200, 18.52], [-100, 60.26], [-50, 80.31], [-40, 84.27], [-20, 92.16], [0, 100], [1, 100.39], [10, 103.9],
  [50, 119.4], [100, 138.51], [150, 157.33], [200, 175.86], [400, 247.09], [600, 313.71], [850, 390.48],
])('platinum of 100 ohm at %s °C: %s ohm', (celsius, ohms) => {
  expect(Math.abs(elementOhms(PLATINUM, celsius) - ohms)).toBeLessThanOrEqual(0.005);
});

test('platinum by the published coefficients to 1e-9 ohm', () => {
  // computed in Python from the coefficients of IEC 60751
  for (const [celsius, ohms] of [[-200, 18.52008], [-50, 80.30628188], [25, 109.73465625], [85, 132.80330625],
    [125, 147.95140625]]) {
    expect(Math.abs(elementOhms(PLATINUM, celsius) - ohms)).toBeLessThan(6e-9); // printed to 1e-8
  }
});

test('platinum inverse at 0 °C and above', () => {
  // computed in Python by the quadratic formula
  for (const [ohms, celsius] of [[138.51, 100.01186461], [175.86, 200.01087756], [109.73, 24.9879976]]) {
    const code = (2 ** 16 * ohms) / (ohms + 1000);
    expect(Math.abs(celsiusOfCode(PLATINUM, code) - celsius)).toBeLessThan(1e-8);
  }
});

describe('divider and converter', () => {
  test('a thermistor equal to its series resistor gives half scale', () => {
    expect(thermometerCodeUnrounded(unitOf(), 25)).toBe(2048);
    expect(thermometerCode(unitOf(), 25)).toBe(2048);
  });

  test('a linear element gives its voltage over the reference', () => {
    // (0.75 V + 10 mV/K * 60 K)/3.3 V * 4096 = 1675.6
    expect(thermometerCode(unitOf({ element: 'linear' }), 85)).toBe(1676);
  });

  test('the code is held within its range', () => {
    expect(thermometerCode(unitOf({ element: 'linear' }), 1000)).toBe(4095);
    expect(thermometerCode(unitOf({ element: 'linear' }), -300)).toBe(0);
    expect(thermometerCode(unitOf({ beta_K: 10000 }), -100)).toBe(4095);
  });

  test('temperature to code and back is the same temperature, for each element', () => {
    const elements = fc.constantFrom<ThermometerUnit['element']>('thermistor', 'platinum', 'linear');
    fc.assert(fc.property(elements, fc.double({ min: -100, max: 200, noNaN: true }),
      fc.double({ min: 1000, max: 10000, noNaN: true }), fc.double({ min: 100, max: 1e6, noNaN: true }),
      (element, celsius, beta_K, series_ohm) => {
        const unit = unitOf({ element, beta_K, series_ohm });
        const code = thermometerCodeUnrounded(unit, celsius);
        // the code carries 2^-53 of itself; what that is in kelvin grows as code/slope and, close to full scale, as
        // full/(full - code) in the resistance
        const slope = (thermometerCodeUnrounded(unit, celsius + 0.01) - code) / 0.01;
        const allowed = 1e-10 + 8 * 4096 * 2 ** -52 / Math.abs(slope);
        expect(Math.abs(celsiusOfCode(unit, code) - celsius)).toBeLessThan(allowed);
      }), { examples: [['platinum', 0, 3435, 1000], ['platinum', -1e-9, 3435, 1000], ['platinum', -100, 3435, 1000]] });
  });

  test('codes that no temperature gives are infinite, not wrong', () => {
    expect(celsiusOfCode(unitOf(), 0)).toBe(Infinity);
    expect(celsiusOfCode(unitOf(), 4096)).toBe(-Infinity);
    expect(celsiusOfCode(PLATINUM, 65535)).toBe(Infinity);
    expect(() => celsiusOfCode(unitOf({ element: 'linear', slope_mV_per_K: 0 }), 5)).toThrow(/slope_mV_per_K/);
  });
});
