/**
 * What a core material in its magnetic circuit does, whatever its law: ampere-turns in, flux density in the gap out.
 *   N I = H path + B gap / mu0      one path through the core, one gap, the same area in both
 * Sources: any textbook of electric machines, magnetic circuit with an air gap (Fitzgerald, Kingsley, Umans, ch. 1).
 */

/** CODATA 2022, N/A^2. */
export const MAGNETIC_CONSTANT = 1.25663706127e-6;

export interface MagneticCircuit {
  /** Ampere-turns in, tesla out, in place, one point after the other from where the last call ended. */
  process(values: Float64Array, count: number): void;
  /** From the next point on, with the magnetisation as it stands. */
  setGap(gapMetres: number): void;
  /** No magnetisation and no field; the next point is reached along the initial curve. */
  demagnetise(): void;
}

/** B = mu0 N I / (gap + path / permeability): no memory, no saturation. */
export class LinearCircuit implements MagneticCircuit {
  private readonly coreMetres: number;
  private teslaPerTurn = 0;

  constructor(pathMetres: number, permeability: number, gapMetres: number) {
    this.coreMetres = pathMetres / permeability;
    this.setGap(gapMetres);
  }

  setGap(gapMetres: number): void {
    this.teslaPerTurn = MAGNETIC_CONSTANT / (gapMetres + this.coreMetres);
  }

  process(values: Float64Array, count: number): void {
    const { teslaPerTurn } = this;
    for (let i = 0; i < count; i++) values[i] *= teslaPerTurn;
  }

  demagnetise(): void {
    // nothing is remembered
  }
}
