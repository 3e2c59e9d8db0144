import { describe, expect, test } from 'vitest';
import { nominalUnit, type Unit } from '../../../sim/hardware/draw.ts';
import {
  exactNoisePower, gridFactorOf, gridNoisePower, gridNoisePowerRatio, type NoiseCorners,
} from '../../../sim/hardware/grid.ts';
import { poleWeights } from '../../../sim/hardware/pole.ts';
import { exact, standProbe } from './stand.ts';

/** An amplifier of gain 1, so that its corner is the gain-bandwidth product. */
function unitOf({ sensorHz, amplifierHz, filterHz, filterOrder }: NoiseCorners): Unit {
  const unit = nominalUnit(standProbe());
  return {
    ...unit, sensor: { ...unit.sensor, bandwidth_kHz: sensorHz / 1e3 },
    amplifier: {
      ...unit.amplifier, gain: 1, bandwidth_kHz: filterHz / 1e3, filterOrder,
      gainBandwidth_MHz: amplifierHz === Infinity ? null : amplifierHz / 1e6,
    },
  };
}

function twoPoles(sensorHz: number, filterHz: number): NoiseCorners {
  return { sensorHz, amplifierHz: Infinity, filterHz, filterOrder: 1 };
}

test('the default is 16 steps for one period of the higher corner', () => {
  // 16 * 50 kHz / 50 kHz
  expect(gridFactorOf(standProbe())).toEqual({ factor: 16, warning: null });
  const fast = standProbe();
  fast.amplifier.bandwidth_kHz = exact(51);
  expect(gridFactorOf(fast).factor).toBe(17);
  const slow = standProbe();
  slow.sensor.bandwidth_kHz = exact(1);
  slow.amplifier.bandwidth_kHz = exact(1);
  expect(gridFactorOf(slow).factor).toBe(1);
  const round = standProbe();
  round.converter.rate_kHz = 0.3;
  round.sensor.bandwidth_kHz = exact(0.1 * 3);
  round.amplifier.bandwidth_kHz = exact(0.1);
  expect(gridFactorOf(round).factor).toBe(16);
});

test('a given factor is kept; a coarser one brings a warning with the error in noise power', () => {
  const probe = standProbe();
  probe.gridFactor = 40;
  expect(gridFactorOf(probe)).toEqual({ factor: 40, warning: null });
  probe.gridFactor = 2;
  const { factor, warning } = gridFactorOf(probe);
  expect(factor).toBe(2);
  const percent = 100 * (gridNoisePowerRatio(nominalUnit(probe), 1 / 100e3) - 1);
  expect(Math.abs(percent)).toBeGreaterThan(5);
  expect(warning).toContain(`${Math.abs(percent).toPrecision(2)} %`);
  expect(warning).toContain('16 are usual');
});

test('corners far above the A/D rate do not ask for an endless grid, and say so', () => {
  const probe = standProbe();
  probe.converter.rate_kHz = 0.001;
  const { factor, warning } = gridFactorOf(probe);
  expect(factor).toBe(4096);
  expect(warning).toContain('800000 are usual');
});

test('a fast amplifier, an eddy pole or a steep filter ask for no finer grid', () => {
  const probe = standProbe();
  probe.amplifier.gainBandwidth_MHz = exact(100);
  probe.amplifier.filterOrder = 4;
  probe.core.eddy_kHz = exact(1000);
  expect(gridFactorOf(probe)).toEqual({ factor: 16, warning: null });
});

