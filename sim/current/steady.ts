/** A steady current: the same at every grid point. */
import { NoSwing } from './noswing.ts';

export class Steady extends NoSwing {
  private readonly level: number;

  constructor(amperes: number) {
    super();
    this.level = amperes;
  }

  next(amperes: Float64Array, count: number): void {
    amperes.fill(this.level, 0, count);
  }
}
