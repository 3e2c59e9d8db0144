/**
 * Mains current behind a dimmer (leading edge): in each half period of peak * sin(2 pi f t) nothing until firing_deg,
 * then an edge from nothing to the sine, linear in time over edge_us, then the sine to its next zero crossing. Fired at
 * the zero crossing itself there is no edge to make, and the sine is whole. Its RMS with an edge of no length is
 *   peak * sqrt((1 - a / pi + sin(2 a) / (2 pi)) / 2),  a the firing angle
 */
import { NoSwing } from './noswing.ts';
import { GridPhase, sineOfCycles } from './phase.ts';
import { ROUNDING, type ShapeSpec } from './shape.ts';

/** Periods by which a point may stand before the firing and still belong behind it; why: as in pwm.ts. */
const ON_THE_EDGE = 1e-9;

export class PhaseCut extends NoSwing {
  private readonly peak: number;
  private readonly firing: number; // in periods
  private readonly edge: number;
  private readonly phase: GridPhase;
  private point = 0;

  constructor({ peak_A, frequency_Hz, firing_deg, edge_us }: ShapeSpec<'phaseCut'>, stepSeconds: number) {
    super();
    this.peak = peak_A;
    this.phase = new GridPhase(frequency_Hz, stepSeconds);
    this.firing = firing_deg / 360;
    this.edge = firing_deg === 0 || firing_deg === 180 ? 0 : edge_us * 1e-6 * frequency_Hz;
    const left = 0.5 - this.firing;
    if (this.edge > left * (1 + ROUNDING)) {
      throw new RangeError(`edge_us: found ${edge_us}, allowed at most ${(left / frequency_Hz) * 1e6}, the time from ` +
        `firing_deg (${firing_deg}°) to the zero crossing at ${frequency_Hz} Hz`);
    }
  }

  next(amperes: Float64Array, count: number): void {
    const { phase, peak, firing, edge, point } = this;
    const fired = edge <= ON_THE_EDGE ? -ON_THE_EDGE : 0;
    for (let i = 0; i < count; i++) {
      const at = phase.at(point + i);
      const inHalf = at < 0.5 ? at : at - 0.5;
      const since = inHalf - firing;
      if (since < fired) amperes[i] = 0;
      else if (since < edge) amperes[i] = peak * sineOfCycles(at) * (since / edge);
      else amperes[i] = peak * sineOfCycles(at);
    }
    this.point = point + count;
  }
}
