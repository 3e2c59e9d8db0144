/**
 * Where the current of a scenario comes from: a computed shape or a recorded file, point by point on the grid of the
 * analog side. Grid point n stands at n * stepSeconds, computed from the whole number n, so nothing accumulates and
 * how the calls cut the grid changes no value.
 */
import type { CurrentSpec } from '../probe/fields.ts';
import { Harmonics } from './harmonics.ts';
import { Inrush } from './inrush.ts';
import { Motor } from './motor.ts';
import { PhaseCut } from './phasecut.ts';
import { PulseWidth } from './pwm.ts';
import { pulse, ramp, staircase, step } from './ramps.ts';
import { RecordedCurrent } from './recorded.ts';
import { Ripple } from './ripple.ts';
import { Sine } from './sine.ts';
import { Steady } from './steady.ts';
import { Sum } from './sum.ts';
import { Sweep } from './sweep.ts';

export interface CurrentSource {
  /** Writes the current (A) at the next `count` points of the grid; consecutive calls go on in time. */
  next(amperes: Float64Array, count: number): void;
  /** Writes dv/dt of the conductor (V/s) at the first `count` points of the last `next`. */
  slew(voltsPerSecond: Float64Array, count: number): void;
  /** false: the slew is zero throughout. */
  readonly swings: boolean;
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
    case 'harmonics': return new Harmonics(spec, stepSeconds);
    case 'ripple': return new Ripple(spec, stepSeconds);
    case 'inrush': return new Inrush(spec, stepSeconds);
    case 'motor': return new Motor(spec, stepSeconds);
    case 'pulse': return pulse(spec, stepSeconds);
    case 'ramp': return ramp(spec, stepSeconds);
    case 'sweep': return new Sweep(spec, stepSeconds);
    case 'phaseCut': return new PhaseCut(spec, stepSeconds);
    case 'sum': return new Sum(openParts(spec.parts, stepSeconds, folder), spec.times);
  }
}

/** A part that cannot be opened must not leave the files of those before it open. */
function openParts(specs: readonly CurrentSpec[], stepSeconds: number, folder: string): CurrentSource[] {
  const parts: CurrentSource[] = [];
  try {
    for (const spec of specs) parts.push(openCurrent(spec, stepSeconds, folder));
  } catch (error) {
    for (const part of parts) part.close();
    throw error;
  }
  return parts;
}
