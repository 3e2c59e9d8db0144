/** offset + peak * sin(2 pi (f t + phase / 360)). */
import { GridPhase } from './phase.ts';
import type { ShapeSpec } from './shape.ts';
import type { CurrentSource } from './source.ts';

export class Sine implements CurrentSource {
  readonly endSeconds = null;
  private readonly peak: number;
  private readonly offset: number;
  private readonly startPhase: number;
  private readonly phase: GridPhase;
  private point = 0;

  constructor({ peak_A, frequency_Hz, offset_A, phase_deg }: ShapeSpec<'sine'>, stepSeconds: number) {
    this.peak = peak_A;
    this.offset = offset_A;
    this.startPhase = phase_deg / 360;
    this.phase = new GridPhase(frequency_Hz, stepSeconds);
  }

  next(amperes: Float64Array, count: number): void {
    const { phase, startPhase, peak, offset, point } = this;
    for (let i = 0; i < count; i++) {
      const cycles = phase.at(point + i) + startPhase;
      // the half turn nearest to zero, where the rounding of 2 pi weighs least
      amperes[i] = offset + peak * Math.sin(2 * Math.PI * (cycles - Math.round(cycles)));
    }
    this.point = point + count;
  }

  close(): void {}
}
