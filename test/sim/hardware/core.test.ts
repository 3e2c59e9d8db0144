import fc from 'fast-check';
import { expect, test } from 'vitest';
import { teslaPerAmpere } from '../../../sim/hardware/core.ts';

function fieldTesla(turns: number, amperes: number, gap_mm: number, path_mm: number, permeability: number): number {
  return amperes * teslaPerAmpere({ turns, gap_mm, path_mm, permeability });
}

test.each([
  // computed in Python from B = mu0 N I/(lg + lc/mur) with mu0 = 4 pi e-7, which is within 2e-10 of CODATA 2022
  [100, 2, 80, 2200, 61.709855695514], [10, 1, 60, 2000, 12.200359819766], [30, 3, 100, 2300, 12.386851034154],
])('%s A, gap %s mm, path %s mm, permeability %s -> %s mT', (amperes, gap, path, permeability, milliTesla) => {
  expect(Math.abs(1e3 * fieldTesla(1, amperes, gap, path, permeability) / milliTesla - 1)).toBeLessThan(1e-9);
});

test('textbook core: 1 T needs 0.80 A in 500 turns', () => {
  // Fitzgerald, Kingsley, Umans, "Electric Machinery", example 1.1 (from memory): printed to two figures, so 1 %
  expect(Math.abs(fieldTesla(500, 0.8, 0.5, 300, 70000) - 1)).toBeLessThan(0.01);
});

test('textbook toroid: 0.2 T needs 6.5915 A in 100 turns', () => {
  // classic problem: mean diameter 10 cm, permeability 100, gap 1 mm, full core length; current computed by hand
  expect(Math.abs(fieldTesla(100, 6.5915, 1, 100 * Math.PI, 100) / 0.2 - 1)).toBeLessThan(1e-5);
});

test('relative to an ideal core the field is low by (path/permeability)/(gap + path/permeability)', () => {
  fc.assert(fc.property(fc.double({ min: 0.01, max: 100, noNaN: true }), fc.double({ min: 1, max: 2000, noNaN: true }),
    fc.double({ min: 1, max: 1e6, noNaN: true }), (gap, path, permeability) => {
      const ideal = (4e-7 * Math.PI) / (gap * 1e-3);
      const low = path / permeability / (gap + path / permeability);
      // 1e-9: the two values of mu0
      expect(Math.abs(fieldTesla(1, 1, gap, path, permeability) / ideal - (1 - low))).toBeLessThan(1e-9);
    }));
});
