/**
 * Which readings a clipped sample has a part in, told by the judge from the hardware's own report and the make-up of
 * the chain, independently of the status bits that the chain passes on:
 *   running median   passes clipping on while more than half of its window is influenced (its breakdown point)
 *   demodulation     leaves out blanked samples; a phase's mean enters at its end and stays until the same phase returns
 *   other filters    for their whole memory; the memories of stages behind one another add up
 */
import type { StageConstants } from '../../lib/index.ts';
import { stageMemory } from './memory.ts';

export class Influence {
  private readonly memorySamples: number;
  private readonly medianWindow: number;
  private readonly demodulate: { phases: number; blank: number } | null;
  /** Bits of the last samples of the median's window. */
  private history = 0;
  private lastReached = -Infinity;
  private pendingFrom = Infinity;

  /** `phaseSamples`: A/D samples in one phase of a switched bias. */
  constructor(design: readonly StageConstants[], ratios: readonly number[], private readonly phaseSamples: number) {
    const demodulate = design.find((stage) => stage.kind === 'demodulate');
    this.demodulate = demodulate === undefined ? null : { phases: demodulate.quarter === 1 ? 4 : 2, blank: demodulate.blank };
    let memory = 0;
    let window = 1;
    design.forEach((stage, index) => {
      const ratioAhead = index === 0 ? 1 : ratios[index - 1];
      if (stage.kind === 'despike' && memory === 0 && ratioAhead === 1) window = stage.window;
      else if (stage.kind !== 'overRange' && stage.kind !== 'demodulate') memory += ratioAhead * stageMemory(stage);
    });
    this.memorySamples = memory;
    this.medianWindow = window;
  }

  /** One input sample after the other; true: a reading at this sample is influenced. */
  hear(sample: number, clipped: boolean): boolean {
    const influenced = this.behindMedian(clipped);
    if (this.demodulate === null) {
      if (influenced) this.lastReached = sample + this.memorySamples;
    } else {
      this.throughPhases(sample, influenced, this.demodulate);
    }
    return sample <= this.lastReached;
  }

  /** A power cycle empties every filter. */
  forget(): void {
    this.history = 0;
    this.lastReached = -Infinity;
    this.pendingFrom = Infinity;
  }

  private behindMedian(clipped: boolean): boolean {
    const { medianWindow } = this;
    this.history = ((this.history << 1) | (clipped ? 1 : 0)) & ((1 << medianWindow) - 1);
    let ones = 0;
    for (let bits = this.history; bits > 0; bits &= bits - 1) ones++;
    return 2 * ones > medianWindow;
  }

  private throughPhases(sample: number, influenced: boolean, { phases, blank }: { phases: number; blank: number }): void {
    const { phaseSamples } = this;
    if (sample >= this.pendingFrom) {
      this.lastReached = this.pendingFrom + phases * phaseSamples - 1 + this.memorySamples;
      this.pendingFrom = Infinity;
    }
    // the phase of this sample ends before another one can wait
    if (influenced && sample % phaseSamples >= blank) this.pendingFrom = sample - (sample % phaseSamples) + phaseSamples;
  }
}
