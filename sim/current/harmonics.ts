/**
 * A fundamental and its harmonics, theta = 2 pi f t:
 *   offset + peak * (sin(theta) + sum of percent[k] / 100 * sin(k theta + phase[k])),  k = 2, 3, ...
 * as the imaginary part of a polynomial in z = exp(i theta), by Horner: one sine and one cosine a point, and with
 * |z| = 1 no harmonic's rounding grows. The phase of harmonic k is off by at most k * 2^-51 of its period (phase.ts).
 */
import { NoSwing } from './noswing.ts';
import { cosineOfCycles, GridPhase, sineOfCycles } from './phase.ts';
import type { ShapeSpec } from './shape.ts';

export class Harmonics extends NoSwing {
  private readonly offset: number;
  private readonly inPhase: Float64Array; // of harmonics 1, 2, ...
  private readonly ahead: Float64Array;
  private readonly phase: GridPhase;
  private point = 0;

  constructor(spec: ShapeSpec<'harmonics'>, stepSeconds: number) {
    super();
    const { peak_A, frequency_Hz, offset_A, percents, phases_deg } = spec;
    if (phases_deg.length > percents.length) {
      throw new RangeError(`phases_deg: found ${phases_deg.length} phases, allowed at most ${percents.length}, one ` +
        'for each harmonic (percents)');
    }
    this.offset = offset_A;
    this.phase = new GridPhase(frequency_Hz, stepSeconds);
    this.inPhase = new Float64Array(percents.length + 1);
    this.ahead = new Float64Array(percents.length + 1);
    this.inPhase[0] = peak_A;
    percents.forEach((percent, index) => {
      const peak = (peak_A * percent) / 100;
      const cycles = (phases_deg[index] ?? 0) / 360;
      this.inPhase[index + 1] = peak * cosineOfCycles(cycles);
      this.ahead[index + 1] = peak * sineOfCycles(cycles);
    });
  }

  next(amperes: Float64Array, count: number): void {
    const { phase, offset, inPhase, ahead, point } = this;
    const highest = inPhase.length - 1;
    for (let i = 0; i < count; i++) {
      const cycles = phase.at(point + i);
      const cosine = cosineOfCycles(cycles);
      const sine = sineOfCycles(cycles);
      let real = inPhase[highest];
      let imaginary = ahead[highest];
      for (let k = highest - 1; k >= 0; k--) {
        const turned = real * cosine - imaginary * sine;
        imaginary = real * sine + imaginary * cosine + ahead[k];
        real = turned + inPhase[k];
      }
      amperes[i] = offset + real * sine + imaginary * cosine;
    }
    this.point = point + count;
  }
}
