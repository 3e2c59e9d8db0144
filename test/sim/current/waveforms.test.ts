/**
 * Mean and RMS of the shapes against closed forms. Where the corners of a waveform fall on the grid, sums over whole
 * periods differ from integrals by known terms only, so the tolerances are those of float64 sums: N terms of size S,
 * each rounded, give at most N * S * 2^-53 in the mean of N terms, and the relative error of a root is half of that.
 * For N <= 4000 that is below 5e-13.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { openCurrent } from '../../../sim/current/source.ts';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';
import { expectNear, points, statistics, SUMMED } from './statistics.ts';

const PERIOD = 1000; // grid points

const sine = (peak_A: number, offset_A = 0, phase_deg = 0): CurrentSpec =>
  ({ shape: 'sine', peak_A, frequency_Hz: 50, offset_A, phase_deg });
const pwm = (low_A: number, high_A: number, duty_percent: number, edge_us: number, swing_V = 0): CurrentSpec =>
  ({ shape: 'pwm', low_A, high_A, frequency_Hz: 1000, duty_percent, edge_us, swing_V });
const PWM_STEP = 1e-3 / PERIOD;

describe('steady', () => {
  test('is its level at every point', () => {
    expect([...points({ shape: 'dc', level_A: -12.5 }, 1e-6, 5)]).toEqual([-12.5, -12.5, -12.5, -12.5, -12.5]);
  });
});

describe('sine', () => {
  const step = 0.02 / PERIOD;

  // Erickson & Maksimovic, Fundamentals of Power Electronics, Appendix A (RMS values of commonly observed waveforms)
  test('mean 0 and RMS peak / sqrt(2), over whole periods', () => {
    const { mean, rms } = statistics(points(sine(1), step, 4 * PERIOD));
    expectNear(mean, 0, SUMMED);
    expectNear(rms, 0.707106781187, SUMMED);
  });

  test('direct current 3 with a sine of peak 10: RMS sqrt(3^2 + 10^2 / 2)', () => {
    const { mean, rms } = statistics(points(sine(10, 3, 77), step, 4 * PERIOD));
    expectNear(mean, 3, 10 * SUMMED);
    expectNear(rms, 7.681145747868608, 10 * SUMMED);
  });

  test('the phase leads: 90 degrees is a cosine, 180 its negative, 30 begins at half the peak', () => {
    const quarter = PERIOD / 4;
    expectNear(points(sine(2, 0, 90), step, 1)[0], 2, 4e-16);
    expectNear(points(sine(2, 0, 30), step, 1)[0], 1, 4e-16);
    expectNear(points(sine(2, 0, 180), step, quarter + 1)[quarter], -2, 4e-16);
    expectNear(points(sine(2, 0, -360), step, quarter + 1)[quarter], 2, 4e-16);
  });
});

describe('pulse-width modulation', () => {
  // closed forms: mean = duty, RMS = sqrt(duty) for levels 0 and 1 (Erickson & Maksimovic, Appendix A)
  test.each([
    [10, 0.1, 0.316227766017], [25, 0.25, 0.5], [50, 0.5, 0.707106781187], [80, 0.8, 0.894427191],
  ])('duty %d %% without edges: mean %d, RMS %d', (duty, mean, rms) => {
    const found = statistics(points(pwm(0, 1, duty, 0), PWM_STEP, 4 * PERIOD));
    expect(found.mean).toBe(mean); // whole numbers of points: no rounding
    expectNear(found.rms, rms, 5e-11); // the reference has 9 to 12 digits
  });

  // bipolar trapezoid, each edge from 0 to peak taking the share r of a half period: RMS sqrt(1 - 4 r / 3); from
  // integrating x^2. A sum over points h periods apart exceeds the integral of a square on an edge of slope s and
  // length L by h^2 / 6 * s^2 * L (trapezoidal rule, exact for squares): here 4/3 h^2 / r for both edges.
  test.each([
    [0.1, 0.9309493362512627], [0.25, 0.816496580926726], [0.5, 0.577350269190],
  ])('plus and minus 1 with edges of %d of a half period on each side: RMS %d', (r, rms) => {
    const { mean, meanSquare } = statistics(points(pwm(-1, 1, 50, r * 1000), PWM_STEP, 4 * PERIOD));
    const excess = (4 / 3) / PERIOD ** 2 / r;
    expectNear(mean, 0, SUMMED);
    expectNear(Math.sqrt(meanSquare - excess), rms, 2e-12); // the reference of the triangle has 12 digits
  });

  // inductor current: RMS sqrt(Idc^2 + ripple^2 / 12) (Erickson & Maksimovic, Appendix A); slope 2 * ripple a period
  test.each([
    [10, 4, 10.066445913694333], [10, 20, 11.547005383792516], [5, 2, 5.033222956847166], [1, 0.3, 1.0037429949942367],
  ])('edges as long as half a period are a triangle: %d A with %d A ripple, RMS %d', (direct, ripple, rms) => {
    const spec = pwm(direct - ripple / 2, direct + ripple / 2, 50, 500);
    const { mean, meanSquare } = statistics(points(spec, PWM_STEP, 4 * PERIOD));
    expectNear(mean, direct, SUMMED);
    expectNear(Math.sqrt(meanSquare - (2 * ripple) ** 2 / PERIOD ** 2 / 6), rms, 20 * SUMMED);
  });

  test('edges are centred: whatever their length and the duty, the mean stays low + (high - low) * duty', () => {
    const levels = fc.integer({ min: -1000, max: 1000 });
    fc.assert(fc.property(levels, levels, fc.integer({ min: 1, max: 499 }), fc.double({ min: 0, max: 1, noNaN: true }),
      (low, high, half, share) => {
        const duty = (2 * half) / PERIOD;
        // even numbers of points, so that every corner is on the grid
        const edgePoints = 2 * Math.floor(share * Math.min(half, PERIOD / 2 - half));
        const spec = pwm(low, high, duty * 100, edgePoints);
        const { mean } = statistics(points(spec, PWM_STEP, PERIOD));
        expectNear(mean, low + (high - low) * duty, 2000 * SUMMED);
      }));
  });

  test('phase 0 is the middle of the rising edge, and the levels are reached exactly', () => {
    const found = points(pwm(2, 10, 25, 100), PWM_STEP, PERIOD);
    const at = [0, 25, 50, 51, 200, 225, 250, 275, 300, 949, 950, 975];
    const expected = [6, 8, 10, 10, 10, 8, 6, 4, 2, 2, 2, 4];
    at.forEach((point, i) => expectNear(found[point], expected[i], 1e-13));
    expect([found[60], found[199], found[310], found[940]]).toEqual([10, 10, 2, 2]);
  });

  test('duty 0 and 100 % are steady, whatever the edges', () => {
    expect(new Set(points(pwm(2, 10, 0, 5000), PWM_STEP, PERIOD))).toEqual(new Set([2]));
    expect(new Set(points(pwm(2, 10, 100, 5000), PWM_STEP, PERIOD))).toEqual(new Set([10]));
  });

  test('an edge longer than the on or off time is refused by its name, one as long is not', () => {
    expect(() => openCurrent(pwm(0, 1, 25, 251), PWM_STEP, '.')).toThrow(/^edge_us: found 251, allowed at most 250/);
    expect(() => openCurrent(pwm(0, 1, 90, 101), PWM_STEP, '.')).toThrow(RangeError);
    openCurrent(pwm(0, 1, 25, 250), PWM_STEP, '.').close();
    openCurrent(pwm(0, 1, 90, 100), PWM_STEP, '.').close();
  });
});

describe('step and staircase', () => {
  const step = (from_A: number, to_A: number, at_ms: number, edge_us: number): CurrentSpec =>
    ({ shape: 'step', from_A, to_A, at_ms, edge_us });

  test('the edge begins at its time, is linear, and the current stays behind it', () => {
    const found = points(step(-1, 3, 1, 400), 1e-4, 20);
    const expected = [...new Array(11).fill(-1), 0, 1, 2, ...new Array(6).fill(3)];
    found.forEach((value, n) => expectNear(value, expected[n], 1e-12));
    expect([found[10], found[14], found[19]]).toEqual([-1, 3, 3]);
  });

  test('a jump on a grid point is seen at that point, whatever the rate was rounded to', () => {
    fc.assert(fc.property(fc.integer({ min: 1, max: 1_000_000 }), fc.integer({ min: 0, max: 3000 }), (rateHz, at) => {
      const found = points(step(0, 1, (at / rateHz) * 1e3, 0), 1 / rateHz, at + 2);
      expect(found.indexOf(1)).toBe(at);
    }));
  });

  test('a staircase is the sum of its steps, and stays on its last level', () => {
    const levels = fc.array(fc.integer({ min: -1000, max: 1000 }), { minLength: 1, maxLength: 12 });
    const spec = fc.record({ levels, hold: fc.double({ min: 0.05, max: 3, noNaN: true }),
      share: fc.oneof(fc.constantFrom(0, 1), fc.double({ min: 0.001, max: 1, noNaN: true })) });
    fc.assert(fc.property(spec, ({ levels, hold, share }) => {
      const edge_us = hold * 1000 * share;
      const stairs: CurrentSpec = { shape: 'staircase', levels_A: levels, hold_ms: hold, edge_us };
      const count = Math.ceil((levels.length + 2) * hold * 10);
      const found = points(stairs, 1e-4, count);
      const sum = new Float64Array(count).fill(levels[0]);
      levels.slice(1).forEach((level, k) => {
        const one = points(step(0, level - levels[k], (k + 1) * hold, edge_us), 1e-4, count);
        one.forEach((value, n) => { sum[n] += value; });
      });
      // positions up to 360 steps, rounded to 2^-44, on edges of 5e-4 steps or more and up to 2000 A: 2.3e-7 A a step
      found.forEach((value, n) => expect(Math.abs(value - sum[n])).toBeLessThan(12 * 2.3e-7));
      expect(found[count - 1]).toBe(levels[levels.length - 1]);
    }));
  });

  test('mean square of one stair with its edge: L (a^2 + a b + b^2) / 3 on the edge', () => {
    // Erickson & Maksimovic, Appendix A, segment formula; a = 8, b = 12 as in their pulse on a ramp. Grid points h
    // apart, ends counted half, exceed the integral of a square of slope s by h^2 / 6 * s^2 * L.
    const found = points({ shape: 'staircase', levels_A: [8, 12], hold_ms: 1, edge_us: 1000 }, 1e-6, 2001);
    const edge = found.subarray(1000, 2001);
    const squares = edge.reduce((sum, value) => sum + value * value, 0) - (8 ** 2 + 12 ** 2) / 2;
    expectNear(squares / 1000 - (4 / 1000) ** 2 / 6, (8 ** 2 + 8 * 12 + 12 ** 2) / 3, SUMMED);
  });

  test('an edge longer than the time on a level is refused by its name', () => {
    const stairs: CurrentSpec = { shape: 'staircase', levels_A: [0, 1], hold_ms: 1, edge_us: 1001 };
    expect(() => openCurrent(stairs, 1e-6, '.')).toThrow(/^edge_us: found 1001, allowed at most 1000/);
  });
});

test('a grid step that is no length of time is refused', () => {
  for (const step of [0, -1, NaN, Infinity]) {
    expect(() => openCurrent({ shape: 'dc', level_A: 1 }, step, '.')).toThrow(/^stepSeconds: found/);
  }
});
