/**
 * Linear core with one air gap around the conductor: current to field in the gap.
 *   B = mu0 N I / (gap + path / permeability)
 * No hysteresis, no saturation, no stray field; the gap is short against its width.
 * Source: any textbook of electric machines, magnetic circuit with an air gap (Fitzgerald, Kingsley, Umans, chapter 1).
 */
import type { CoreUnit } from './draw.ts';

/** CODATA 2022, N/A^2. */
export const MAGNETIC_CONSTANT = 1.25663706127e-6;

export function teslaPerAmpere(core: CoreUnit): number {
  return (MAGNETIC_CONSTANT * core.turns) / (core.gap_mm * 1e-3 + (core.path_mm * 1e-3) / core.permeability);
}
