/**
 * Fits a play material to a measured loop. With the saturation Bs given, E/knee = u/(1 - |u|), u = (B - mu0 H)/Bs, is
 * linear in the weights, because the operators follow the measured field alone: a least-squares problem with weights
 * >= 0, each row weighted by the slope of the curve so that its residual is one in B. The reversible share is set by
 * the initial permeability. A small penalty on differences of neighbouring weights decides what the loop leaves open.
 * Bs is searched on a grid, then by golden section. Source for the identification: non-negative least squares, by
 * coordinate descent on the normal equations (C. L. Lawson, R. J. Hanson, "Solving Least Squares Problems", ch. 23).
 */
import { MAGNETIC_CONSTANT } from './magnetic.ts';
import { nonNegativeLeastSquares } from './nonnegative.ts';
import type { MeasuredLoop } from './looptable.ts';
import { saturate, type PlayMaterial } from './playmaterial.ts';

export interface FittedMaterial {
  material: PlayMaterial;
  rmsErrorTesla: number;
  highestTesla: number;
}

const OPERATORS = 32;

/** Thresholds reach this many coercivities: without a reversible share an even density ends at 2; room for a tail. */
const REACH = 3;

/** Weight of the penalty, share of the mean diagonal of the normal equations: far below what a loop decides. */
const SMOOTHNESS = 1e-3;

/** Saturations tried, as factors on the highest polarisation measured. */
const LEAST_HEADROOM = 1.02;
const MOST_HEADROOM = 3;
const GRID = 16;
const GOLDEN_STEPS = 10;

/** A loop whose coercivity is a smaller share of its field is a line. */
const HARDLY = 1e-4;

/** A worse fit is refused: it would be another material. */
const WORST_RMS = 0.1;

export function fitMaterial(loop: MeasuredLoop, permeability: number): FittedMaterial {
  const thresholds = thresholdsFor(loop);
  const outputs = operatorOutputs(loop, thresholds);
  const highest = highestPolarisation(loop);
  const trial = (headroom: number): FittedMaterial =>
    fitWithSaturation(loop, thresholds, outputs, highest * headroom, permeability);
  const best = search(trial);
  if (!(best.rmsErrorTesla <= WORST_RMS * best.highestTesla)) {
    throw new RangeError(`core.play.loopFile: found a loop in ${loop.name} that the model misses by ` +
      `${((100 * best.rmsErrorTesla) / best.highestTesla).toPrecision(2)} % of its highest flux density (rms) with ` +
      `core.permeability ${permeability}; allowed ${100 * WORST_RMS} %: it must begin at a tip, in A/m and T, ` +
      'and the permeability must be that of the same material');
  }
  return best;
}

function search(trial: (headroom: number) => FittedMaterial): FittedMaterial {
  const ratio = (MOST_HEADROOM / LEAST_HEADROOM) ** (1 / (GRID - 1));
  let best = trial(LEAST_HEADROOM);
  let bestHeadroom = LEAST_HEADROOM;
  for (let i = 1; i < GRID; i++) {
    const headroom = LEAST_HEADROOM * ratio ** i;
    const next = trial(headroom);
    if (next.rmsErrorTesla < best.rmsErrorTesla) [best, bestHeadroom] = [next, headroom];
  }
  let low = Math.max(LEAST_HEADROOM, bestHeadroom / ratio);
  let high = bestHeadroom * ratio;
  for (let i = 0; i < GOLDEN_STEPS; i++) {
    const third = 0.381966 * (high - low);
    const [left, right] = [trial(low + third), trial(high - third)];
    const nearer = left.rmsErrorTesla < right.rmsErrorTesla ? left : right;
    if (nearer === left) high -= third;
    else low += third;
    if (nearer.rmsErrorTesla < best.rmsErrorTesla) best = nearer;
  }
  return best;
}

