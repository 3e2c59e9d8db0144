/**
 * Events of a scenario on the sample clock: which A/D samples carry which event bit, before which sample a power cycle
 * happens, and where the jaw, the polarity or the magnetisation of the core changes. Sample k belongs to an event that
 * begins at or before its instant and has not ended by then; an event too short to meet an instant takes the first
 * sample behind its begin. Hardware changes with the first grid point of a sample's period. Power cycle and degaussing
 * are moments: the length of a power cycle is not used. Behind the last sample nothing happens.
 */
import { EVENT_CLEAR, EVENT_DEGAUSSED, EVENT_ZERO } from '../../lib/status.ts';
import type { Scenario } from '../probe/fields.ts';

type EventName = Scenario['events'][number]['event'];

const BITS: Partial<Record<EventName, number>> = {
  'zero button': EVENT_ZERO, 'sticky clear': EVENT_CLEAR, degaussed: EVENT_DEGAUSSED,
};

interface Span {
  event: EventName;
  first: number;
  /** One behind the last. */
  end: number;
}

/** What stands at a sample, before anything of that sample is computed. */
export interface Standing {
  jawOpen: boolean;
  /** The probe is around the conductor the other way. */
  turned: boolean;
  /** The core is demagnetised just before this sample. */
  degaussed: boolean;
}

export class Timetable {
  private readonly spans: Span[] = [];
  /** Samples before which a power cycle happens, ascending. */
  private readonly powerCycles: number[];
  /** Samples at which what stands may change, ascending. */
  private readonly changes: number[];

  /** `indexAt`: the first sample whose instant is at or behind a time. */
  constructor(events: Scenario['events'], indexAt: (seconds: number) => number) {
    const cycles = new Set<number>();
    const changes = new Set<number>();
    for (const { event, at_ms, for_ms } of events) {
      const first = indexAt(at_ms * 1e-3);
      const end = Math.max(first + 1, indexAt((at_ms + for_ms) * 1e-3));
      if (event === 'power cycle') cycles.add(first);
      else this.spans.push({ event, first, end });
      if (event === 'jaw opened' || event === 'polarity') changes.add(first).add(end);
      if (event === 'degaussed') changes.add(first);
    }
    this.powerCycles = ascending(cycles);
    this.changes = ascending(changes);
  }

  startsWithPowerCycle(sample: number): boolean {
    return this.powerCycles.includes(sample);
  }

  /** The end of a block that begins at `sample`: not beyond `end`, not across a power cycle. */
  blockEnd(sample: number, end: number): number {
    return nextOf(this.powerCycles, sample, end);
  }

  /** The next sample behind `sample` at which what stands may change, or `end`. */
  steadyUntil(sample: number, end: number): number {
    return nextOf(this.changes, sample, end);
  }

  standing(sample: number): Standing {
    const within = (name: EventName) =>
      this.spans.some(({ event, first, end }) => event === name && first <= sample && sample < end);
    return {
      jawOpen: within('jaw opened'), turned: within('polarity'),
      degaussed: this.spans.some(({ event, first }) => event === 'degaussed' && first === sample),
    };
  }

  /** ORs the event bits of samples from `sample` on into `events`. */
  mark(events: Int32Array, sample: number, count: number): void {
    for (const { event, first, end } of this.spans) {
      const bit = BITS[event] ?? 0;
      const to = Math.min(end, sample + count);
      for (let k = Math.max(first, sample); k < to; k++) events[k - sample] |= bit;
    }
  }
}

function ascending(samples: Set<number>): number[] {
  return [...samples].sort((a, b) => a - b);
}

function nextOf(samples: readonly number[], sample: number, end: number): number {
  for (const one of samples) if (one > sample) return Math.min(end, one);
  return end;
}
