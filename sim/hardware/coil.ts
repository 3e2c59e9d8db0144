/**
 * Current in the coil for degaussing: a decaying sine from its start on.
 *   i(t) = peak * exp(-d/decay) * sin(2 pi f d),  d = t - start, 0 before
 * Computed from the whole number of the grid point, so that how calls cut the grid changes nothing.
 */
import type { Scenario } from '../probe/fields.ts';

/** exp(-700) is near the smallest double: behind that the current is zero. */
const DECAYS = 700;

export class CoilCurrent {
  private readonly amperes: Float64Array;
  private readonly start: number;
  private readonly end: number;

  /** `capacity`: most grid points in one call. */
  constructor(
    private readonly coil: NonNullable<Scenario['coil']>, private readonly stepSeconds: number, capacity: number,
  ) {
    this.amperes = new Float64Array(capacity);
    this.start = (coil.at_ms * 1e-3) / stepSeconds;
    this.end = this.start + (DECAYS * coil.decay_ms * 1e-3) / stepSeconds;
  }

  /** The current at `count` grid points from `point` on; null where it is zero at all of them. */
  over(point: number, count: number): Float64Array | null {
    const { amperes, start, end, stepSeconds } = this;
    if (point + count <= start || point > end) return null;
    const { peak_A, frequency_Hz, decay_ms } = this.coil;
    const perSecond = 1 / (decay_ms * 1e-3);
    const radians = 2 * Math.PI * frequency_Hz;
    for (let i = 0; i < count; i++) {
      const passed = (point + i - start) * stepSeconds;
      amperes[i] = passed > 0 ? peak_A * Math.exp(-passed * perSecond) * Math.sin(radians * passed) : 0;
    }
    return amperes;
  }
}
