/**
 * The chain: its stages in order, made from constants that checkConstants accepts. A block of raw codes goes in, the
 * same block comes out with values and status behind the last stage; meters keep records on the way.
 */
import { Average } from './average.ts';
import { Decimate } from './decimate.ts';
import { Demodulate } from './demodulate.ts';
import { Despike } from './despike.ts';
import { GainTrim, OffsetTrim } from './trim.ts';
import { Intake } from './intake.ts';
import { Linearise } from './linearise.ts';
import { Meter } from './meter.ts';
import { OverRange } from './overrange.ts';
import { Scale } from './scale.ts';
import { Sections } from './sections.ts';
import { Thermometer } from './thermometer.ts';
import { Zero } from './zero.ts';
import { checkConstants, type ChainConstants, type StageConstants } from './constants.ts';
import { makeCustom, type CustomMaker } from './custom.ts';
import { loadState, powerCycle, saveState, type Stage } from './stage.ts';
import { problemText } from './problems.ts';
import type { Block } from './block.ts';
import type { UnitConstants } from './unit.ts';

const NO_MAKERS: readonly CustomMaker[] = [];

export class Chain {
  constants: ChainConstants;
  stages: Stage[];

  /** RangeError, with every problem in its message, when the constants do not hold the laws. */
  constructor(constants: ChainConstants, makers: readonly CustomMaker[] = NO_MAKERS) {
    const report = checkConstants(constants);
    if (report.problems.length > 0) {
      const lines: string[] = [];
      for (let i = 0; i < report.problems.length; i++) lines.push(problemText(report.problems[i]));
      throw new RangeError('constants refused: ' + lines.join(' | '));
    }
    this.constants = constants;
    this.stages = [];
    for (let i = 0; i < constants.design.length; i++) {
      this.stages.push(makeStage(constants.design[i], constants.unit, makers));
    }
  }

  process(block: Block): void {
    for (let i = 0; i < this.stages.length; i++) this.stages[i].process(block);
  }

  /** As new: nothing is left of what has been processed. */
  reset(): void {
    for (let i = 0; i < this.stages.length; i++) this.stages[i].reset();
  }

  /** Power off and on: reset, but what each stage keeps over it comes back. */
  powerCycle(): void {
    for (let i = 0; i < this.stages.length; i++) powerCycle(this.stages[i]);
  }

  /** One plain table of integers a stage. */
  save(): number[][] {
    const tables: number[][] = [];
    for (let i = 0; i < this.stages.length; i++) tables.push(saveState(this.stages[i]));
    return tables;
  }

  /** Loads what save gave; RangeError when it does not fit. */
  load(tables: readonly (readonly number[])[]): void {
    if (tables.length !== this.stages.length) {
      throw new RangeError('state: expected ' + this.stages.length + ' tables, got ' + tables.length);
    }
    for (let i = 0; i < this.stages.length; i++) loadState(this.stages[i], tables[i]);
  }
}

export function makeStage(c: StageConstants, unit: UnitConstants, makers: readonly CustomMaker[]): Stage {
  switch (c.kind) {
    case 'intake': return new Intake(c, unit);
    case 'overRange': return new OverRange(c, unit);
    case 'despike': return new Despike(c, unit);
    case 'demodulate': return new Demodulate(c, unit);
    case 'decimate': return new Decimate(c, unit);
    case 'thermometer': return new Thermometer(c, unit);
    case 'offsetTrim': return new OffsetTrim(c, unit);
    case 'zero': return new Zero(c, unit);
    case 'gainTrim': return new GainTrim(c, unit);
    case 'linearise': return new Linearise(c, unit);
    case 'sections': return new Sections(c, unit);
    case 'average': return new Average(c, unit);
    case 'scale': return new Scale(c, unit);
    case 'meter': return new Meter(c, unit);
    case 'custom': return makeCustom(c, unit, makers);
  }
}
