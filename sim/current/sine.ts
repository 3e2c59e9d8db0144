/** offset + peak * sin(2 pi (f t + phase / 360)). */
import { NoSwing } from './noswing.ts';
import { GridPhase, sineOfCycles } from './phase.ts';
import type { ShapeSpec } from './shape.ts';

export class Sine extends NoSwing {
  private readonly peak: number;
  private readonly offset: number;
  private readonly startPhase: number;
  private readonly phase: GridPhase;
  private point = 0;

  constructor({ peak_A, frequency_Hz, offset_A, phase_deg }: ShapeSpec<'sine'>, stepSeconds: number) {
    super();
    this.peak = peak_A;
    this.offset = offset_A;
    this.startPhase = phase_deg / 360;
    this.phase = new GridPhase(frequency_Hz, stepSeconds);
  }

  next(amperes: Float64Array, count: number): void {
    const { phase, startPhase, peak, offset, point } = this;
    for (let i = 0; i < count; i++) amperes[i] = offset + peak * sineOfCycles(phase.at(point + i) + startPhase);
    this.point = point + count;
  }
}
