import fc from 'fast-check';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';
import { fitMaterial } from '../../../sim/hardware/loopfit.ts';
import { readLoop, type MeasuredLoop } from '../../../sim/hardware/looptable.ts';
import { nonNegativeLeastSquares } from '../../../sim/hardware/nonnegative.ts';
import { PlayCircuit } from '../../../sim/hardware/playcircuit.ts';
import type { PlayMaterial } from '../../../sim/hardware/playmaterial.ts';

const REFERENCES = fileURLToPath(new URL('../../references/', import.meta.url));

/** Of the three inner loops 7 rows each: tip, remanence, coercivity, tip, remanence, coercivity, tip. */
const INNER_ROWS = 7;
const INNER = 3;

function ring(material: PlayMaterial, fields: ArrayLike<number>): Float64Array {
  const values = Float64Array.from(fields);
  new PlayCircuit(material, 1, 0).process(values, values.length);
  return values;
}

function part(loop: MeasuredLoop, from: number, to: number): MeasuredLoop {
  return {
    name: loop.name, fieldAmperesPerMetre: loop.fieldAmperesPerMetre.slice(from, to), tesla: loop.tesla.slice(from, to),
  };
}

function rmsOverHighest(got: Float64Array, expected: Float64Array): number {
  const highest = expected.reduce((most, tesla) => Math.max(most, Math.abs(tesla)), 0);
  return Math.sqrt(got.reduce((sum, tesla, i) => sum + (tesla - expected[i]) ** 2, 0) / got.length) / highest;
}

/** Where a falling branch from `top` passes zero. */
function coercivityOf(material: PlayMaterial, top: number): number {
  const fields = Array.from({ length: 20001 }, (_, i) => top - (2 * top * i) / 20000);
  return -fields[ring(material, fields).findIndex((tesla) => tesla <= 0)];
}

describe('measured loops of an MnZn ferrite (romanszewczyk/JAmodel, MIT licence, beside the file)', () => {
  const measured = readLoop('ferriteloops.csv', REFERENCES);
  const largest = part(measured, INNER * INNER_ROWS, Infinity);

  test.each([2000, 6000])('all loops fitted at once, permeability %s: rms error and coercivity', (permeability) => {
    const { material, rmsErrorTesla } = fitMaterial(measured, permeability);
    const got = ring(material, measured.fieldAmperesPerMetre);
    const [from, to] = [INNER * INNER_ROWS, got.length];
    expect(rmsOverHighest(got.slice(from, to), measured.tesla.slice(from, to))).toBeLessThan(0.08);
    for (let k = 0; k < INNER; k++) {
      const rows: [number, number] = [k * INNER_ROWS, (k + 1) * INNER_ROWS];
      expect(rmsOverHighest(got.slice(...rows), measured.tesla.slice(...rows))).toBeLessThan(0.15);
    }
    // what the fit says of itself is what the circuit does; rounding only
    expect(Math.abs(rmsErrorTesla / rmsOverHighest(got, measured.tesla) / 0.314709 - 1)).toBeLessThan(1e-6);
    for (const [top, falling, rising] of [
      [7.981, 0.853, 0.837], [15.972, 2.357, 2.340], [39.926, 4.411, 4.235], [79.852, 5.150, 4.780]]) {
      expect(Math.abs(coercivityOf(material, top) / ((falling + rising) / 2) - 1)).toBeLessThan(0.3);
    }
  });

  test('the largest loop alone foretells the tips of the inner ones within 15 % of the highest flux density', () => {
    const { material } = fitMaterial(largest, 4000);
    expect(rmsOverHighest(ring(material, largest.fieldAmperesPerMetre), largest.tesla)).toBeLessThan(0.08);
    for (let k = 0; k < INNER; k++) {
      const [field, tesla] = [measured.fieldAmperesPerMetre[k * INNER_ROWS], measured.tesla[k * INNER_ROWS]];
      expect(Math.abs(ring(material, [field])[0] - tesla)).toBeLessThan(0.15 * tesla);
    }
  });

  test('the initial slope is the permeability asked for', () => {
    const { material } = fitMaterial(measured, 6000);
    // the curve bends by E/knee, and no operator moves below the first threshold
    expect(Math.abs(ring(material, [1e-6])[0] / 1e-6 / 1.25663706127e-6 / 6000 - 1)).toBeLessThan(1e-5);
  });

  test('a loop that the model cannot follow is refused: turned over, or a permeability far too high', () => {
    const turned = { ...largest, tesla: largest.tesla.map((tesla) => -tesla) };
    expect(() => fitMaterial(turned, 4000)).toThrow(/core\.play\.loopFile/);
    expect(() => fitMaterial(largest, 1e5)).toThrow(/allowed 10 %/);
    const flat = { ...largest, tesla: largest.fieldAmperesPerMetre.map((field) => 1e-3 * field) };
    expect(() => fitMaterial(flat, 700)).toThrow(/encloses an area/);
  });
});

describe('non-negative least squares', () => {
  test('meets the conditions of Karush, Kuhn and Tucker on random positive definite problems', () => {
    const five = { minLength: 5, maxLength: 5 };
    const vector = fc.array(fc.double({ min: -1, max: 1, noNaN: true }), five);
    fc.assert(fc.property(fc.array(vector, five), vector, (root, right) => {
      // root' root + 1 has eigenvalues from 1 to 26
      const matrix = root.map((_, i) => Float64Array.from(root, (_row, j) =>
        root.reduce((sum, row) => sum + row[i] * row[j], i === j ? 1 : 0)));
      const x = nonNegativeLeastSquares(matrix, Float64Array.from(right));
      x.forEach((value, i) => {
        const gradient = matrix[i].reduce((sum, entry, j) => sum + entry * x[j], -right[i]);
        expect(value).toBeGreaterThanOrEqual(0);
        // still to 1e-10 of the largest, times the largest row sum
        if (value > 0) expect(Math.abs(gradient)).toBeLessThan(1e-8);
        else expect(gradient).toBeGreaterThan(-1e-8);
      });
    }));
  });
});

describe('loop file', () => {
  function withFile(text: string, use: (folder: string) => void): void {
    const folder = mkdtempSync(join(tmpdir(), 'loop-'));
    try {
      writeFileSync(join(folder, 'loop.csv'), text);
      use(folder);
    } finally {
      rmSync(folder, { recursive: true });
    }
  }

  const rows = Array.from({ length: 20 }, (_, i) => `${20 - i},${0.01 * i}`).join('\n');

  test('other units, three columns and too few rows are refused, with the place', () => {
    withFile(`H (kA/m),B (T)\n${rows}\n`, (folder) =>
      expect(() => readLoop('loop.csv', folder)).toThrow(/loop\.csv.*"kA\/m".*allowed A\/m/));
    withFile('H,B,T\n1,2,3\n', (folder) => expect(() => readLoop('loop.csv', folder)).toThrow(/3 columns/));
    withFile('H,B\n1,2\n0,1\n', (folder) => expect(() => readLoop('loop.csv', folder)).toThrow(/2 rows/));
  });

  test('without units the columns are taken as A/m and T', () => {
    withFile(`${rows}\n`, (folder) => expect(readLoop('loop.csv', folder).fieldAmperesPerMetre[1]).toBe(19));
  });
});
