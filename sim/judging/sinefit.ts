/**
 * Four-parameter sine fit y = A cos(w t) + B sin(w t) + C with A, B, C and w by least squares (IEEE Std 1057,
 * annex on four-parameter fits), streamed in two passes with memory that does not depend on the record.
 *   pass 1  normal equations in cos, sin, 1, u cos, u sin around the start frequency: the three-parameter fit, and from
 *           it one step of the frequency, whose column -A t sin + B t cos is made of the last two
 *   pass 2  the same at the new frequency for what is left when the fit of pass 1 is taken away: small numbers, so the
 *           residual loses no digits; its step of the frequency tells whether the iteration has converged
 * Time is counted from the middle of the record, u is that time over half the record. NAD is the RMS of the residual
 * over all M readings.
 */
export interface SineParts {
  /** At the middle of the record: A cos + B sin + C. */
  cosine: number;
  sine: number;
  offset: number;
  radiansPerSecond: number;
  amplitude: number;
  /** Of amplitude * sin(w t + phase), t from the middle of the record. */
  phaseRadians: number;
  residualRms: number;
  count: number;
}

/** The second step may turn the phase by so much over the record; what is left then is its square. */
const MOST_LAST_STEP_RADIANS = 1e-3;
/** A first step beyond this is no small correction any more: the start frequency was wrong, or there is no sine. */
const MOST_FIRST_STEP_RADIANS = Math.PI / 2;

export class SineFit {
  private readonly middleSeconds: number;
  private readonly halfSeconds: number;
  private readonly first = new Normal();
  private readonly second = new Normal();
  private firstFit: Step | null = null;
  private concluded = false;
  private radiansPerSecond: number;

  constructor(startHz: number, fromSeconds: number, toSeconds: number) {
    if (!(startHz > 0 && toSeconds > fromSeconds)) {
      throw new RangeError(`sine fit: found ${startHz} Hz from ${fromSeconds} s to ${toSeconds} s, allowed a frequency and a time above 0`);
    }
    this.middleSeconds = (fromSeconds + toSeconds) / 2;
    this.halfSeconds = (toSeconds - fromSeconds) / 2;
    this.radiansPerSecond = 2 * Math.PI * startHz;
  }

  hear(seconds: number, value: number, pass: number): void {
    const t = seconds - this.middleSeconds;
    if (pass === 2 && !this.concluded) this.conclude();
    const angle = this.radiansPerSecond * t;
    const cosine = Math.cos(angle);
    const sine = Math.sin(angle);
    const { firstFit } = this;
    if (pass === 1) {
      this.first.hear(cosine, sine, t / this.halfSeconds, value);
    } else if (firstFit !== null) {
      const rest = value - firstFit.cosine * cosine - firstFit.sine * sine - firstFit.offset;
      this.second.hear(cosine, sine, t / this.halfSeconds, rest);
    }
  }

  /** A string says why there is no fit. */
  result(): SineParts | string {
    const { firstFit, second, halfSeconds } = this;
    const step = firstFit === null ? null : second.step(firstFit.cosine, firstFit.sine);
    if (firstFit === null || step === null) return 'the readings of the record do not determine a sine';
    const firstTurn = Math.abs(firstFit.radians) * 2;
    const lastTurn = Math.abs(step.radians) * 2;
    if (!(firstTurn <= MOST_FIRST_STEP_RADIANS && lastTurn <= MOST_LAST_STEP_RADIANS)) {
      return `the sine fit does not converge: its frequency moves by ${firstTurn.toPrecision(3)} rad over the record in the ` +
        `first step and by ${lastTurn.toPrecision(3)} rad in the second, allowed are ` +
        `${MOST_FIRST_STEP_RADIANS.toPrecision(3)} and ${MOST_LAST_STEP_RADIANS}`;
    }
    const cosine = firstFit.cosine + step.cosine;
    const sine = firstFit.sine + step.sine;
    return {
      cosine, sine, offset: firstFit.offset + step.offset, radiansPerSecond: this.radiansPerSecond + step.radians / halfSeconds,
      amplitude: Math.hypot(cosine, sine), phaseRadians: Math.atan2(cosine, sine),
      residualRms: Math.sqrt(Math.max(0, step.squares) / second.count), count: second.count,
    };
  }

