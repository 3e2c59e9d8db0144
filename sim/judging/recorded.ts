/**
 * Codes recorded from a board through the same chain, block by block: readings with status out, and beside a recorded
 * reference current the worst error against the accuracy. The chain's constants are those of nominal parts.
 */
import { Block, Chain } from '../../lib/index.ts';
import type { Probe, Requirement } from '../probe/fields.ts';
import type { Tuned } from '../tuning/tune.ts';
import { allowed } from './measures.ts';
import { UNUSABLE } from './play.ts';
import { Truth } from './truth.ts';

/** One recorded sample. */
export interface RecordedSample {
  code: number;
  temperatureCode: number;
  /** EVENT_ bits. */
  events: number;
  /** Amperes; NaN when the record has no reference. */
  reference: number;
}

export interface RecordedReading {
  sample: number;
  amperes: number;
  status: number;
  /** Reference current, delayed as the chain states; NaN without one. */
  reference: number;
}

export interface RecordedVerdict {
  samples: number;
  readings: number;
  unusable: number;
  /** null: no reference, no accuracy to judge by, or no reading left that is not flagged. */
  worst: { share: number; error: number; limit: number; sample: number; reference: number } | null;
  holds: boolean;
}

const BLOCK = 256;

type Accuracy = Extract<Requirement, { measure: 'reading' | 'mean' }>;

/** What recorded readings are judged by: the first accuracy of readings, or else of means. */
function accuracyOf(probe: Probe): Accuracy | undefined {
  const of = (measure: string): Accuracy | undefined => probe.requirements.find((r): r is Accuracy => r.measure === measure);
  return of('reading') ?? of('mean');
}

export class RecordedPlayer {
  private readonly chain: Chain;
  private readonly block = new Block(BLOCK);
  private readonly truth: Truth;
  private readonly ratio: number;
  private readonly allowance: Accuracy | undefined;
  private done = 0;
  readonly verdict: RecordedVerdict = { samples: 0, readings: 0, unusable: 0, worst: null, holds: true };

  constructor(private readonly probe: Probe, private readonly tuned: Tuned, private readonly hear: (reading: RecordedReading) => void) {
    this.chain = new Chain(tuned.constants, tuned.makers);
    this.ratio = tuned.ratios.at(-1)!;
    this.truth = new Truth(Math.ceil(tuned.delaySamples) + 2 * BLOCK);
    this.allowance = accuracyOf(probe);
  }

  push(sample: RecordedSample): void {
    const { block } = this;
    if (block.count > 0 && block.temperatureCode !== sample.temperatureCode) this.flush();
    block.temperatureCode = sample.temperatureCode;
    block.value[block.count] = sample.code;
    block.status[block.count] = sample.events;
    block.count++;
    this.truth.push(sample.reference, 0, 0);
    if (block.count === BLOCK) this.flush();
  }

  /** Works through what is waiting; call it once at the end. */
  flush(): void {
    const { block, ratio, tuned } = this;
    const taken = block.count;
    if (taken === 0) return;
    this.chain.process(block);
    let input = Math.ceil((this.done + 1) / ratio) * ratio - 1;
    for (let i = 0; i < block.count; i++, input += ratio) {
      this.judge({
        sample: input, amperes: block.value[i] / tuned.readingsPerAmpere, status: block.status[i],
        reference: this.truth.at(input - tuned.delaySamples),
      });
    }
    this.done += taken;
    this.verdict.samples = this.done;
    block.count = 0;
  }

  private judge(reading: RecordedReading): void {
    const { verdict, allowance } = this;
    verdict.readings++;
    this.hear(reading);
    if (reading.status & UNUSABLE) {
      verdict.unusable++;
      return;
    }
    if (allowance === undefined || Number.isNaN(reading.reference)) return;
    const limit = allowed(allowance, reading.reference, this.probe.range_A);
    const error = reading.amperes - reading.reference;
    const share = Math.abs(error) / limit;
    if (verdict.worst !== null && share <= verdict.worst.share) return;
    verdict.worst = { share, error, limit, sample: reading.sample, reference: reading.reference };
    verdict.holds = share <= 1;
  }
}
