/**
 * A current that is highest at switch-on and decays, t from switch-on, zero before:
 *   (steady + (peak - steady) * exp(-t / timeConstant)) * cos(2 pi f t)
 * With mains it is switched on at the crest, so the first point carries peak_A with and without mains (f = 0).
 */
import { NoSwing } from './noswing.ts';
import { cosineOfCycles, GridPhase, phaseAfter } from './phase.ts';
import { gridPlace } from './place.ts';
import type { ShapeSpec } from './shape.ts';

export class Inrush extends NoSwing {
  private readonly steady: number;
  private readonly excess: number;
  private readonly decay: number; // time constants in a step
  private readonly begin: number; // grid steps
  private readonly phase: GridPhase;
  private readonly beginPhase: number;
  private point = 0;

  constructor(spec: ShapeSpec<'inrush'>, stepSeconds: number) {
    super();
    const { peak_A, steady_A, timeConstant_ms, at_ms, frequency_Hz } = spec;
    this.steady = steady_A;
    this.excess = peak_A - steady_A;
    this.decay = stepSeconds / (timeConstant_ms / 1e3);
    this.begin = gridPlace(at_ms / 1e3, stepSeconds);
    this.phase = new GridPhase(frequency_Hz, stepSeconds);
    this.beginPhase = phaseAfter(frequency_Hz, at_ms / 1e3);
  }

  next(amperes: Float64Array, count: number): void {
    const { steady, excess, decay, begin, phase, beginPhase, point } = this;
    const before = Math.min(count, Math.max(0, Math.ceil(begin) - point));
    amperes.fill(0, 0, before);
    for (let i = before; i < count; i++) {
      const n = point + i;
      const envelope = steady + excess * Math.exp((begin - n) * decay);
      amperes[i] = envelope * cosineOfCycles(phase.at(n) - beginPhase);
    }
    this.point = point + count;
  }
}
