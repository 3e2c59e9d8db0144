/**
 * First-order low-pass, exact at the grid points for an input that is a straight line between them (first-order hold):
 *   y1 = x1 - tau*s + (y0 - x0 + tau*s)*exp(-h/tau),  s = (x1 - x0)/h,  tau = 1/(2 pi cornerHz)
 * written as y1 = y0 + k1*(x1 - y0) + k0*(x0 - y0), so that a constant stays exactly that constant.
 * White noise at the input is no straight line: it is added to the output by its exact recursion (the Ornstein-
 * Uhlenbeck process), standard deviation density*sqrt(pi/2*cornerHz) at any step. Fed to the input on the grid it would
 * keep only 1 - r/2 + r^2/6 of its power, r = h/tau: 17 % lost at 16 steps for one period of the corner.
 * Starts in steady state at the first sample. Sources: textbook linear systems; D. T. Gillespie, "Exact numerical
 * simulation of the Ornstein-Uhlenbeck process and its integral", Phys. Rev. E 54 (1996) 2084.
 */
export interface PoleWeights {
  /** exp(-h/tau) */
  keep: number;
  /** weight of the new input */
  k1: number;
  /** weight of the input before */
  k0: number;
}

export function poleWeights(cornerHz: number, stepSeconds: number): PoleWeights {
  const r = 2 * Math.PI * cornerHz * stepSeconds;
  const moved = -Math.expm1(-r);
  const k1 = newInputWeight(r, moved);
  return { keep: Math.exp(-r), k1, k0: moved - k1 };
}

/** 1 - (1 - exp(-r))/r; by its series where that would cancel (9 terms: 5e-17 relative at r = 0.1). */
function newInputWeight(r: number, moved: number): number {
  if (r > 0.1) return 1 - moved / r;
  let sum = 0;
  for (let n = 10; n >= 2; n--) sum = (1 - sum) * (r / n);
  return sum;
}

export class Pole {
  private readonly keep: number;
  private readonly k1: number;
  private readonly k0: number;
  private readonly cornerHz: number;
  private x0 = 0;
  private y0 = 0;
  private started = false;

  constructor(cornerHz: number, stepSeconds: number) {
    const weights = poleWeights(cornerHz, stepSeconds);
    this.cornerHz = cornerHz;
    this.keep = weights.keep;
    this.k1 = weights.k1;
    this.k0 = weights.k0;
  }

  reset(): void {
    this.started = false;
  }

  process(values: Float64Array, count: number): void {
    if (count === 0) return;
    this.begin(values[0], 0);
    const { k1, k0 } = this;
    let x0 = this.x0;
    let y0 = this.y0;
    for (let i = 0; i < count; i++) {
      const x1 = values[i];
      y0 += k1 * (x1 - y0) + k0 * (x0 - y0);
      x0 = x1;
      values[i] = y0;
    }
    this.x0 = x0;
    this.y0 = y0;
  }

  /** White noise of `density` (unit of the values per root hertz, one-sided) at the input; `normals` are its draws. */
  processNoisy(values: Float64Array, count: number, density: number, normals: Float64Array): void {
    if (count === 0) return;
    const deviation = density * Math.sqrt(0.5 * Math.PI * this.cornerHz);
    const first = this.started ? 0 : 1;
    if (first === 1) {
      this.begin(values[0], deviation * normals[0]);
      values[0] = this.y0;
    }
    const fresh = deviation * Math.sqrt((1 - this.keep) * (1 + this.keep));
    const { k1, k0 } = this;
    let x0 = this.x0;
    let y0 = this.y0;
    for (let i = first; i < count; i++) {
      const x1 = values[i];
      y0 += k1 * (x1 - y0) + k0 * (x0 - y0) + fresh * normals[i];
      x0 = x1;
      values[i] = y0;
    }
    this.x0 = x0;
    this.y0 = y0;
  }

  private begin(input: number, stationaryNoise: number): void {
    if (this.started) return;
    this.started = true;
    this.x0 = input;
    this.y0 = input + stationaryNoise;
  }
}
