/**
 * Gapped core around the conductor: currents and outer field to field in the gap.
 *   N I = turns (1 + position) I + turns neighbour share * neighbour I + coil turns * coil I, lagged by the eddy pole,
 *   B = magnetic circuit (linear, play or Jiles-Atherton) of N I + concentration * outer field
 * The lag stands before the material: eddy currents hold back the ampere-turns that it sees, and one pole on a straight
 * line between points is exact. The outer field adds to the field in the gap and does not magnetise the core. An open
 * jaw is a gap so long that openJaw_percent of the sensitivity is left, so the memory loses what a long gap takes from
 * it, and the sensor is in the outer field as it is, without concentration. Each closing draws the joint gap anew, also
 * the one before the start. The core begins demagnetised. Gap short against its width; no other stray field; nothing
 * depends on temperature.
 */
import { resolve } from 'node:path';
import type { CoreUnit } from './draw.ts';
import { JilesAthertonCircuit } from './jilesatherton.ts';
import { fitMaterial } from './loopfit.ts';
import { readLoop } from './looptable.ts';
import { LinearCircuit, MAGNETIC_CONSTANT, type MagneticCircuit } from './magnetic.ts';
import { PlayCircuit } from './playcircuit.ts';
import { materialFromLoop, type PlayMaterial } from './playmaterial.ts';
import { Pole } from './pole.ts';
import type { RandomStream } from './random.ts';

export { MAGNETIC_CONSTANT } from './magnetic.ts';

export interface CoreOptions {
  stepSeconds: number;
  /** Where the path of a measured loop starts. */
  folder: string;
  /** One draw for each closing of the jaw, the one before the start included. */
  closing: RandomStream;
  /** The joint gap of the unit is the middle of what closings give. */
  jointTolerance_um: number;
}

/** Less sensitivity with an open jaw is taken as this: the gap that stands for it must stay finite. */
const LEAST_OPEN_SHARE = 1e-9;

/** Small-signal and without memory: the straight line that tuning may know. */
export function teslaPerAmpere(core: CoreUnit): number {
  const turns = core.turns * (1 + core.position_percent / 100);
  return (MAGNETIC_CONSTANT * turns) / (gapMetres(core, core.jointGap_um) + materialMetres(core));
}

export class Core {
  private readonly core: CoreUnit;
  private readonly options: CoreOptions;
  private readonly circuit: MagneticCircuit;
  private readonly eddy: Pole | null;
  private outerShare: number;

  constructor(core: CoreUnit, options: CoreOptions) {
    this.core = core;
    this.options = options;
    this.circuit = circuitOf(core, this.closedGap(), options.folder);
    this.eddy = core.eddy_kHz === null ? null : new Pole(core.eddy_kHz * 1e3, options.stepSeconds);
    this.outerShare = core.concentration;
  }

  /**
   * Amperes in, tesla in the gap out, in place; outer field and neighbour steady over the call; `coilAmperes` null or
   * one value for each point.
   */
  process(
    values: Float64Array, count: number, outerTesla: number, neighbourAmperes: number, coilAmperes: Float64Array | null,
  ): void {
    const { core, outerShare } = this;
    const turns = core.turns * (1 + core.position_percent / 100);
    const neighbourTurns = core.turns * core.neighbour_ppm * 1e-6 * neighbourAmperes;
    for (let i = 0; i < count; i++) values[i] = turns * values[i] + neighbourTurns;
    if (coilAmperes !== null) {
      for (let i = 0; i < count; i++) values[i] += core.coilTurns * coilAmperes[i];
    }
    this.eddy?.process(values, count);
    this.circuit.process(values, count);
    const outer = outerShare * outerTesla;
    if (outer === 0) return;
    for (let i = 0; i < count; i++) values[i] += outer;
  }

  openJaw(): void {
    const { core } = this;
    const share = Math.max(LEAST_OPEN_SHARE, core.openJaw_percent / 100);
    const material = materialMetres(core);
    this.circuit.setGap((gapMetres(core, core.jointGap_um) + material) / share - material);
    this.outerShare = 1;
  }

  closeJaw(): void {
    this.circuit.setGap(this.closedGap());
    this.outerShare = this.core.concentration;
  }

  /** Demagnetised at once, as with nothing around the core; what flows then magnetises it along the initial curve. */
  degauss(): void {
    this.circuit.demagnetise();
  }

  private closedGap(): number {
    const { closing, jointTolerance_um } = this.options;
    const joint = this.core.jointGap_um + jointTolerance_um * (2 * closing.uniform() - 1);
    return gapMetres(this.core, Math.max(0, joint));
  }
}

function circuitOf(core: CoreUnit, gap: number, folder: string): MagneticCircuit {
  const { play, jilesAtherton } = core;
  const path = core.path_mm * 1e-3;
  if (play !== null && jilesAtherton !== null) {
    throw new RangeError('core: found both play and jilesAtherton, allowed one of them');
  }
  if (play !== null) return new PlayCircuit(playMaterialOf(core, play, folder), path, gap);
  if (jilesAtherton === null) return new LinearCircuit(path, core.permeability, gap);
  const { saturation_kA_per_m, ...rest } = jilesAtherton;
  return new JilesAthertonCircuit({ saturation_A_per_m: saturation_kA_per_m * 1e3, ...rest }, path, gap);
}

function playMaterialOf(core: CoreUnit, play: NonNullable<CoreUnit['play']>, folder: string): PlayMaterial {
  if (play.loopFile !== '') return fittedMaterial(play.loopFile, folder, core.permeability);
  const { coercivity_A_per_m, remanence_T, saturation_T } = play;
  if (coercivity_A_per_m === null || remanence_T === null || saturation_T === null) {
    throw new RangeError('core.play: found neither loopFile nor all of coercivity_A_per_m, remanence_T and ' +
      'saturation_T, allowed the file or the three numbers');
  }
  return materialFromLoop(coercivity_A_per_m, remanence_T, saturation_T, core.permeability);
}

/** The last fit: one probe is played many times, and its loop stays the same. */
let fitted: { key: string; material: PlayMaterial } | null = null;

function fittedMaterial(path: string, folder: string, permeability: number): PlayMaterial {
  const loop = readLoop(path, folder);
  const key = [resolve(folder, path), permeability, loop.fieldAmperesPerMetre, loop.tesla].join(' ');
  if (fitted?.key !== key) fitted = { key, material: fitMaterial(loop, permeability).material };
  return fitted.material;
}

function gapMetres(core: CoreUnit, joint_um: number): number {
  return core.gap_mm * 1e-3 + joint_um * 1e-6;
}

/** The path in the core as the length of air that takes the same ampere-turns. */
function materialMetres(core: CoreUnit): number {
  return (core.path_mm * 1e-3) / core.permeability;
}
