/**
 * Phase of a periodic current at grid point n, as a share of the period in [0, 1):
 *   phase(n) = n * stepSeconds * frequencyHz  modulo 1
 * A plain product loses a bit of phase each time n doubles. Here the product of step and frequency, and its product
 * with n, are kept with their rounding errors (two-product; T. J. Dekker, "A floating-point technique for extending
 * the available precision", 1971), and whole periods fall away before anything is rounded: the error stays below
 * 2^-51 of a period as long as fewer than 2^51 periods have passed.
 */
const SPLITTER = 134217729; // 2^27 + 1: halves of 26 bits, whose products are exact

export class GridPhase {
  private readonly cycles: number; // of a step, rounded
  private readonly cyclesRest: number; // what that rounding lost
  private readonly upper: number;
  private readonly lower: number;

  constructor(frequencyHz: number, stepSeconds: number) {
    this.cycles = frequencyHz * stepSeconds;
    this.cyclesRest = productError(frequencyHz, stepSeconds, this.cycles);
    this.upper = upperHalf(this.cycles);
    this.lower = this.cycles - this.upper;
  }

  at(n: number): number {
    const product = n * this.cycles;
    const scaled = n * SPLITTER;
    const upper = scaled - (scaled - n);
    const lower = n - upper;
    const error = lower * this.lower - (((product - upper * this.upper) - lower * this.upper) - upper * this.lower);
    const phase = (product - Math.floor(product)) + (error + n * this.cyclesRest);
    const reduced = phase - Math.floor(phase);
    return reduced < 1 ? reduced : 0; // a phase a hair below 0 rounds up to 1
  }
}

/** sin(2 pi cycles), in the half turn nearest to zero, where the rounding of 2 pi weighs least. */
export function sineOfCycles(cycles: number): number {
  return Math.sin(2 * Math.PI * (cycles - Math.round(cycles)));
}

export function cosineOfCycles(cycles: number): number {
  return Math.cos(2 * Math.PI * (cycles - Math.round(cycles)));
}

/** frequencyHz * seconds modulo 1, exact to 2^-51 as above. */
export function phaseAfter(frequencyHz: number, seconds: number): number {
  return new GridPhase(frequencyHz, seconds).at(1);
}

function upperHalf(value: number): number {
  const scaled = value * SPLITTER;
  return scaled - (scaled - value);
}

/** a * b - product, exactly. */
function productError(a: number, b: number, product: number): number {
  const aUpper = upperHalf(a);
  const bUpper = upperHalf(b);
  const aLower = a - aUpper;
  const bLower = b - bUpper;
  return aLower * bLower - (((product - aUpper * bUpper) - aLower * bUpper) - aUpper * bLower);
}
