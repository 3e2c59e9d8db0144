import fc from 'fast-check';
import { expect, test } from 'vitest';
import { drawUnit, nominalUnit } from '../../../sim/hardware/draw.ts';
import { standCoupling, standProbe } from './stand.ts';

function tolerantProbe() {
  const probe = standProbe();
  probe.core.gap_mm = { nominal: 2, tolerance: 0.1 };
  probe.amplifier.gain = { nominal: -1.5, tolerance: 0.03 };
  probe.sensor.rest_V = { nominal: 2.5, tolerance: 0.02 };
  return probe;
}

test('trial 0 has nominal parts', () => {
  const unit = drawUnit(tolerantProbe(), 3, 0);
  expect(unit).toEqual(nominalUnit(tolerantProbe()));
  expect(unit.core.gap_mm).toBe(2);
  expect(unit.supply_V).toBe(5);
  expect(unit.sensor.bias).toBe('steady');
  expect(unit.thermometer).toBe(null);
});

test('a drawn part stays within its tolerance, a part without tolerance is nominal', () => {
  fc.assert(fc.property(fc.integer(), fc.integer({ min: 1, max: 1e9 }), (seed, trial) => {
    const unit = drawUnit(tolerantProbe(), seed, trial);
    expect(Math.abs(unit.core.gap_mm - 2)).toBeLessThanOrEqual(0.1);
    expect(Math.abs(unit.amplifier.gain + 1.5)).toBeLessThanOrEqual(0.03);
    expect(unit.core.path_mm).toBe(80);
    expect(drawUnit(tolerantProbe(), seed, trial)).toEqual(unit);
  }));
});

test('parts are uniform: mean 0 and variance 1/3 of the tolerance squared', () => {
  const n = 4000;
  const parts = Array.from({ length: n }, (_, i) => (drawUnit(tolerantProbe(), 11, i + 1).core.gap_mm - 2) / 0.1);
  // uniform on +-1: variance 1/3, fourth moment 1/5, so the squares have variance 1/5 - 1/9; five standard errors
  const mean = parts.reduce((sum, x) => sum + x, 0) / n;
  const square = parts.reduce((sum, x) => sum + x * x, 0) / n;
  expect(Math.abs(mean)).toBeLessThan(5 * Math.sqrt(1 / 3 / n));
  expect(Math.abs(square - 1 / 3)).toBeLessThan(5 * Math.sqrt((1 / 5 - 1 / 9) / n));
});

test('a tolerance on one part leaves every other part as it was', () => {
  const before = drawUnit(tolerantProbe(), 3, 8);
  const probe = tolerantProbe();
  probe.core.permeability = { nominal: 2200, tolerance: 500 };
  probe.supply_V = { nominal: 5, tolerance: 0.25 };
  const after = drawUnit(probe, 3, 8);
  expect(after.core.permeability).not.toBe(2200);
  expect(after.supply_V).not.toBe(5);
  expect({ ...after, supply_V: 5, core: { ...after.core, permeability: 2200 } }).toEqual(before);
});

test('the leads are drawn like other parts; the gap at the joint is left to the closings of the jaw', () => {
  const probe = standProbe();
  probe.coupling = { ...standCoupling(), loop_mm2: { nominal: 5, tolerance: 2 } };
  probe.core.jointGap_um = { nominal: 40, tolerance: 20 };
  const units = Array.from({ length: 50 }, (_, i) => drawUnit(probe, 1, i + 1));
  const areas = units.map((unit) => unit.coupling!.loop_mm2);
  expect(new Set(areas).size).toBe(50);
  for (const area of areas) expect(Math.abs(area - 5)).toBeLessThanOrEqual(2);
  for (const unit of units) expect(unit.core.jointGap_um).toBe(40);
});

test('parts deviate independently of each other', () => {
  const n = 4000;
  let product = 0;
  for (let trial = 1; trial <= n; trial++) {
    const unit = drawUnit(tolerantProbe(), 11, trial);
    product += ((unit.core.gap_mm - 2) / 0.1) * ((unit.sensor.rest_V - 2.5) / 0.02);
  }
  // a product of two uniform parts has mean 0 and variance 1/9; five standard errors
  expect(Math.abs(product / n)).toBeLessThan(5 / 3 / Math.sqrt(n));
});
