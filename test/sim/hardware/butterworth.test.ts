import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Butterworth } from '../../../sim/hardware/butterworth.ts';
import { Pole } from '../../../sim/hardware/pole.ts';

// denominators in rising powers of s at 1 rad/s: B. Carter, R. Mancini, "Op Amps for Everyone", 5th ed., table 16.7,
// to ten digits from Q = 1/(2 cos(theta))
const DENOMINATOR: { [order: number]: number[] } = {
  2: [1, 1.4142135624, 1], 3: [1, 2, 2, 1], 4: [1, 2.6131259298, 3.4142135624, 2.6131259298, 1],
};
/** Half a unit of their tenth decimal, over the states that it moves. */
const TABLE_ROUNDING = 1e-9;

/** d^n y/dt^n = x - sum a_k d^k y/dt^k by Runge-Kutta, on straight lines through `inputs` every `step` (1 rad/s). */
function integrated(order: number, inputs: number[], step: number): number[] {
  const a = DENOMINATOR[order];
  const slope = (y: number[], x: number) =>
    y.map((_, k) => (k + 1 < order ? y[k + 1] : x - y.reduce((sum, value, n) => sum + a[n] * value, 0)));
  let y = [inputs[0], ...new Array<number>(order - 1).fill(0)];
  const plus = (d: number[], h: number) => y.map((value, k) => value + h * d[k]);
  const outputs = [inputs[0]];
  const parts = Math.ceil(step / 0.005);
  const h = step / parts;
  for (let i = 1; i < inputs.length; i++) {
    const x = (part: number) => inputs[i - 1] + ((inputs[i] - inputs[i - 1]) * part) / parts;
    for (let part = 0; part < parts; part++) {
      const k1 = slope(y, x(part));
      const k2 = slope(plus(k1, h / 2), x(part + 0.5));
      const k3 = slope(plus(k2, h / 2), x(part + 0.5));
      const k4 = slope(plus(k3, h), x(part + 1));
      y = y.map((value, k) => value + (h / 6) * (k1[k] + 2 * k2[k] + 2 * k3[k] + k4[k]));
    }
    outputs.push(y[0]);
  }
  return outputs;
}

/** Corner at which a grid step of 1 s is `step` in units of 1/(2 pi corner). */
function filterOf(order: number, step: number): Butterworth {
  return new Butterworth(order, step / (2 * Math.PI), 1);
}

describe.each([2, 3, 4])('order %s', (order) => {
  test('is exact at the grid points for any straight lines between them', () => {
    const inputs = fc.array(fc.double({ min: -10, max: 10, noNaN: true }), { minLength: 2, maxLength: 25 });
    fc.assert(fc.property(inputs, fc.constantFrom(0.01, 0.1, 0.39, 1, 3), (given, step) => {
      const values = Float64Array.from(given);
      filterOf(order, step).process(values, values.length);
      const expected = integrated(order, given, step);
      // Runge-Kutta at 0.005: h^4/120 of a fifth derivative below 10 * 2.7^5, 5e-10 at most
      for (let n = 0; n < given.length; n++) {
        expect(Math.abs(values[n] - expected[n])).toBeLessThan(10 * TABLE_ROUNDING);
      }
    }), { numRuns: 40 });
  });

  test.each([0.1, 0.5, 1, 2, 4])('gain at %s of the corner is 1/sqrt(1 + f^2n)', (share) => {
    // 4096 points for a period: straight lines lose sinc^2(1/4096) = 1 - 2e-7
    const points = 4096;
    const periods = 1 + Math.ceil(20 * share);
    const length = points * (periods + 1);
    const values = Float64Array.from({ length }, (_, n) => Math.sin((2 * Math.PI * n) / points));
    new Butterworth(order, 1 / share / points, 1).process(values, values.length);
    let re = 0;
    let im = 0;
    for (let n = points * periods; n < values.length; n++) {
      re += (2 / points) * values[n] * Math.cos((2 * Math.PI * n) / points);
      im += (2 / points) * values[n] * Math.sin((2 * Math.PI * n) / points);
    }
    // the start has decayed by exp(-2 pi 20 * 0.38) at least
    expect(Math.abs(Math.hypot(re, im) - 1 / Math.sqrt(1 + share ** (2 * order)))).toBeLessThan(1e-6);
  });

  test('noise bandwidth over corner is (pi/2n)/sin(pi/2n)', () => {
    const step = 0.01;
    const values = new Float64Array(20_000);
    values[1] = 1;
    filterOf(order, step).process(values, values.length);
    const sum = values.reduce((total, y) => total + y * y, 0);
    // white noise of density 1 on the grid has variance 1/(2 step time); lines take less than 1/3 of (step)^2 n
    const bandwidth = sum / 2 / (step / (2 * Math.PI));
    const exact = (Math.PI / (2 * order)) / Math.sin(Math.PI / (2 * order));
    expect(Math.abs(bandwidth / exact - 1)).toBeLessThan(order * step * step);
  });

  test('starts in steady state, and a constant stays exactly that constant', () => {
    const levels = fc.double({ min: -1e6, max: 1e6, noNaN: true });
    fc.assert(fc.property(levels, fc.double({ min: 1e-6, max: 1e6, noNaN: true }), (level, step) => {
      const values = new Float64Array(30).fill(level);
      filterOf(order, step).process(values, 30);
      for (const value of values) expect(value + 0).toBe(level + 0);
    }));
  });

  test('goes on across any cut of the input; reset equals fresh', () => {
    const numbers = fc.array(fc.double({ min: -1e3, max: 1e3, noNaN: true }), { minLength: 1, maxLength: 40 });
    fc.assert(fc.property(numbers, fc.nat(40), (given, cut) => {
      const whole = Float64Array.from(given);
      const filter = filterOf(order, 0.3);
      filter.process(whole, whole.length);
      filter.reset();
      const parts = Float64Array.from(given);
      const first = Math.min(cut, parts.length);
      filter.process(parts.subarray(0, first), first);
      filter.process(parts.subarray(first), parts.length - first);
      expect([...parts]).toEqual([...whole]);
    }));
  });
});

test('far above the corner order n falls 20 n dB a decade; the RC of order 1 is the pole', () => {
  // the last state of a fast ramp: at 1 grid step of tau 1e4 the response to a step begins as t^n/n!
  for (const [order, filter] of [[1, new Pole(1e-4 / (2 * Math.PI), 1)], [2, filterOf(2, 1e-4)], [3, filterOf(3, 1e-4)],
    [4, filterOf(4, 1e-4)]] as const) {
    const values = Float64Array.from({ length: 402 }, (_, n) => (n >= 1 ? 1 : 0));
    filter.process(values, values.length);
    const t = 400.5e-4; // a ramp of one step is a step in its middle
    const factorial = [1, 1, 2, 6, 24][order];
    // the next term is a share n/(n+1) * a t of it, with a <= 2.62; rounding: sums of 1e-16 against t^4/24 = 1e-7
    expect(Math.abs(values[401] * factorial / t ** order - 1)).toBeLessThan(2.62 * t);
  }
});

test('other orders are refused', () => {
  expect(() => new Butterworth(1, 1, 1)).toThrow(RangeError);
  expect(() => new Butterworth(5, 1, 1)).toThrow('order: found 5, allowed 2 to 4');
});
