/** What a computed current has that goes on for ever, in a conductor whose voltage stands still (dv/dt is zero). */
import type { CurrentSource } from './source.ts';

export abstract class NoSwing implements CurrentSource {
  readonly endSeconds: number | null = null;
  readonly swings: boolean = false;

  abstract next(amperes: Float64Array, count: number): void;

  slew(voltsPerSecond: Float64Array, count: number): void {
    voltsPerSecond.fill(0, 0, count);
  }

  close(): void {}
}
