/**
 * Parts added, point by point, and times a factor. The voltages of the conductor add up too; a factor changes their
 * sign with that of the current but not their height, as a pwm of as many times the current would have it. The sum
 * ends where its first recorded part does.
 */
import type { CurrentSource } from './source.ts';

export class Sum implements CurrentSource {
  readonly swings: boolean;
  private readonly parts: readonly CurrentSource[];
  private readonly times: number;
  private scratch = new Float64Array(0);

  constructor(parts: readonly CurrentSource[], times: number) {
    this.parts = parts;
    this.times = times;
    this.swings = times !== 0 && parts.some((part) => part.swings);
  }

  next(amperes: Float64Array, count: number): void {
    const scratch = this.scratchOf(count);
    amperes.fill(0, 0, count);
    for (const part of this.parts) {
      part.next(scratch, count);
      for (let i = 0; i < count; i++) amperes[i] += scratch[i];
    }
    const { times } = this;
    if (times !== 1) for (let i = 0; i < count; i++) amperes[i] *= times;
  }

  slew(voltsPerSecond: Float64Array, count: number): void {
    voltsPerSecond.fill(0, 0, count);
    if (!this.swings) return;
    const scratch = this.scratchOf(count);
    const sign = Math.sign(this.times);
    for (const part of this.parts) {
      if (!part.swings) continue;
      part.slew(scratch, count);
      for (let i = 0; i < count; i++) voltsPerSecond[i] += sign * scratch[i];
    }
  }

  get endSeconds(): number | null {
    const ends = this.parts.flatMap(({ endSeconds }) => (endSeconds === null ? [] : [endSeconds]));
    return ends.length === 0 ? null : Math.min(...ends);
  }

  close(): void {
    for (const part of this.parts) part.close();
  }

  /** Grows to the longest call and then stays. */
  private scratchOf(count: number): Float64Array {
    if (this.scratch.length < count) this.scratch = new Float64Array(count);
    return this.scratch;
  }
}
