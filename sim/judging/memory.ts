/**
 * How long a disturbance can stay visible: the memories of all stages, in input samples. A flag older than this has no
 * cause left.
 */
import type { StageConstants } from '../../lib/index.ts';

export function chainMemory(design: readonly StageConstants[], ratios: readonly number[]): number {
  let memory = 0;
  design.forEach((stage, index) => {
    const ratioAhead = index === 0 ? 1 : ratios[index - 1];
    // one more sample at each rate: where the flagged sample falls within the group of a decimator
    memory += ratioAhead * (stageMemory(stage) + 1);
  });
  return memory;
}

/** Samples, at the input of the stage, that a sample stays in it. */
export function stageMemory(stage: StageConstants): number {
  switch (stage.kind) {
    case 'overRange': return stage.holdSamples;
    case 'despike': return stage.window - 1;
    case 'demodulate': return 2 * (stage.quarter === 1 ? 4 : 2) * stage.longest;
    case 'decimate': return stage.order * (stage.ratio - 1);
    case 'sections': return stage.memorySamples;
    case 'average': return stage.length - 1;
    default: return 0;
  }
}
