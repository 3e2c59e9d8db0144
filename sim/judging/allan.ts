/**
 * Allan deviations of equally spaced values y, averaging factor m, N values:
 *   ADEV   sqrt(1/2 <(Y[k+1] - Y[k])^2>), Y the means of successive groups of m
 *   OADEV  the same over groups that begin at every value
 *   MDEV   OADEV with the differences averaged over m neighbours before they are squared
 * AllanStream gives OADEV at one averaging time from a stream: groups that begin at every block of b values, at most
 * 256 blocks in an averaging time, so memory depends on neither tau nor duration (b = 1: exactly OADEV).
 * Source: W. J. Riley, Handbook of Frequency Stability Analysis, NIST SP 1065 (2008), sections 5.2.3 to 5.2.5.
 */
export function allanDeviation(values: ArrayLike<number>, m: number): number {
  return deviation(values, m, m);
}

export function overlappingAllanDeviation(values: ArrayLike<number>, m: number): number {
  return deviation(values, m, 1);
}

export function modifiedAllanDeviation(values: ArrayLike<number>, m: number): number {
  const sums = prefixSums(values);
  const terms = values.length - 3 * m + 2;
  requireTerms(terms, values.length, m);
  // sum over i in j..j+m-1 of sums[i+2m] - 2 sums[i+m] + sums[i], moved on by one value at a time
  const second = (i: number): number => sums[i + 2 * m] - 2 * sums[i + m] + sums[i];
  let inner = 0;
  for (let i = 0; i < m; i++) inner += second(i);
  let squares = 0;
  for (let j = 0; j < terms; j++) {
    if (j > 0) inner += second(j + m - 1) - second(j - 1);
    squares += inner * inner;
  }
  return Math.sqrt(squares / (2 * m ** 4 * terms));
}

function deviation(values: ArrayLike<number>, m: number, stride: number): number {
  const sums = prefixSums(values);
  let terms = 0;
  let squares = 0;
  for (let j = 0; j + 2 * m <= values.length; j += stride) {
    const difference = sums[j + 2 * m] - 2 * sums[j + m] + sums[j];
    squares += difference * difference;
    terms++;
  }
  requireTerms(terms, values.length, m);
  return Math.sqrt(squares / (2 * m * m * terms));
}

/** Of the distances from the first value: a large common level would cost digits. */
function prefixSums(values: ArrayLike<number>): Float64Array {
  const sums = new Float64Array(values.length + 1);
  for (let i = 0; i < values.length; i++) sums[i + 1] = sums[i] + (values[i] - values[0]);
  return sums;
}

function requireTerms(terms: number, length: number, m: number): void {
  if (!Number.isInteger(m) || m < 1) throw new RangeError(`m: found ${m}, allowed an integer from 1`);
  if (terms < 1) throw new RangeError(`m: found ${m}, allowed an averaging factor that ${length} values can support`);
}

const MOST_BLOCKS = 256;

export class AllanStream {
  /** Values in a block, and blocks in an averaging time: together as near to the wanted values as blocks allow. */
  readonly blockValues: number;
  readonly blocks: number;
  count = 0;
  private readonly full: Squares;
  private readonly half: Squares | null;
  /** Sums of whole blocks up to the last 2 * blocks + 1 block ends. */
  private readonly ends: Float64Array;
  private first = 0;
  private sum = 0;
  private inBlock = 0;
  private done = 0;

  /** `values`: values in an averaging time. */
  constructor(values: number) {
    if (!Number.isInteger(values) || values < 1) {
      throw new RangeError(`values: found ${values}, allowed an integer from 1`);
    }
    this.blockValues = Math.ceil(values / MOST_BLOCKS);
    this.blocks = Math.round(values / this.blockValues);
    this.full = new Squares(this.blocks);
    this.half = this.blocks < 2 ? null : new Squares(Math.floor(this.blocks / 2));
    this.ends = new Float64Array(2 * this.blocks + 1);
  }

  hear(value: number): void {
    if (this.count === 0) this.first = value;
    this.count++;
    this.sum += value - this.first;
    if (++this.inBlock < this.blockValues) return;
    this.inBlock = 0;
    this.done++;
    // sums start anew at 0 every time the ring is full, or they would grow with the duration and lose digits
    const { ends } = this;
    const at = this.done % ends.length;
    if (at === 0) {
      const base = ends[1];
      for (let i = 1; i < ends.length; i++) ends[i] -= base;
      this.sum -= base;
    }
    ends[at] = this.sum;
    this.full.hear(ends, this.done);
    this.half?.hear(ends, this.done);
  }

  /** NaN while the record is shorter than two averaging times. */
  deviation(): number {
    return this.full.deviation(this.blockValues);
  }

  /** log2 of the deviation at tau over that at about half of it, for an octave: -1/2 is white noise; NaN: unknown. */
  slope(): number {
    if (this.half === null) return NaN;
    const octaves = Math.log2(this.blocks / this.half.blocks);
    return Math.log2(this.deviation() / this.half.deviation(this.blockValues)) / octaves;
  }
}

/** Sum of squared second differences of the block sums, at one number of blocks. */
class Squares {
  private terms = 0;
  private squares = 0;

  constructor(readonly blocks: number) {}

  hear(ends: Float64Array, done: number): void {
    if (done < 2 * this.blocks) return;
    const size = ends.length;
    const middle = ends[(done - this.blocks) % size];
    const difference = ends[done % size] - 2 * middle + ends[(done - 2 * this.blocks) % size];
    this.squares += difference * difference;
    this.terms++;
  }

  deviation(blockValues: number): number {
    const values = this.blocks * blockValues;
    return Math.sqrt(this.squares / (2 * values * values * this.terms));
  }
}

/** The noise that a slope of the Allan deviation in log-log scale stands for (IEEE Std 952, annex C). */
export function slopeWords(slope: number): string {
  if (Number.isNaN(slope)) return 'of a slope that is not known';
  const shown = (slope < 0 ? '−' : '+') + Math.abs(slope).toFixed(2);
  const [, words] = SLOPES.find(([upTo]) => slope < upTo)!;
  return `with a slope of ${shown} towards tau: ${words}`;
}

const SLOPES: readonly [number, string][] = [
  [-0.75, 'quantisation or ripple, a longer averaging time helps in proportion'],
  [-0.25, 'white noise, a longer averaging time helps by its square root'],
  [0.25, 'flicker noise (1/f), a longer averaging time does not help'],
  [0.75, 'a random walk of the zero, a longer averaging time makes it worse'],
  [Infinity, 'drift, a longer averaging time makes it worse in proportion'],
];
