/**
 * Events of a scenario on the sample clock: which A/D samples carry which event bit, and before which sample a power
 * cycle happens. Sample k belongs to an event that begins at or before its instant and has not ended by then; an event
 * too short to meet an instant marks the first sample behind its begin. A power cycle is a moment: its length is not
 * used. Behind the last sample nothing happens.
 */
import { EVENT_CLEAR, EVENT_DEGAUSSED, EVENT_ZERO } from '../../lib/status.ts';
import type { Scenario } from '../probe/fields.ts';

const BITS = { 'zero button': EVENT_ZERO, 'sticky clear': EVENT_CLEAR, degaussed: EVENT_DEGAUSSED } as const;

interface Span {
  first: number;
  /** One behind the last. */
  end: number;
  bit: number;
}

export class Timetable {
  private readonly spans: Span[] = [];
  /** Samples before which a power cycle happens, ascending. */
  private readonly powerCycles: number[];

  /** `indexAt`: the first sample whose instant is at or behind a time. */
  constructor(events: Scenario['events'], indexAt: (seconds: number) => number) {
    const cycles = new Set<number>();
    for (const { event, at_ms, for_ms } of events) {
      const first = indexAt(at_ms * 1e-3);
      if (event === 'power cycle') {
        cycles.add(first);
        continue;
      }
      const end = Math.max(first + 1, indexAt((at_ms + for_ms) * 1e-3));
      this.spans.push({ first, end, bit: BITS[event] });
    }
    this.powerCycles = [...cycles].sort((a, b) => a - b);
  }

  startsWithPowerCycle(sample: number): boolean {
    return this.powerCycles.includes(sample);
  }

  /** The end of a block that begins at `sample`: not beyond `end`, not across a power cycle. */
  blockEnd(sample: number, end: number): number {
    for (const cycle of this.powerCycles) if (cycle > sample) return Math.min(end, cycle);
    return end;
  }

  /** ORs the event bits of samples from `sample` on into `events`. */
  mark(events: Int32Array, sample: number, count: number): void {
    for (const span of this.spans) {
      const from = Math.max(span.first, sample);
      const to = Math.min(span.end, sample + count);
      for (let k = from; k < to; k++) events[k - sample] |= span.bit;
    }
  }
}
