/** A steady current: the same at every grid point. */
import type { CurrentSource } from './source.ts';

export class Steady implements CurrentSource {
  readonly endSeconds = null;
  private readonly level: number;

  constructor(amperes: number) {
    this.level = amperes;
  }

  next(amperes: Float64Array, count: number): void {
    amperes.fill(this.level, 0, count);
  }

  close(): void {}
}
