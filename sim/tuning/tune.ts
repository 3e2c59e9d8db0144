/**
 * Tuning: the chain in engineering units to ChainConstants, once. All that is wrong is reported together, each with
 * its place in the probe file.
 */
import {
  checkConstants, type ChainConstants, type CustomMaker, type ConstantsProblem, type Stage, type StageConstants, type UnitConstants,
} from '../../lib/index.ts';
import { nominalTransfer } from '../hardware/transfer.ts';
import type { Probe, StageSpecOf } from '../probe/fields.ts';
import { pathTo, ProbeError, type Problem } from '../probe/problem.ts';
import { delayOf } from './delay.ts';
import type { Place } from './place.ts';
import { codeSpan, tuneStage } from './stages.ts';
import { nominalMeasured, tuneUnit, type Measured } from './unit.ts';

export interface Tuned {
  constants: ChainConstants;
  makers: CustomMaker[];
  /** Counts in an ampere behind intake. */
  countsPerAmpere: number;
  /** Values in an ampere at the end of the chain. */
  readingsPerAmpere: number;
  /** Values in an ampere behind each stage. */
  valuesPerAmpere: number[];
  /** Input samples for one sample behind each stage. */
  ratios: number[];
  /** Largest magnitude that each stage can give, as proved. */
  limits: number[];
  /** Delay of the reading, in input samples, at DC. */
  delaySamples: number;
  /** Stage index of each meter, by name. */
  meters: Map<string, number>;
}

export function tune(probe: Probe, measured: Measured = nominalMeasured(probe), file: string | null = null): Tuned {
  const problems: Problem[] = [];
  const intake = probe.chain.find((spec): spec is StageSpecOf<'intake'> => spec.stage === 'intake');
  const guardBits = intake?.guardBits ?? 0;
  const midCode = midCodeOf(probe, intake, problems);
  const countsPerAmpere = Math.abs(nominalTransfer(probe).codesPerAmpere) * 2 ** guardBits;
  const unit = tuneUnit(probe, midCode, guardBits, measured);
  const design: StageConstants[] = [];
  const valuesPerAmpere: number[] = [];
  let scale = countsPerAmpere;
  for (let index = 0; index < probe.chain.length; index++) {
    const place = placeOf(probe, index, design, unit, scale, guardBits, midCode, problems);
    const constants = tuneStage(probe.chain[index], place, midCode);
    if (constants === null) break;
    if (constants.kind === 'scale') scale = constants.readingsPerAmpere;
    design.push(constants);
    valuesPerAmpere.push(scale);
  }
  const makers = makersOf(probe, unit, problems);
  const constants = { design, unit };
  const report = checkConstants(constants);
  if (problems.length === 0) problems.push(...report.problems.map(asProbeProblem));
  if (problems.length > 0) throw new ProbeError(problems, file);
  return {
    constants, makers, countsPerAmpere, readingsPerAmpere: scale, valuesPerAmpere, ratios: report.ratios,
    limits: report.limits, delaySamples: delayOf(design, report.ratios, probe), meters: metersOf(probe),
  };
}

function midCodeOf(probe: Probe, intake: StageSpecOf<'intake'> | undefined, problems: Problem[]): number {
  const { lowest, highest } = codeSpan(probe);
  const midCode = intake?.midCode ?? Math.round(nominalTransfer(probe).restCode);
  if (midCode >= lowest && midCode <= highest) return midCode;
  const path = pathTo(pathTo('chain', Math.max(0, probe.chain.findIndex((spec) => spec.stage === 'intake'))), 'midCode');
  problems.push({
    path, found: `${midCode}`, allowed: `${lowest} to ${highest} codes`,
    hint: intake?.midCode === null ? 'it follows from the hardware: rest of the sensor, amplifier and reference do not fit' : '',
  });
  return Math.min(highest, Math.max(lowest, midCode));
}

function placeOf(
  probe: Probe, index: number, design: StageConstants[], unit: UnitConstants, scale: number, guardBits: number,
  midCode: number, problems: Problem[],
): Place {
  const { limits, ratios } = checkConstants({ design, unit });
  const span = codeSpan(probe);
  const reach = Math.max(midCode - span.lowest, span.highest - midCode) * 2 ** guardBits;
  return {
    probe, index, problems, countsPerAmpere: scale, countsPerCode: 2 ** guardBits,
    rateHz: (probe.converter.rate_kHz * 1e3) / (ratios.at(-1) ?? 1), limit: limits.at(-1) ?? reach,
    roof: Math.min(2 ** 31 - 1, design.some((stage) => stage.kind === 'scale') ? 2 ** 31 - 1 : 2 * reach),
  };
}

function asProbeProblem(problem: ConstantsProblem): Problem {
  const path = problem.stage < 0 ? 'calibration' : pathTo('chain', problem.stage);
  return { path, found: `${problem.kind} with ${problem.field} ${problem.value}`, allowed: problem.allowed, hint: problem.remedy };
}

/** Code of the probe file is called here once, so that what is wrong with it is told with its place. */
function makersOf(probe: Probe, unit: UnitConstants, problems: Problem[]): CustomMaker[] {
  const makers: CustomMaker[] = [];
  probe.chain.forEach((spec, index) => {
    if (spec.stage !== 'custom' || spec.make === null) return;
    const make = spec.make as (words: readonly number[], unit: UnitConstants) => Stage;
    const path = pathTo(pathTo('chain', index), 'make');
    const fault = faultOf(() => make(spec.words, unit));
    if (fault !== null) problems.push({ path, found: fault, allowed: 'a function that returns a stage', hint: STAGE_HINT });
    const other = makers.find(({ name, version }) => name === spec.name && version === spec.version);
    if (other !== undefined && other.make !== make) {
      problems.push({
        path, found: `another function than that of an earlier stage "${spec.name}" version ${spec.version}`,
        allowed: 'one function for one name and version', hint: 'give one of them another name or version',
      });
    }
    if (other === undefined) makers.push({ name: spec.name, version: spec.version, make });
  });
  return makers;
}

const STAGE_HINT = 'a stage has kind, fields, kept, state, ring, reset(), process(block) and describe()';

function faultOf(make: () => Stage): string | null {
  try {
    const stage = make();
    const whole = stage?.state instanceof Float64Array && stage.ring instanceof Int32Array && Array.isArray(stage.fields) &&
      Array.isArray(stage.kept) && [stage.reset, stage.process, stage.describe].every((method) => typeof method === 'function');
    return whole ? null : 'something that is no stage';
  } catch (error) {
    return `an error: ${(error as Error)?.message ?? String(error)}`;
  }
}

function metersOf(probe: Probe): Map<string, number> {
  const meters = new Map<string, number>();
  probe.chain.forEach((spec, index) => {
    if (spec.stage === 'meter') meters.set(spec.name, index);
  });
  return meters;
}