  private conclude(): void {
    this.concluded = true;
    const start = this.first.threeParameters();
    if (start === null) return;
    this.firstFit = this.first.step(start[0], start[1]);
    if (this.firstFit !== null) this.radiansPerSecond += this.firstFit.radians / this.halfSeconds;
  }
}

interface Step {
  cosine: number;
  sine: number;
  offset: number;
  /** Change of the angle at the end of the record, counted from its middle. */
  radians: number;
  /** Sum of the squares that are left. */
  squares: number;
}

const COLUMNS = 5;

/** Sums of products of cos, sin, 1, u cos, u sin and the value. */
class Normal {
  count = 0;
  private readonly products = new Float64Array(COLUMNS * COLUMNS);
  private readonly withValue = new Float64Array(COLUMNS);
  private squares = 0;
  private readonly row = new Float64Array(COLUMNS);

  hear(cosine: number, sine: number, u: number, value: number): void {
    const { row, products, withValue } = this;
    row[0] = cosine;
    row[1] = sine;
    row[2] = 1;
    row[3] = u * cosine;
    row[4] = u * sine;
    for (let i = 0; i < COLUMNS; i++) {
      for (let j = 0; j <= i; j++) products[i * COLUMNS + j] += row[i] * row[j];
      withValue[i] += row[i] * value;
    }
    this.squares += value * value;
    this.count++;
  }

  threeParameters(): number[] | null {
    // at half the rate one of the two columns is all zero but for rounding
    if (Math.min(this.product(0, 0), this.product(1, 1)) < 1e-6 * this.count) return null;
    return solve([0, 1, 2].map((i) => [...[0, 1, 2].map((j) => this.product(i, j)), this.withValue[i]]));
  }

  /** Four parameters, the frequency's column taken at the amplitudes A and B. */
  step(a: number, b: number): Step | null {
    // each of the four columns as a mixture of the five that were summed
    const mixtures = [[1, 0, 0, 0, 0], [0, 1, 0, 0, 0], [0, 0, 1, 0, 0], [0, 0, 0, b, -a]];
    const rows = mixtures.map((one) => [...mixtures.map((other) => this.mixed(one, other)), this.mixedWithValue(one)]);
    const found = solve(rows);
    if (found === null) return null;
    const explained = found.reduce((sum, value, i) => sum + value * this.mixedWithValue(mixtures[i]), 0);
    return { cosine: found[0], sine: found[1], offset: found[2], radians: found[3], squares: this.squares - explained };
  }

  private product(i: number, j: number): number {
    return this.products[Math.max(i, j) * COLUMNS + Math.min(i, j)];
  }

  private mixed(one: readonly number[], other: readonly number[]): number {
    let sum = 0;
    for (let i = 0; i < COLUMNS; i++) for (let j = 0; j < COLUMNS; j++) sum += one[i] * other[j] * this.product(i, j);
    return sum;
  }

  private mixedWithValue(one: readonly number[]): number {
    return one.reduce((sum, share, i) => sum + share * this.withValue[i], 0);
  }
}

/**
 * Gauss elimination of a symmetric system with its right side in the last column, scaled by its diagonal; null when
 * two columns cannot be told apart.
 */
function solve(rows: number[][]): number[] | null {
  const size = rows.length;
  const scale = rows.map((row, i) => 1 / Math.sqrt(row[i]));
  if (!scale.every((factor) => Number.isFinite(factor))) return null;
  const m = rows.map((row, i) => row.map((value, j) => value * scale[i] * (j < size ? scale[j] : 1)));
  for (let k = 0; k < size; k++) {
    // positive definite: no exchange of rows is needed, and a pivot near zero means columns that are alike
    if (!(m[k][k] > 1e-9)) return null;
    for (let i = k + 1; i < size; i++) {
      const factor = m[i][k] / m[k][k];
      for (let j = k; j <= size; j++) m[i][j] -= factor * m[k][j];
    }
  }
  const found = new Array<number>(size).fill(0);
  for (let k = size - 1; k >= 0; k--) {
    let value = m[k][size];
    for (let j = k + 1; j < size; j++) value -= m[k][j] * found[j];
    found[k] = value / m[k][k];
  }
  return found.map((value, i) => value * scale[i]);
}
