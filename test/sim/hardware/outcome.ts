/** Everything that a bench gives over a whole scenario, sample by sample. */
import { expect } from 'vitest';
import type { Probe, Scenario } from '../../../sim/probe/fields.ts';
import { Bench, newCodeBlock, type CodeBlock } from '../../../sim/hardware/bench.ts';

export interface Outcome {
  code: number[];
  events: number[];
  amperes: number[];
  mean: number[];
  meanSquare: number[];
  clipped: number[];
  influenced: number[];
  /** One for each sample. */
  temperatureCode: number[];
  /** First samples of blocks that follow a power cycle. */
  powerCycles: number[];
}

export interface Settings {
  seed?: number;
  trial?: number;
  capacity?: number;
  inside?: number;
}

export function outcomeOf(probe: Probe, scenario: Scenario, settings: Settings = {}): Outcome {
  const { seed = 1, trial = 0, capacity = 100, inside } = settings;
  const bench = new Bench(probe, scenario, { seed, trial, folder: '.', capacity: inside });
  const block = newCodeBlock(capacity);
  const all: Outcome = {
    code: [], events: [], amperes: [], mean: [], meanSquare: [], clipped: [], influenced: [], temperatureCode: [],
    powerCycles: [],
  };
  while (bench.next(block)) append(all, block);
  expect(all.code.length).toBe(bench.totalSamples);
  expect(bench.next(block)).toBe(false);
  bench.close();
  return all;
}

function append(all: Outcome, block: CodeBlock): void {
  if (block.powerCycle) all.powerCycles.push(all.code.length);
  for (let k = 0; k < block.count; k++) {
    all.code.push(block.code[k]);
    all.events.push(block.events[k]);
    all.amperes.push(block.trueAmperes[k]);
    all.mean.push(block.trueMean[k]);
    all.meanSquare.push(block.trueMeanSquare[k]);
    all.clipped.push(block.clipped[k]);
    all.influenced.push(block.influenced[k]);
    all.temperatureCode.push(block.temperatureCode);
  }
}
