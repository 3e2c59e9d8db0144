/**
 * A core material with memory: play (backlash) operators in the field, then a saturating curve without memory.
 *   E = c0 H + sum of p_i P_i(H),  P_i: w = max(H - r_i, min(H + r_i, w before)),  B = Bs E/(|E| + knee) + mu0 H
 * Its loop from saturation is the field shifted by +-Hc = sum p_i r_i (with c0 + sum p_i = 1), so remanence gives
 * the knee: Bs Hc/(Hc + knee) = Br. The initial slope c0 Bs/knee + mu0 is the initial permeability. The rest of the
 * weight lies evenly over the thresholds from 0 to 2 Hc/(1 - c0), which is Rayleigh's law at low fields.
 * Sources: I. D. Mayergoyz, "Mathematical Models of Hysteresis" (play and Preisach operators); Froehlich (1881) and
 * Kennelly (1891) for the curve; J. H. Chan et al., IEEE Trans. CAD 10 (1991) 476, has the same loop from saturation.
 */
import { MAGNETIC_CONSTANT } from './magnetic.ts';

export interface PlayMaterial {
  saturationTesla: number;
  /** E at which the curve has reached half of the saturation, A/m. */
  knee: number;
  /** c0, the share of H that no operator holds back. */
  reversible: number;
  /** r_i, rising, A/m. */
  thresholds: Float64Array;
  /** p_i, one for each threshold. */
  weights: Float64Array;
  /** mu0, or 0 to leave the term mu0 H out as some published values do. */
  airPermeability: number;
}

/** Operators of a material made from its loop numbers. */
const OPERATORS = 32;

/** A dead zone without any slope would leave the field undetermined; this adds 0.01 to a permeability of 10 000. */
const LEAST_REVERSIBLE = 1e-6;

export function materialFromLoop(
  coercivity_A_per_m: number, remanenceTesla: number, saturationTesla: number, permeability: number,
): PlayMaterial {
  if (!(remanenceTesla < saturationTesla)) {
    throw new RangeError(`core.play.remanence_T: found ${remanenceTesla}, allowed less than saturation_T, ` +
      `which is ${saturationTesla}`);
  }
  const knee = coercivity_A_per_m * (saturationTesla / remanenceTesla - 1);
  const steepest = saturationTesla / (knee * MAGNETIC_CONSTANT) + 1;
  if (permeability > steepest) {
    throw new RangeError(`core.permeability: found ${permeability}, allowed at most ${steepest.toPrecision(4)}, ` +
      'the steepest slope of the loop that coercivity, remanence and saturation in core.play give');
  }
  const reversible = Math.max(LEAST_REVERSIBLE, (permeability - 1) / (steepest - 1));
  const thresholds = new Float64Array(OPERATORS);
  const held = 1 - reversible;
  const last = (2 * coercivity_A_per_m) / Math.max(held, LEAST_REVERSIBLE);
  for (let i = 0; i < OPERATORS; i++) thresholds[i] = ((i + 0.5) * last) / OPERATORS;
  const weights = new Float64Array(OPERATORS).fill(held / OPERATORS);
  return { saturationTesla, knee, reversible, thresholds, weights, airPermeability: MAGNETIC_CONSTANT };
}

/** The curve alone, without memory; `airPermeability` as in PlayMaterial. */
export function froehlichMaterial(
  saturationTesla: number, permeability: number, airPermeability: number,
): PlayMaterial {
  const slope = MAGNETIC_CONSTANT * permeability - airPermeability;
  return {
    saturationTesla, knee: saturationTesla / slope, reversible: 1, thresholds: new Float64Array(0),
    weights: new Float64Array(0), airPermeability,
  };
}

/** B of the curve at E, without mu0 H. */
export function saturate(material: PlayMaterial, effective: number): number {
  return (material.saturationTesla * effective) / (Math.abs(effective) + material.knee);
}