describe('noise power', () => {
  test('exact: of two poles f2/(f1 + f2), of three equal ones 3/8, behind a steep filter pi/2n/sin(pi/2n)', () => {
    for (const [sensorHz, filterHz] of [[1, 1], [1000, 1], [1, 1000], [50e3, 20e3]]) {
      // trapezia: far below 1e-12; the ends are cut at e^-40
      expect(exactNoisePower(twoPoles(sensorHz, filterHz)) / (filterHz / (sensorHz + filterHz))).toBeCloseTo(1, 11);
    }
    // integral of (1 + x^2)^-3 is 3 pi/16, over pi/2
    expect(exactNoisePower({ sensorHz: 7, amplifierHz: 7, filterHz: 7, filterOrder: 1 })).toBeCloseTo(3 / 8, 11);
    for (const order of [2, 3, 4]) {
      // integral of 1/(1 + x^2n) is (pi/2n)/sin(pi/2n); a sensor 1e6 times as wide changes that by 1e-6 at most
      const share = exactNoisePower({ sensorHz: 1e6, amplifierHz: Infinity, filterHz: 1, filterOrder: order });
      const expected = (Math.PI / 2 / order / Math.sin(Math.PI / 2 / order)) / ((Math.PI / 2) * 1e6);
      expect(Math.abs(share / expected - 1)).toBeLessThan(2e-6);
    }
  });

  test('on the grid, two poles: closed form from the recursion of variances', () => {
    for (const [sensorHz, filterHz, steps] of [[1, 1, 16], [5, 1, 80], [1, 5, 16], [1, 1, 1], [8, 1, 2]]) {
      const rho = poleWeights(sensorHz, 1 / steps).keep;
      const { keep, k1, k0 } = poleWeights(filterHz, 1 / steps);
      // y = keep y' + k1 x + k0 x': correlation of y with x, then the variance of y
      const cross = (k1 + k0 * rho) / (1 - keep * rho);
      const own = k1 * k1 + k0 * k0 + 2 * k1 * k0 * rho;
      const variance = (2 * keep * cross * (k1 * rho + k0) + own) / ((1 - keep) * (1 + keep));
      expect(gridNoisePower(unitOf(twoPoles(sensorHz, filterHz)), 1 / steps) / variance).toBeCloseTo(1, 11);
    }
  });

  test('comes to the exact one with the square of the step', () => {
    for (const steps of [256, 512, 1024]) {
      const unit = unitOf(twoPoles(1, 3));
      const coarse = gridNoisePowerRatio(unit, 1 / steps) - 1;
      const fine = gridNoisePowerRatio(unit, 1 / (2 * steps)) - 1;
      // (2h)^2/h^2 = 4, less what the next even order adds: (2 pi 3/256)^2 = 0.5 % of it
      expect(coarse / fine).toBeGreaterThan(3.95);
      expect(coarse / fine).toBeLessThan(4.05);
    }
  });

  test('with 16 steps for one period of the higher of two corners it is right within 1.3 %', () => {
    // worst against a far lower pole, which sees the density at f = 0 only: on the grid that is
    // h * sum rho^|n| = h coth(r/2) instead of 2 tau, a factor (r/2) coth(r/2) < 1 + r^2/12, r = 2 pi/16
    for (let decade = -3; decade <= 3; decade += 0.1) {
      const other = 10 ** decade;
      const ratio = gridNoisePowerRatio(unitOf(twoPoles(1, other)), 1 / (16 * Math.max(1, other)));
      expect(Math.abs(ratio - 1)).toBeLessThan((2 * Math.PI / 16) ** 2 / 12);
    }
  });

  test('a coarser grid folds more noise into what a lower filter lets through', () => {
    const unit = unitOf(twoPoles(1, 0.5));
    expect(gridNoisePowerRatio(unit, 1)).toBeGreaterThan(gridNoisePowerRatio(unit, 1 / 4));
    expect(gridNoisePowerRatio(unit, 1 / 4)).toBeGreaterThan(gridNoisePowerRatio(unit, 1 / 16));
    expect(gridNoisePowerRatio(unit, 1 / 16)).toBeGreaterThan(1);
  });

  test('a gain-bandwidth corner above the sensor leaves the error of 16 steps where it was', () => {
    const bound = (2 * Math.PI / 16) ** 2 / 12;
    for (const filterOrder of [1, 2, 3, 4]) {
      for (const filterHz of [0.01, 0.3, 1]) {
        for (let decade = 0; decade <= 5; decade += 0.25) {
          const unit = unitOf({ sensorHz: 1, amplifierHz: 10 ** decade, filterHz, filterOrder });
          expect(Math.abs(gridNoisePowerRatio(unit, 1 / 16) - 1)).toBeLessThan(bound);
        }
      }
    }
  });
});
