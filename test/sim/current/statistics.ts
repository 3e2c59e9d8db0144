/** Points of a current and their mean and RMS, for the tests of shapes. */
import { expect } from 'vitest';
import { openCurrent } from '../../../sim/current/source.ts';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';

/**
 * Sums of N terms of size S, each rounded, give at most N * S * 2^-53 in the mean of N terms, and the relative error of
 * a root is half of that. For N <= 4000 that is below this share of S.
 */
export const SUMMED = 5e-13;

export function points(spec: CurrentSpec, stepSeconds: number, count: number): Float64Array {
  const amperes = new Float64Array(count);
  const source = openCurrent(spec, stepSeconds, '.');
  source.next(amperes, count);
  expect(source.endSeconds).toBe(null);
  source.close();
  return amperes;
}

/** The points behind the first `skip`, without keeping those. */
export function pointsFrom(spec: CurrentSpec, stepSeconds: number, skip: number, count: number): Float64Array {
  const source = openCurrent(spec, stepSeconds, '.');
  const block = new Float64Array(Math.max(count, 65536));
  for (let left = skip; left > 0;) {
    const some = Math.min(left, block.length);
    source.next(block, some);
    left -= some;
  }
  source.next(block, count);
  source.close();
  return block.slice(0, count);
}

export function statistics(amperes: Float64Array): { mean: number; meanSquare: number; rms: number } {
  let sum = 0;
  let squares = 0;
  for (const value of amperes) {
    sum += value;
    squares += value * value;
  }
  const meanSquare = squares / amperes.length;
  return { mean: sum / amperes.length, meanSquare, rms: Math.sqrt(meanSquare) };
}

/** Share of the scale of `expected`, at least 1. */
export function expectNear(actual: number, expected: number, tolerance: number): void {
  expect(Math.abs(actual - expected)).toBeLessThanOrEqual(tolerance * Math.max(1, Math.abs(expected)));
}
