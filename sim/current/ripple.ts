/**
 * Current of a converter inductor: a triangle on a direct current, rising for duty_percent of the period and falling
 * for the rest. Phase 0 is the middle of the rise, so the current begins at its mean. Its RMS is
 *   sqrt(mean^2 + peakToPeak^2 / 12), whatever the duty
 */
import { NoSwing } from './noswing.ts';
import { GridPhase } from './phase.ts';
import type { ShapeSpec } from './shape.ts';

export class Ripple extends NoSwing {
  private readonly mean: number;
  private readonly peakToPeak: number;
  private readonly duty: number;
  private readonly phase: GridPhase;
  private point = 0;

  constructor({ mean_A, peakToPeak_A, frequency_Hz, duty_percent }: ShapeSpec<'ripple'>, stepSeconds: number) {
    super();
    this.mean = mean_A;
    this.peakToPeak = peakToPeak_A;
    this.duty = duty_percent / 100;
    this.phase = new GridPhase(frequency_Hz, stepSeconds);
  }

  next(amperes: Float64Array, count: number): void {
    const { phase, mean, duty, point } = this;
    const half = duty / 2;
    const rise = this.peakToPeak / duty; // A in a period
    const fall = this.peakToPeak / (1 - duty);
    for (let i = 0; i < count; i++) {
      const at = phase.at(point + i);
      if (at < half) amperes[i] = mean + at * rise;
      else if (at <= 1 - half) amperes[i] = mean - (at - 0.5) * fall;
      else amperes[i] = mean + (at - 1) * rise;
    }
    this.point = point + count;
  }
}
