/**
 * A sine whose frequency goes from one value to another evenly in octaves, x = ln(to / from), T = over:
 *   f(t) = from * exp(x t / T),  phase(t) = from * T / x * (exp(x t / T) - 1)  cycles
 * (exponential swept sine; A. Farina, "Simultaneous measurement of impulse response and distortion with a swept-sine
 * technique", AES Convention 108, 2000), and on with the last frequency behind T, in phase. The phase is computed for
 * each point and not accumulated: fewer than ten roundings each of x t / T and of the product, so up to T it is off by
 * less than 2^-49 * (phase(t) + f(t) t), and does not grow behind it.
 */
import { NoSwing } from './noswing.ts';
import { GridPhase, phaseAfter, sineOfCycles } from './phase.ts';
import { gridPlace } from './place.ts';
import type { ShapeSpec } from './shape.ts';

export class Sweep extends NoSwing {
  private readonly peak: number;
  private readonly offset: number;
  private readonly end: number; // grid steps
  private readonly perStep: number; // growth of ln f
  private readonly cycles: number; // from * T / x
  /** Behind the end; all along when the frequency does not change. */
  private readonly lastPhase: GridPhase;
  private readonly lastShift: number;
  private point = 0;

  constructor({ peak_A, from_Hz, to_Hz, over_ms, offset_A }: ShapeSpec<'sweep'>, stepSeconds: number) {
    super();
    const seconds = over_ms / 1e3;
    // what rounding the quotient costs matters nowhere: where the growth is small the phase hardly depends on it
    const growth = Math.log(to_Hz / from_Hz);
    this.peak = peak_A;
    this.offset = offset_A;
    this.end = growth === 0 ? 0 : gridPlace(seconds, stepSeconds);
    this.perStep = (growth * stepSeconds) / seconds;
    this.cycles = (from_Hz * seconds) / growth;
    this.lastPhase = new GridPhase(to_Hz, stepSeconds);
    this.lastShift = growth === 0 ? 0 : this.cycles * Math.expm1(growth) - phaseAfter(to_Hz, seconds);
  }

  next(amperes: Float64Array, count: number): void {
    const { peak, offset, end, perStep, cycles, lastPhase, lastShift, point } = this;
    const sweeping = Math.min(count, Math.max(0, Math.ceil(end) - point));
    for (let i = 0; i < sweeping; i++) {
      amperes[i] = offset + peak * sineOfCycles(cycles * Math.expm1((point + i) * perStep));
    }
    for (let i = sweeping; i < count; i++) {
      amperes[i] = offset + peak * sineOfCycles(lastPhase.at(point + i) + lastShift);
    }
    this.point = point + count;
  }
}