function fitWithSaturation(
  loop: MeasuredLoop, thresholds: Float64Array, outputs: Float64Array[], saturationTesla: number, permeability: number,
): FittedMaterial {
  const { fieldAmperesPerMetre: field, tesla } = loop;
  const reversible = ((permeability - 1) * MAGNETIC_CONSTANT) / saturationTesla;
  const rows = field.length;
  const wanted = new Float64Array(rows);
  const slopes = new Float64Array(rows);
  for (let k = 0; k < rows; k++) {
    const share = (tesla[k] - MAGNETIC_CONSTANT * field[k]) / saturationTesla;
    wanted[k] = share / (1 - Math.abs(share)) - reversible * field[k];
    slopes[k] = saturationTesla * (1 - Math.abs(share)) ** 2;
  }
  const n = thresholds.length;
  const matrix = Array.from({ length: n }, () => new Float64Array(n));
  const right = new Float64Array(n);
  for (let k = 0; k < rows; k++) {
    const out = outputs[k];
    const square = slopes[k] * slopes[k];
    for (let i = 0; i < n; i++) {
      right[i] += square * out[i] * wanted[k];
      for (let j = 0; j < n; j++) matrix[i][j] += square * out[i] * out[j];
    }
  }
  addPenalty(matrix);
  const weights = nonNegativeLeastSquares(matrix, right);
  return judged(loop, outputs, materialOf(saturationTesla, reversible, thresholds, weights), weights, reversible);
}

function addPenalty(matrix: Float64Array[]): void {
  const n = matrix.length;
  const strength = (SMOOTHNESS * matrix.reduce((sum, row, i) => sum + row[i], 0)) / n;
  for (let i = 0; i + 1 < n; i++) {
    matrix[i][i] += strength;
    matrix[i + 1][i + 1] += strength;
    matrix[i][i + 1] -= strength;
    matrix[i + 1][i] -= strength;
  }
}

/** Shares of H add up to 1, which fixes the knee; operators without weight are left out. */
function materialOf(
  saturationTesla: number, reversible: number, thresholds: Float64Array, weights: Float64Array,
): PlayMaterial {
  const knee = 1 / weights.reduce((sum, weight) => sum + weight, reversible);
  return {
    saturationTesla, knee, reversible: Math.max(1e-6, reversible * knee),
    thresholds: thresholds.filter((_, i) => weights[i] > 0),
    weights: weights.filter((weight) => weight > 0).map((weight) => weight * knee),
    airPermeability: MAGNETIC_CONSTANT,
  };
}

function judged(
  loop: MeasuredLoop, outputs: Float64Array[], material: PlayMaterial, weights: Float64Array, reversible: number,
): FittedMaterial {
  const { fieldAmperesPerMetre: field, tesla } = loop;
  let squares = 0;
  let highestTesla = 0;
  for (let k = 0; k < field.length; k++) {
    let effective = reversible * field[k];
    for (let i = 0; i < weights.length; i++) effective += weights[i] * outputs[k][i];
    const missed = MAGNETIC_CONSTANT * field[k] + saturate(material, effective * material.knee) - tesla[k];
    squares += missed * missed;
    highestTesla = Math.max(highestTesla, Math.abs(tesla[k]));
  }
  return { material, rmsErrorTesla: Math.sqrt(squares / field.length), highestTesla };
}

function thresholdsFor(loop: MeasuredLoop): Float64Array {
  const reach = REACH * widestCrossing(loop);
  return Float64Array.from({ length: OPERATORS }, (_, i) => ((i + 0.5) * reach) / OPERATORS);
}

/** The largest |H| at which B crosses zero between two rows: the coercivity of the largest loop. */
function widestCrossing(loop: MeasuredLoop): number {
  const { fieldAmperesPerMetre: field, tesla } = loop;
  let widest = 0;
  for (let k = 1; k < field.length; k++) {
    if (tesla[k - 1] * tesla[k] > 0 || tesla[k] === tesla[k - 1]) continue;
    const share = tesla[k - 1] / (tesla[k - 1] - tesla[k]);
    widest = Math.max(widest, Math.abs(field[k - 1] + share * (field[k] - field[k - 1])));
  }
  if (widest <= HARDLY * field.reduce((most, value) => Math.max(most, Math.abs(value)), 0)) {
    throw new RangeError(`core.play.loopFile: found no coercivity in ${loop.name}, ` +
      'allowed a loop that encloses an area');
  }
  return widest;
}

function operatorOutputs(loop: MeasuredLoop, thresholds: Float64Array): Float64Array[] {
  const held = new Float64Array(thresholds.length);
  return Array.from(loop.fieldAmperesPerMetre, (field) => {
    for (let i = 0; i < held.length; i++) {
      held[i] = Math.max(field - thresholds[i], Math.min(field + thresholds[i], held[i]));
    }
    return held.slice();
  });
}

function highestPolarisation(loop: MeasuredLoop): number {
  return loop.tesla.reduce((highest, tesla, k) =>
    Math.max(highest, Math.abs(tesla - MAGNETIC_CONSTANT * loop.fieldAmperesPerMetre[k])), 0);
}
