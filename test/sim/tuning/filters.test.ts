import { describe, expect, test } from 'vitest';
import { butterworth, magnitudeAt, notch, type Biquad } from '../../../sim/tuning/filters.ts';

/** Denominator and numerator of sections multiplied out, descending powers. */
function polynomial(sections: readonly Biquad[], of: (section: Biquad) => number[]): number[] {
  return sections.map(of).reduce((product, factor) => {
    const result = new Array<number>(product.length + factor.length - 1).fill(0);
    product.forEach((a, i) => factor.forEach((b, j) => (result[i + j] += a * b)));
    return result;
  }, [1]);
}

const ahead = (sections: readonly Biquad[]): number[] => polynomial(sections, ({ b }) => [...b]);
const back = (sections: readonly Biquad[]): number[] => polynomial(sections, ({ a1, a2 }) => [1, a1, a2]);

// Coefficients that SciPy 1.10.1 gives (signal.butter, iirnotch); it carries about 1e-14 itself.
const SCIPY: [string, Biquad[], number[], number[]][] = [
  ['order 1 low-pass at 0.01', butterworth('low-pass', 1, 0.01), [0.03046874709125383, 0.03046874709125383], [1, -0.9390625058174924]],
  ['order 2 low-pass at 0.1', butterworth('low-pass', 2, 0.1),
    [0.06745527388907192, 0.13491054777814385, 0.06745527388907192], [1, -1.1429805025399011, 0.41280159809618877]],
  ['order 4 low-pass at 0.05', butterworth('low-pass', 4, 0.05),
    [0.00041659920440659937, 0.0016663968176263975, 0.002499595226439596, 0.0016663968176263975, 0.00041659920440659937],
    [1, -3.180638548874719, 3.8611943489942133, -2.112155355110969, 0.43826514226197977]],
  ['order 2 high-pass at 0.05', butterworth('high-pass', 2, 0.05),
    [0.8005924034645704, -1.6011848069291408, 0.8005924034645704], [1, -1.5610180758007182, 0.6413515380575631]],
  ['notch at 0.05, Q 30', [notch(0.05, 0.05 / 30)],
    [0.9947912376593769, -1.8922053778585426, 0.9947912376593769], [1, -1.8922053778585426, 0.9895824753187539]],
];

describe('filters', () => {
  test.each(SCIPY)('%s equals SciPy', (_, sections, b, a) => {
    const mine = [ahead(sections), back(sections)];
    b.forEach((value, i) => expect(Math.abs(mine[0][i] - value)).toBeLessThan(1e-12));
    a.forEach((value, i) => expect(Math.abs(mine[1][i] - value)).toBeLessThan(1e-12));
  });

  // B. Carter, R. Mancini, "Op Amps for Everyone", 5th ed., Table 16.7: Q of the pole pairs, to ten digits from
  // Q = 1 / (2 cos angle).
  test.each([
    [2, [0.7071067812]], [3, [1]], [4, [0.5411961001, 1.3065629649]], [5, [0.6180339887, 1.6180339887]],
    [6, [0.5176380902, 0.7071067812, 1.9318516526]], [7, [0.5549581321, 0.8019377358, 2.2469796037]],
    [8, [0.5097955791, 0.6013448869, 0.8999762231, 2.5629154477]],
  ])('order %i has the pole Q of the handbook', (order, wanted) => {
    const corner = 0.05;
    const k = Math.tan(Math.PI * corner);
    const q = butterworth('low-pass', order, corner).filter((section) => section.b[2] !== 0).map(({ a2 }) => {
      // a2 = (1 - k/q + k^2) / (1 + k/q + k^2)
      const kOverQ = ((1 + k * k) * (1 - a2)) / (1 + a2);
      return k / kOverQ;
    });
    expect(q.length).toBe(wanted.length);
    // q loses digits of a2 (1e-16) by the factor q / k = 16
    q.forEach((value, i) => expect(Math.abs(value - wanted[i])).toBeLessThan(1e-9));
  });

  test.each([1, 2, 3, 4, 5, 6, 7, 8])('order %i stands at -3 dB at its corner, both ways', (order) => {
    for (const corner of [1e-3, 0.01, 0.1, 0.25, 0.45]) {
      for (const kind of ['low-pass', 'high-pass'] as const) {
        expect(magnitudeAt(butterworth(kind, order, corner), corner)).toBeCloseTo(Math.SQRT1_2, 8);
      }
    }
  });

  test('the -3 dB width of a notch is the asked one', () => {
    // edges printed by SciPy for 50 Hz, Q 30, 1000 Hz: 49.173380679 and 50.840047346 Hz
    expect(magnitudeAt([notch(0.05, 0.05 / 30)], 0.049173380679)).toBeCloseTo(Math.SQRT1_2, 7);
    expect(magnitudeAt([notch(0.05, 0.05 / 30)], 0.050840047346)).toBeCloseTo(Math.SQRT1_2, 7);
    expect(magnitudeAt([notch(0.05, 0.05 / 30)], 0.05)).toBeLessThan(1e-12);
  });
});
