/**
 * The true current, kept just as long as a judge may ask for it: by input sample, the instant value and running sums
 * of the means and mean squares over the samples' periods.
 */
export class Truth {
  private readonly instant: Float64Array;
  private readonly sum: Float64Array;
  private readonly squares: Float64Array;
  private readonly size: number;
  private written = 0;
  private total = 0;
  private totalSquares = 0;

  /** Remembers the last `samples` input samples. */
  constructor(samples: number) {
    this.size = samples + 1;
    this.instant = new Float64Array(this.size);
    this.sum = new Float64Array(this.size);
    this.squares = new Float64Array(this.size);
  }

  push(amperes: number, mean: number, meanSquare: number): void {
    const at = this.written % this.size;
    this.instant[at] = amperes;
    this.total += mean;
    this.totalSquares += meanSquare;
    this.sum[at] = this.total;
    this.squares[at] = this.totalSquares;
    this.written++;
  }

  /** The current at a position between input samples, on the straight line between them; before the start, the first. */
  at(position: number): number {
    if (position <= 0) return this.instantAt(0);
    const before = Math.floor(position);
    const share = position - before;
    const low = this.instantAt(before);
    return share === 0 ? low : low + (this.instantAt(before + 1) - low) * share;
  }

  /** Mean and mean square over the input samples first .. end - 1. */
  over(first: number, end: number): { mean: number; meanSquare: number } {
    const count = end - first;
    return {
      mean: (this.upTo(this.sum, end) - this.upTo(this.sum, first)) / count,
      meanSquare: (this.upTo(this.squares, end) - this.upTo(this.squares, first)) / count,
    };
  }

  private instantAt(index: number): number {
    this.demand(index);
    return this.instant[index % this.size];
  }

  private upTo(sums: Float64Array, end: number): number {
    if (end === 0) return 0;
    this.demand(end - 1);
    return sums[(end - 1) % this.size];
  }

  private demand(index: number): void {
    if (index >= this.written || index < this.written - this.size) {
      throw new RangeError(`truth of input sample ${index}: kept are ${Math.max(0, this.written - this.size)} to ${this.written - 1}`);
    }
  }
}
