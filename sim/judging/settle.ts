/**
 * Settling time of the chain alone, measured by the integers themselves: steady codes until nothing settles any more,
 * then a step by a quarter of the code range, and the time until the reading stays within a share of that step. Where
 * the bias is switched, the codes turn with its phases as the field's share of them would.
 */
import { Block, Chain, SETTLING } from '../../lib/index.ts';
import type { Probe } from '../probe/fields.ts';
import { biasPhases, type BiasPhase } from '../hardware/bias.ts';
import { codeSpan } from '../tuning/stages.ts';
import type { Tuned } from '../tuning/tune.ts';
import { chainMemory } from './memory.ts';

export interface ChainSettling {
  /** Milliseconds from the step to within 1 % and 0.1 % for good; null: the chain does not pass a steady current. */
  onePercentMs: number | null;
  oneThousandthMs: number | null;
}

const MOST_SAMPLES = 4_000_000;
const BLOCK = 256;

export function settlingOf(probe: Probe, tuned: Tuned): ChainSettling {
  const design = tuned.constants.design;
  const intake = design[0];
  if (intake.kind !== 'intake') return { onePercentMs: null, oneThousandthMs: null };
  const chain = new Chain(tuned.constants, tuned.makers);
  const span = codeSpan(probe);
  const upward = span.highest - intake.midCode > intake.midCode - span.lowest ? 1 : -1;
  const step = upward * Math.floor((span.highest - span.lowest) / 4);
  const source = new SteadyCodes(chain, intake.midCode, 2 ** intake.justifyShift, probe);
  const memory = chainMemory(design, tuned.ratios);
  source.settle(0, memory);
  const before = source.last;
  const readings = source.record(step, Math.min(MOST_SAMPLES, 2 * memory + 1024));
  const after = readings[readings.length - 1];
  const within = (share: number): number | null => {
    if (after === before) return null;
    let last = -1;
    readings.forEach((reading, index) => {
      if (Math.abs(reading - after) > share * Math.abs(after - before)) last = index;
    });
    return ((last + 1) * tuned.ratios.at(-1)!) / probe.converter.rate_kHz;
  };
  return { onePercentMs: within(0.01), oneThousandthMs: within(0.001) };
}

class SteadyCodes {
  last = 0;
  private readonly block = new Block(BLOCK);
  private readonly phases: readonly BiasPhase[];
  private readonly phaseSamples: number;
  private fed = 0;

  constructor(private readonly chain: Chain, private readonly midCode: number, private readonly wordPerCode: number, probe: Probe) {
    this.phases = biasPhases(probe.sensor.bias);
    this.phaseSamples = probe.sensor.biasPhase_samples;
  }

  settle(deviation: number, memory: number): void {
    for (let fed = 0; fed < MOST_SAMPLES; fed += BLOCK) {
      const settled = this.feed(deviation);
      if (settled && fed > memory) return;
    }
  }

  record(deviation: number, samples: number): number[] {
    const readings: number[] = [];
    for (let fed = 0; fed < samples; fed += BLOCK) {
      this.feed(deviation);
      for (let i = 0; i < this.block.count; i++) readings.push(this.block.value[i]);
    }
    return readings;
  }

  /** true when no reading of the block is settling. */
  private feed(deviation: number): boolean {
    const { block, phases } = this;
    block.count = BLOCK;
    for (let i = 0; i < BLOCK; i++, this.fed++) {
      const phase = phases[Math.floor(this.fed / this.phaseSamples) % phases.length];
      block.value[i] = (this.midCode + phase.signal * deviation) * this.wordPerCode;
      block.status[i] = phase.events;
    }
    this.chain.process(block);
    if (block.count === 0) return false;
    this.last = block.value[block.count - 1];
    return (block.status[block.count - 1] & SETTLING) === 0;
  }
}
