/**
 * Where the current of a scenario comes from: a computed shape or a recorded file, point by point on the grid of the
 * analog side. Grid point n stands at n * stepSeconds, computed from the whole number n, so nothing accumulates and
 * how the calls cut the grid changes no value.
 */
import type { CurrentSpec } from '../probe/fields.ts';
import { PulseWidth } from './pwm.ts';
import { staircase, step } from './ramps.ts';
import { RecordedCurrent } from './recorded.ts';
import { Sine } from './sine.ts';
import { Steady } from './steady.ts';

export interface CurrentSource {
  /** Writes the current (A) at the next `count` points of the grid; consecutive calls go on in time. */
  next(amperes: Float64Array, count: number): void;
  /** Length of a recorded current once its last row has been read; null before that, and where there is no end. */
  readonly endSeconds: number | null;
  close(): void;
}

/** `folder`: where the path of a recorded current starts. */
export function openCurrent(spec: CurrentSpec, stepSeconds: number, folder: string): CurrentSource {
  if (!(stepSeconds > 0 && stepSeconds < Infinity)) {
    throw new RangeError(`stepSeconds: found ${stepSeconds}, allowed a finite number above 0`);
  }
  switch (spec.shape) {
    case 'dc': return new Steady(spec.level_A);
    case 'staircase': return staircase(spec, stepSeconds);
    case 'sine': return new Sine(spec, stepSeconds);
    case 'pwm': return new PulseWidth(spec, stepSeconds);
    case 'step': return step(spec, stepSeconds);
    case 'file': return new RecordedCurrent(spec, stepSeconds, folder);
  }
}
