import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { RandomStream } from '../../../sim/hardware/random.ts';
import { SineFit, type SineParts } from '../../../sim/judging/sinefit.ts';
import { effectiveBits } from '../../../sim/judging/sines.ts';

function fit(seconds: readonly number[], values: readonly number[], startHz: number): SineParts | string {
  const sine = new SineFit(startHz, seconds[0], seconds[seconds.length - 1]);
  for (const pass of [1, 2]) seconds.forEach((at, i) => sine.hear(at, values[i], pass));
  return sine.result();
}

function partsOf(seconds: readonly number[], values: readonly number[], startHz: number): SineParts {
  const parts = fit(seconds, values, startHz);
  if (typeof parts === 'string') throw new Error(parts);
  return parts;
}

const RATE = 2000;
const instants = (count: number, from = 0): number[] => Array.from({ length: count }, (_, i) => from + i / RATE);

interface Case {
  name: string;
  startHz: number;
  seconds: number[];
  values: number[];
  fit: { amplitude: number; phase: number; offset: number; hertz: number; residualRms: number };
}

const CASES = JSON.parse(readFileSync(new URL('../../references/sinefit.json', import.meta.url), 'utf8')) as Case[];

describe('the four-parameter sine fit', () => {
  test.each(CASES)('agrees with least squares by SciPy (Levenberg-Marquardt): $name', ({ startHz, seconds, values, fit: expected }) => {
    const parts = partsOf(seconds, values, startHz);
    // both stand in the minimum of the same sum of squares. Two passes leave the square of the last step, which is at
    // most 1e-3 rad; the minimum itself is known to SciPy to the square root of the rounding of its sum, 1e-8
    expect(Math.abs(parts.amplitude / expected.amplitude - 1)).toBeLessThan(1e-6);
    expect(Math.abs(parts.offset - expected.offset)).toBeLessThan(1e-6 * expected.amplitude);
    expect(Math.abs(Math.sin((parts.phaseRadians - expected.phase) / 2))).toBeLessThan(1e-6);
    expect(Math.abs(parts.radiansPerSecond / (2 * Math.PI) - expected.hertz) * 0.12).toBeLessThan(1e-6);
    expect(Math.abs(parts.residualRms / expected.residualRms - 1)).toBeLessThan(1e-6);
  });

  test('finds a sine exactly, whatever its amplitude, phase, offset, frequency and place in time', () => {
    fc.assert(fc.property(
      fc.double({ min: 1e-3, max: 1e3, noNaN: true }), fc.double({ min: -Math.PI, max: Math.PI, noNaN: true }),
      fc.double({ min: -10, max: 10, noNaN: true }), fc.double({ min: 20, max: 980, noNaN: true }), fc.constantFrom(0, 10, 3600),
      (amplitude, phase, offsetShare, hertz, from) => {
        const seconds = instants(600, from);
        const middle = (seconds[0] + seconds[599]) / 2;
        const offset = offsetShare * amplitude;
        const values = seconds.map((at) => offset + amplitude * Math.sin(2 * Math.PI * hertz * (at - middle) + phase));
        const parts = partsOf(seconds, values, hertz);
        // angles of up to 2 pi * 980 Hz * 0.15 s = 924 rad are rounded to 2^-53 of that, times from 3600 s to 2^-42 s,
        // which at 980 Hz is 1.4e-9 rad
        expect(Math.abs(parts.amplitude / amplitude - 1)).toBeLessThan(1e-8);
        expect(Math.abs(parts.offset - offset)).toBeLessThan(1e-8 * amplitude);
        expect(Math.abs(Math.sin((parts.phaseRadians - phase) / 2))).toBeLessThan(1e-8);
        expect(parts.residualRms).toBeLessThan(1e-8 * amplitude);
      }), { numRuns: 200 });
  });

  test('scatters by sigma * sqrt(2 / M) in amplitude (the bound of IEEE Std 1057 for M readings)', () => {
    const readings = 256;
    const records = 1000;
    const sigma = 0.3;
    const noise = new RandomStream(7, 0, 'sine fit');
    const seconds = instants(readings);
    const middle = (seconds[0] + seconds[readings - 1]) / 2;
    let squares = 0;
    for (let k = 0; k < records; k++) {
      const values = seconds.map((at) => 10 * Math.sin(2 * Math.PI * 73 * (at - middle)) + sigma * noise.normal());
      squares += (partsOf(seconds, values, 73).amplitude - 10) ** 2;
    }
    // the estimate of a standard deviation from 1000 records has 1 / sqrt(2000) = 2.2 %; five of them
    expect(Math.abs(Math.sqrt(squares / records) / (sigma * Math.sqrt(2 / readings)) - 1)).toBeLessThan(0.112);
  });

  test('leaves a harmonic of share h as residual: SINAD is 1 / h', () => {
    const seconds = instants(2000);
    const turn = (at: number): number => 2 * Math.PI * 50 * at;
    const values = seconds.map((at) => 5 * Math.sin(turn(at)) + 5e-4 * Math.sin(3 * turn(at) + 0.3));
    const { residualRms, amplitude } = partsOf(seconds, values, 50);
    // 50 whole periods: the harmonic is orthogonal to cosine, sine and 1; to the frequency's column up to 1 / (2 pi 50)
    expect(Math.abs(residualRms / (5e-4 / Math.SQRT2) - 1)).toBeLessThan(1e-4);
    expect(amplitude).toBeCloseTo(5, 6);
  });

  test.each([8, 10, 12, 14])('an ideal quantiser of %i bits has SINAD 6.02 N + 1.76 dB and N effective bits', (bits) => {
    // W. R. Bennett, Bell System Technical Journal 27 (1948), 446-472
    const step = 2 / 2 ** bits;
    const seconds = instants(4096);
    const values = seconds.map((at) => step * (Math.floor(Math.sin(2 * Math.PI * 97.31 * at) / step) + 0.5));
    const { residualRms, amplitude } = partsOf(seconds, values, 97.31);
    const sinad = 20 * Math.log10(amplitude / Math.SQRT2 / residualRms);
    const ideal = 20 * bits * Math.log10(2) + 10 * Math.log10(1.5);
    // 4096 nearly independent errors, uniform: their mean square scatters by sqrt(4/5/4096) = 1.4 %, 0.06 dB; three of
    // them. Few bits add what their errors have in common with the sine.
    expect(Math.abs(sinad - ideal)).toBeLessThan(0.18);
    expect(Math.abs(effectiveBits(2, residualRms) - bits)).toBeLessThan(0.03);
    // the two definitions agree for a sine of full scale
    expect(Math.abs(effectiveBits(2 * amplitude, residualRms) - (sinad - 1.7609) / 6.0206)).toBeLessThan(1e-3);
  });
});

describe('what is no sine', () => {
  const seconds = instants(400);

  test('noise alone does not converge', () => {
    const noise = new RandomStream(3, 0, 'noise alone');
    let refused = 0;
    for (let k = 0; k < 20; k++) if (typeof fit(seconds, seconds.map(() => noise.normal()), 60) === 'string') refused++;
    // noise may by chance have its strongest line where the fit starts
    expect(refused).toBeGreaterThan(12);
  });

  test('a frequency far off the start does not converge', () => {
    expect(fit(seconds, seconds.map((at) => Math.sin(2 * Math.PI * 70 * at)), 60)).toMatch(/does not converge|determine/);
  });

  test('a steady reading determines none', () => {
    for (const level of [0, 3]) expect(typeof fit(seconds, seconds.map(() => level), 60)).toBe('string');
  });

  test('at half the rate cosine and sine cannot be told apart', () => {
    expect(fit(seconds, seconds.map((_, i) => (i % 2 === 0 ? 1 : -1)), RATE / 2)).toMatch(/determine/);
  });
});
