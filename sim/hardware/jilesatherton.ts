/**
 * Jiles-Atherton material in its magnetic circuit. Form with separated parts, irreversible part against H:
 *   He = H + alpha M,  Man = Ms L(He/a),  M = c Man + (1 - c) Mirr,
 *   dMirr/dH = (Man - Mirr)/(delta k - alpha (Man - Mirr)),  delta = sign of dH, and 0 where that would be negative
 * which gives X = dM/dH = (c Man' + (1 - c) dMirr/dH)/(1 - alpha c Man'). With N I = H path + gap (H + M) the gap's
 * demagnetising field is solved in: dM/dNI = X/(path + gap (1 + X)). Fourth-order Runge-Kutta on the ampere-turns,
 * in steps of H of STEP of the smaller of a and k (of |He| where that is more, because the curve is straighter there).
 * Its minor loops do not close but creep to the curve without hysteresis, so a small alternating current takes a
 * remanence away that a real core keeps: for what an overload leaves behind, the play model is the one to believe.
 * Sources: D. C. Jiles, D. L. Atherton, J. Magn. Magn. Mater. 61 (1986) 48; D. C. Jiles, J. B. Thoelke, M. K. Devine,
 * IEEE Trans. Magn. 28 (1992) 27.
 */
import { langevin, langevinSlope } from './langevin.ts';
import { MAGNETIC_CONSTANT, type MagneticCircuit } from './magnetic.ts';

export interface JilesAthertonMaterial {
  saturation_A_per_m: number;
  shape_A_per_m: number;
  coupling: number;
  pinning_A_per_m: number;
  reversibility: number;
}

const STEP = 1 / 50;

/** The irreversible slope's denominator may not pass zero; beyond 1/1000 of k the material would jump by itself. */
const LEAST_DENOMINATOR = 1e-3;

/** Share of the ampere-turns that a step moves at least, so that it ends for any material. */
const LEAST_STRIDE = 1e-7;

export class JilesAthertonCircuit implements MagneticCircuit {
  private readonly material: JilesAthertonMaterial;
  private readonly pathMetres: number;
  private gapMetres: number;
  private turns = 0;
  private magnetisation = 0;

  constructor(material: JilesAthertonMaterial, pathMetres: number, gapMetres: number) {
    const { saturation_A_per_m, shape_A_per_m, coupling } = material;
    if (coupling * saturation_A_per_m >= 3 * shape_A_per_m) {
      throw new RangeError(`core.jilesAtherton.coupling: found ${coupling}, allowed less than ` +
        `${((3 * shape_A_per_m) / saturation_A_per_m).toPrecision(4)}, 3 shape / saturation, or it magnetises itself`);
    }
    this.material = material;
    this.pathMetres = pathMetres;
    this.gapMetres = gapMetres;
  }

  demagnetise(): void {
    this.turns = 0;
    this.magnetisation = 0;
  }

  setGap(gapMetres: number): void {
    const field = this.fieldAt(this.turns, this.magnetisation);
    this.gapMetres = gapMetres;
    this.turns = field * this.pathMetres + gapMetres * (field + this.magnetisation);
  }

  process(values: Float64Array, count: number): void {
    for (let i = 0; i < count; i++) {
      const target = values[i];
      if (target !== this.turns) this.go(target);
      const field = this.fieldAt(target, this.magnetisation);
      values[i] = MAGNETIC_CONSTANT * (field + this.magnetisation);
    }
  }

  /** Slope dM/dH at the field and magnetisation given, for a field that rises (1) or falls (-1). */
  susceptibility(field: number, magnetisation: number, sense: number): number {
    const { saturation_A_per_m, shape_A_per_m, coupling, pinning_A_per_m, reversibility } = this.material;
    const x = (field + coupling * magnetisation) / shape_A_per_m;
    const value = langevin(x);
    const slope = (saturation_A_per_m / shape_A_per_m) * langevinSlope(x, value);
    // Man - Mirr, since M = c Man + (1 - c) Mirr
    const behind = (sense * (saturation_A_per_m * value - magnetisation)) / (1 - reversibility);
    let irreversible = 0;
    if (behind > 0) {
      irreversible = behind / Math.max(LEAST_DENOMINATOR * pinning_A_per_m, pinning_A_per_m - coupling * behind);
    }
    return (reversibility * slope + (1 - reversibility) * irreversible) / (1 - coupling * reversibility * slope);
  }

  private go(target: number): void {
    const { pathMetres, gapMetres } = this;
    const { coupling, shape_A_per_m, pinning_A_per_m } = this.material;
    const sense = target > this.turns ? 1 : -1;
    const finest = Math.min(shape_A_per_m, pinning_A_per_m);
    while (this.turns !== target) {
      const { turns, magnetisation } = this;
      const field = this.fieldAt(turns, magnetisation);
      const first = this.susceptibility(field, magnetisation, sense);
      const metres = pathMetres + gapMetres * (1 + first);
      const stride = Math.max(STEP * Math.max(finest, Math.abs(field + coupling * magnetisation)) * metres,
        LEAST_STRIDE * Math.abs(target));
      const left = Math.abs(target - turns);
      const step = left <= stride ? target - turns : sense * stride;
      const k1 = first / metres;
      const k2 = this.rate(turns + step / 2, magnetisation + (step / 2) * k1, sense);
      const k3 = this.rate(turns + step / 2, magnetisation + (step / 2) * k2, sense);
      const k4 = this.rate(turns + step, magnetisation + step * k3, sense);
      this.magnetisation = magnetisation + (step / 6) * (k1 + 2 * (k2 + k3) + k4);
      this.turns = left <= stride ? target : turns + step;
    }
  }

  private rate(turns: number, magnetisation: number, sense: number): number {
    const slope = this.susceptibility(this.fieldAt(turns, magnetisation), magnetisation, sense);
    return slope / (this.pathMetres + this.gapMetres * (1 + slope));
  }

  private fieldAt(turns: number, magnetisation: number): number {
    return (turns - this.gapMetres * magnetisation) / (this.pathMetres + this.gapMetres);
  }
}
