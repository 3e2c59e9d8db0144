/**
 * ChainConstants: every integer that decides what a chain does, and nothing else. `design` is the same for every unit
 * made, `unit` is what calibration writes into one. checkConstants proves the law of width (no intermediate value
 * reaches 2^53) and that the stages join, or says what to change.
 */
import { checkAverage, type AverageConstants } from './average.ts';
import { checkCustom, type CustomConstants } from './custom.ts';
import { checkDecimate, type DecimateConstants } from './decimate.ts';
import { checkDemodulate, type DemodulateConstants } from './demodulate.ts';
import { checkDespike, type DespikeConstants } from './despike.ts';
import { checkIntake, type IntakeConstants } from './intake.ts';
import { checkLinearise, type LineariseConstants } from './linearise.ts';
import { checkMeter, type MeterConstants } from './meter.ts';
import { checkOverRange, type OverRangeConstants } from './overrange.ts';
import { checkScale, type ScaleConstants } from './scale.ts';
import { checkSections, type SectionsConstants } from './sections.ts';
import { checkThermometer, type ThermometerConstants } from './thermometer.ts';
import { checkGainTrim, checkOffsetTrim, type GainTrimConstants, type OffsetTrimConstants } from './trim.ts';
import { checkUnit, type UnitConstants } from './unit.ts';
import { checkZero, type ZeroConstants } from './zero.ts';
import { Flow } from './flow.ts';
import { Problems, type ConstantsProblem } from './problems.ts';

export type StageConstants =
  | IntakeConstants
  | OverRangeConstants
  | DespikeConstants
  | DemodulateConstants
  | DecimateConstants
  | ThermometerConstants
  | OffsetTrimConstants
  | ZeroConstants
  | GainTrimConstants
  | LineariseConstants
  | SectionsConstants
  | AverageConstants
  | ScaleConstants
  | MeterConstants
  | CustomConstants;

export interface ChainConstants {
  design: StageConstants[];
  unit: UnitConstants;
}

/** What checkConstants found, and per stage the largest magnitude that its output can reach. */
export interface ConstantsReport {
  problems: ConstantsProblem[];
  limits: number[];
  /** Input samples for one sample behind each stage. */
  ratios: number[];
}

/** Walks the stages in order, proves every bound from the constants, and lists all that is wrong. */
export function checkConstants(constants: ChainConstants): ConstantsReport {
  const problems = new Problems();
  const flow = new Flow();
  const limits: number[] = [];
  const ratios: number[] = [];
  checkUnit(constants.unit, problems);
  for (let i = 0; i < constants.design.length; i++) {
    problems.at(i, constants.design[i].kind);
    checkStage(constants.design[i], constants.unit, flow, problems);
    limits.push(flow.limit);
    ratios.push(flow.ratio);
  }
  if (constants.design.length === 0) problems.add('design', 0, 'at least intake', 'list the stages');
  return { problems: problems.list, limits: limits, ratios: ratios };
}

function checkStage(c: StageConstants, unit: UnitConstants, flow: Flow, problems: Problems): void {
  switch (c.kind) {
    case 'intake': return checkIntake(c, unit, flow, problems);
    case 'overRange': return checkOverRange(c, unit, flow, problems);
    case 'despike': return checkDespike(c, unit, flow, problems);
    case 'demodulate': return checkDemodulate(c, unit, flow, problems);
    case 'decimate': return checkDecimate(c, unit, flow, problems);
    case 'thermometer': return checkThermometer(c, unit, flow, problems);
    case 'offsetTrim': return checkOffsetTrim(c, unit, flow, problems);
    case 'zero': return checkZero(c, unit, flow, problems);
    case 'gainTrim': return checkGainTrim(c, unit, flow, problems);
    case 'linearise': return checkLinearise(c, unit, flow, problems);
    case 'sections': return checkSections(c, unit, flow, problems);
    case 'average': return checkAverage(c, unit, flow, problems);
    case 'scale': return checkScale(c, unit, flow, problems);
    case 'meter': return checkMeter(c, unit, flow, problems);
    case 'custom': return checkCustom(c, unit, flow, problems);
    default: problems.add('kind', (c as StageConstants).kind, 'a kind of stage', 'see the list of stages');
  }
}
