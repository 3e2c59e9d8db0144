/**
 * Pulse-width modulated current: a trapezoid between low and high with linear edges. Phase 0 is the middle of the
 * rising edge, so the current is halfway at t = 0; the middle of the falling edge comes after duty_percent of the
 * period. Edges are centred, so their duration does not change the mean: low + (high - low) * duty. Duty 0 and 100 %
 * are steady. Edges of zero length: high from phase 0 on, low from phase duty on.
 *
 * The voltage of the conductor makes the same trapezoid of height swing_V, up where the current goes up. Its slew at
 * point n is the mean of dv/dt over the step around it, (v(n + 1/2) - v(n - 1/2)) / stepSeconds: dv/dt itself inside an
 * edge, and with an area of exactly one swing for each edge, however short against the step.
 */
import { GridPhase } from './phase.ts';
import { ROUNDING, type ShapeSpec } from './shape.ts';
import type { CurrentSource } from './source.ts';

/**
 * Periods by which a grid point may stand before a jump and still belong behind it: a step of 1 / rate is rounded, and
 * without this an edge that falls on the grid would jitter by a point. Enough for the first 1e6 periods, at least.
 */
const ON_THE_EDGE = 1e-9;

export class PulseWidth implements CurrentSource {
  readonly endSeconds = null;
  readonly swings: boolean;
  private readonly low: number;
  private readonly high: number;
  private readonly duty: number;
  private readonly edge: number; // in periods
  private readonly phase: GridPhase;
  private readonly halfStepPhase: GridPhase;
  private readonly slewPerShare: number; // V/s
  private first = 0; // of the last call
  private point = 0;

  constructor(spec: ShapeSpec<'pwm'>, stepSeconds: number) {
    const { low_A, high_A, frequency_Hz, duty_percent, edge_us, swing_V } = spec;
    this.low = low_A;
    this.high = high_A;
    this.duty = duty_percent / 100;
    this.phase = new GridPhase(frequency_Hz, stepSeconds);
    this.halfStepPhase = new GridPhase(frequency_Hz, stepSeconds / 2);
    this.slewPerShare = (Math.sign(high_A - low_A) * swing_V) / stepSeconds;
    this.swings = this.slewPerShare !== 0 && duty_percent > 0 && duty_percent < 100;
    const shorter = Math.min(duty_percent, 100 - duty_percent) / 100;
    const edge = edge_us * 1e-6 * frequency_Hz;
    if (shorter > 0 && edge > shorter * (1 + ROUNDING)) {
      const most = (shorter / frequency_Hz) * 1e6;
      throw new RangeError(`edge_us: found ${edge_us}, allowed at most ${most}, the shorter of on and off time ` +
        `at ${frequency_Hz} Hz and ${duty_percent} %`);
    }
    this.edge = Math.min(edge, shorter);
  }

  next(amperes: Float64Array, count: number): void {
    if (this.duty === 0 || this.duty === 1) amperes.fill(this.duty === 0 ? this.low : this.high, 0, count);
    else if (this.edge <= ON_THE_EDGE) this.jumps(amperes, count);
    else this.ramps(amperes, count);
    this.first = this.point;
    this.point += count;
  }

  slew(voltsPerSecond: Float64Array, count: number): void {
    const { halfStepPhase, slewPerShare, first } = this;
    if (!this.swings) {
      voltsPerSecond.fill(0, 0, count);
      return;
    }
    let before = this.shareAt(halfStepPhase.at(2 * first - 1));
    for (let i = 0; i < count; i++) {
      const after = this.shareAt(halfStepPhase.at(2 * (first + i) + 1));
      voltsPerSecond[i] = (after - before) * slewPerShare;
      before = after;
    }
  }

  close(): void {}

  /** 0 at the low level, 1 at the high one. */
  private shareAt(phase: number): number {
    const { duty, edge } = this;
    if (edge <= ON_THE_EDGE) return phase + ON_THE_EDGE < duty || phase + ON_THE_EDGE >= 1 ? 1 : 0;
    const half = edge / 2;
    if (phase < half) return 0.5 + phase / edge;
    if (phase <= duty - half) return 1;
    if (phase < duty + half) return 0.5 - (phase - duty) / edge;
    return phase <= 1 - half ? 0 : 0.5 + (phase - 1) / edge;
  }

  private jumps(amperes: Float64Array, count: number): void {
    const { phase, low, high, duty, point } = this;
    for (let i = 0; i < count; i++) {
      const at = phase.at(point + i) + ON_THE_EDGE;
      amperes[i] = at < duty || at >= 1 ? high : low;
    }
  }

  private ramps(amperes: Float64Array, count: number): void {
    const { phase, low, high, duty, edge, point } = this;
    const half = edge / 2;
    const middle = low + (high - low) / 2;
    const slope = (high - low) / edge;
    for (let i = 0; i < count; i++) {
      const at = phase.at(point + i);
      if (at < half) amperes[i] = middle + at * slope;
      else if (at <= duty - half) amperes[i] = high;
      else if (at < duty + half) amperes[i] = middle - (at - duty) * slope;
      else if (at <= 1 - half) amperes[i] = low;
      else amperes[i] = middle + (at - 1) * slope;
    }
  }
}
