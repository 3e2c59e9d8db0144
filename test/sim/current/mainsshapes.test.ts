/**
 * Harmonics, ripple and phase-cut mains against closed forms: Erickson & Maksimovic's table of
 * RMS values (Fundamentals of Power Electronics, Appendix A), and the amplitudes of the example of IEEE Std 1459-2010
 * (from memory). Where a sum over points differs from an integral the difference is known: the trapezoidal rule with
 * step h exceeds the integral of f from a to b by h^2 / 12 * (f'(b) - f'(a)), up to terms in h^4 (Euler-Maclaurin).
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { openCurrent } from '../../../sim/current/source.ts';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';
import { expectNear, points, pointsFrom, statistics, SUMMED } from './statistics.ts';

const F = 50;

function harmonics(peak_A: number, percents: number[], phases_deg: number[] = [], offset_A = 0): CurrentSpec {
  return { shape: 'harmonics', peak_A, frequency_Hz: F, offset_A, percents, phases_deg };
}

describe('harmonics', () => {
  // RMS by harmonic: voltage 1:100 3:8 5:15 7:5, current 1:100 3:20 5:15 7:10
  test.each([
    [[0, 8, 0, 15, 0, 5], 101.55786527886454], [[0, 20, 0, 15, 0, 10], 103.56157588603989],
  ])('percents %j of 100 A RMS: whatever their phases', (percents, rms) => {
    fc.assert(fc.property(fc.array(fc.integer({ min: -360, max: 360 }), { maxLength: 6 }), (phases) => {
      // squares reach harmonic 14, so the mean over 1000 points of a period has no alias
      const found = statistics(points(harmonics(100 * Math.SQRT2, percents, phases), 1 / (F * 1000), 1000));
      expectNear(found.mean, 0, 200 * SUMMED);
      expectNear(found.rms, rms, 5 * SUMMED);
    }), { numRuns: 30 });
  });

  test('every harmonic is a sine of its own: the sum of `sine` currents', () => {
    const percent = fc.double({ min: -100, max: 100, noNaN: true });
    const given = fc.record({ percents: fc.array(percent, { minLength: 1, maxLength: 100 }),
      phases: fc.array(fc.integer({ min: -360, max: 360 }), { maxLength: 100 }),
      offset: fc.integer({ min: -50, max: 50 }) });
    fc.assert(fc.property(given, ({ percents, phases, offset }) => {
      const used = phases.slice(0, percents.length);
      const step = 1 / 300_007;
      const found = pointsFrom(harmonics(10, percents, used, offset), step, 70_000, 200);
      const expected = new Float64Array(200).fill(offset);
      [100, ...percents].forEach((share, index) => {
        const one: CurrentSpec = { shape: 'sine', peak_A: share / 10, frequency_Hz: F * (index + 1), offset_A: 0,
          phase_deg: index === 0 ? 0 : used[index - 1] ?? 0 };
        pointsFrom(one, step, 70_000, 200).forEach((value, n) => { expected[n] += value; });
      });
      // up to 101 harmonics of 10 A: phases off by 101 * 2^-51 of a turn, Horner by as many turns of a few 2^-53
      found.forEach((value, n) => expect(Math.abs(value - expected[n])).toBeLessThan(101 * 10 * 101 * 2 ** -48));
    }), { numRuns: 40 });
  });

  test('more phases than harmonics are refused', () => {
    expect(() => openCurrent(harmonics(1, [5], [0, 90]), 1e-5, '.')).toThrow(/^phases_deg: found 2 phases/);
  });
});

describe('ripple', () => {
  const ripple = (mean_A: number, peakToPeak_A: number, duty_percent: number): CurrentSpec =>
    ({ shape: 'ripple', mean_A, peakToPeak_A, frequency_Hz: 20_000, duty_percent });
  const step = 1 / (20_000 * 1000);

  // sqrt(mean^2 + peakToPeak^2 / 12); the slopes of the square of a triangle change by known amounts in its corners
  test.each([
    [10, 4, 10.066445913694333], [10, 20, 11.547005383792516], [5, 2, 5.033222956847166], [1, 0.3, 1.0037429949942367],
  ])('%d A with %d A from valley to peak: RMS %d at any duty', (mean, peakToPeak, rms) => {
    for (const duty of [2, 20, 50, 74, 98]) {
      const found = statistics(points(ripple(mean, peakToPeak, duty), step, 4000));
      const excess = (peakToPeak / 1000) ** 2 / 6 * (100 / duty + 100 / (100 - duty));
      expectNear(found.mean, mean, 2 * SUMMED);
      expectNear(Math.sqrt(found.meanSquare - excess), rms, 20 * SUMMED);
    }
  });

  test('begins at its mean, rises for its duty, and is the same far from the start', () => {
    const found = points(ripple(3, 2, 20), step, 1000);
    // phases of 2^-51 on slopes of 10 A and 2.5 A a period
    for (const [n, value] of [[0, 3], [50, 3.5], [100, 4], [500, 3], [900, 2], [950, 2.5]]) {
      expectNear(found[n], value, 1e-14);
    }
    expect([...found].indexOf(Math.max(...found))).toBe(100);
    const later = pointsFrom(ripple(3, 2, 20), step, 5_000_000, 1000);
    // the step of 1 / 2e7 is rounded: 5e6 steps are off by 5000 periods * 2^-53
    const bound = 10 * (5000 * 2 ** -53 + 2 ** -51) + 1e-15;
    later.forEach((value, n) => expect(Math.abs(value - found[n])).toBeLessThan(bound));
  });
});

describe('phase-cut mains', () => {
  const cut = (firing_deg: number, edge_us = 0, peak_A = 1): CurrentSpec =>
    ({ shape: 'phaseCut', peak_A, frequency_Hz: F, firing_deg, edge_us });
  const N = 3600;
  const step = 1 / (F * N);
  const h = (2 * Math.PI) / N;

  test.each([
    [30, 0.69683769889, 0.593974333895], [60, 0.634231381486, 0.477464829276], [90, 0.5, 0.318309886184],
    [120, 0.312650851173, 0.159154943092], [135, 0.213125616607, 0.0932308071445],
  ])('fired at %d degrees: RMS %d, rectified mean %d', (firing, rms, rectified) => {
    const angle = (firing * Math.PI) / 180;
    const found = points(cut(firing), step, N);
    const { mean, meanSquare } = statistics(found);
    const magnitude = found.reduce((sum, value) => sum + Math.abs(value), 0) / N;
    expectNear(mean, 0, SUMMED);
    // points on a jump count half in the trapezoidal rule; slopes of sin^2 and sin; the table has 11 or 12 digits
    const trapezoid = meanSquare - Math.sin(angle) ** 2 / N;
    expectNear(Math.sqrt(trapezoid + (h ** 2 * Math.sin(2 * angle)) / (12 * Math.PI)), rms, 5e-12);
    expectNear(magnitude - Math.sin(angle) / N + (h ** 2 * (1 + Math.cos(angle))) / (12 * Math.PI), rectified, 5e-13);
  });

  test('fired at 0 degrees it is the sine, at 180 degrees there is none, whatever the edge', () => {
    const whole: CurrentSpec = { shape: 'sine', peak_A: 7, frequency_Hz: F, offset_A: 0, phase_deg: 0 };
    expect(points(cut(0, 100, 7), step, N)).toEqual(points(whole, step, N));
    expect(points(cut(180, 100), step, N).every((value) => Math.abs(value) < 1e-14)).toBe(true);
  });

  test('the edge begins at the firing angle and is linear in time; both half periods are alike', () => {
    // 100 points of 1/180000 s from 90 degrees (point 900) on
    const found = points(cut(90, (100 / (F * N)) * 1e6, 10), step, N);
    for (const n of [0, 500, 899]) expect(found[n]).toBe(0);
    for (const part of [0, 25, 50, 100, 500]) {
      const expected = 10 * Math.cos(part * h) * Math.min(1, part / 100);
      expect(Math.abs(found[900 + part] - expected)).toBeLessThan(1e-11); // an edge of 0.028 periods, phases of 2^-51
      expect(Math.abs(found[2700 + part] + expected)).toBeLessThan(1e-11);
    }
  });

  test('a firing on the grid does not jitter, whatever the rate was rounded to', () => {
    // period of 40 points fired at 90 degrees: points 10 to 19 and 30 to 39 carry current
    const expected = Array.from({ length: 40 }, (_, n) => n % 20 >= 10);
    fc.assert(fc.property(fc.integer({ min: 1, max: 100_000 }), (frequency_Hz) => {
      const spec: CurrentSpec = { shape: 'phaseCut', peak_A: 1, frequency_Hz, firing_deg: 90, edge_us: 0 };
      const found = points(spec, 1 / (frequency_Hz * 40), 40 * 100);
      expect(found.findIndex((value, n) => Math.abs(value) > 0.1 !== expected[n % 40])).toBe(-1);
    }), { numRuns: 50 });
  });

  test('an edge that does not end before the zero crossing is refused by its name', () => {
    // 135 degrees leave 45 of 360 degrees of 20 ms: 2500 µs
    expect(() => openCurrent(cut(135, 2501), step, '.')).toThrow(/^edge_us: found 2501, allowed at most 2500/);
    openCurrent(cut(135, 2500), step, '.').close();
  });
});
