/**
 * A direct-current motor switched on, and later blocked. A standing rotor draws stall_A, a turning one less by its
 * back EMF; with the winding much faster than the rotor both lags are exponentials of their own. t from switch-on:
 *   run + (stall - run) * exp(-t / runUp) - stall * exp(-t / electrical)
 * and t from the blocking, at which the current was i0:
 *   stall + (i0 - stall) * exp(-t / electrical)
 * Before switch-on there is none. An electrical time constant of zero makes both jumps.
 * Source: the two-pole response of the permanent-magnet machine with its poles apart, as in any drives textbook.
 */
import { NoSwing } from './noswing.ts';
import { gridPlace } from './place.ts';
import type { ShapeSpec } from './shape.ts';

export class Motor extends NoSwing {
  private readonly stall: number;
  private readonly run: number;
  private readonly runUp: number; // time constants in a step
  private readonly electrical: number;
  private readonly begin: number; // grid steps
  private readonly blocked: number;
  private readonly blockedAmperes: number;
  private point = 0;

  constructor(spec: ShapeSpec<'motor'>, stepSeconds: number) {
    super();
    const { stall_A, run_A, runUp_ms, electrical_ms, at_ms, stallAt_ms } = spec;
    if (stallAt_ms !== null && stallAt_ms < at_ms) {
      throw new RangeError(`stallAt_ms: found ${stallAt_ms}, allowed at_ms (${at_ms}) or later`);
    }
    this.stall = stall_A;
    this.run = run_A;
    this.runUp = (stepSeconds * 1e3) / runUp_ms;
    this.electrical = (stepSeconds * 1e3) / electrical_ms;
    this.begin = gridPlace(at_ms / 1e3, stepSeconds);
    this.blocked = stallAt_ms === null ? Infinity : gridPlace(stallAt_ms / 1e3, stepSeconds);
    this.blockedAmperes = stallAt_ms === null ? NaN : this.turning(this.blocked);
  }

  next(amperes: Float64Array, count: number): void {
    const { begin, blocked, point } = this;
    for (let i = 0; i < count; i++) {
      const n = point + i;
      amperes[i] = n < begin ? 0 : n < blocked ? this.turning(n) : this.standing(n);
    }
    this.point = point + count;
  }

  private turning(n: number): number {
    const { stall, run, begin } = this;
    return run + (stall - run) * Math.exp((begin - n) * this.runUp) - stall * this.lag(n - begin);
  }

  private standing(n: number): number {
    return this.stall + (this.blockedAmperes - this.stall) * this.lag(n - this.blocked);
  }

  /** exp(-t / electrical); without a lag it is over at once. */
  private lag(steps: number): number {
    return this.electrical === Infinity ? 0 : Math.exp(-steps * this.electrical);
  }
}
