/**
 * The readings of one front end in one scenario beside the truth: worst and RMS error and the share of clipped samples
 * at the times that are judged, the means of both, and what is left of a step or pulse at its end, judged or not.
 */
import type { Scenario } from '../probe/fields.ts';

export interface WeighedScenario {
  scenario: string;
  /** Readings judged; without any there is no error. */
  readings: number;
  worstAmperes: number | null;
  worstSeconds: number | null;
  rmsAmperes: number | null;
  /** Of the judged samples: at a rail, or with a saturated core. */
  clippedShare: number | null;
  sentences: string[];
}

/** A change of the current to a level that stays until `toSeconds`. */
export interface Change {
  what: 'step' | 'pulse';
  fromSeconds: number;
  toSeconds: number;
  amperes: number;
}

/** Null where the current does not get to that level. */
export function changeOf({ current, duration_ms }: Scenario): Change | null {
  if (current.shape !== 'step' && current.shape !== 'pulse') return null;
  const [from, to] = current.shape === 'step' ? [current.from_A, current.to_A] : [current.base_A, current.peak_A];
  // the second edge of a pulse begins one width behind the first
  const end = current.shape === 'step' ? duration_ms : Math.min(duration_ms, current.at_ms + current.width_us * 1e-3);
  if (end <= current.at_ms + current.edge_us * 1e-3 || from === to) return null;
  return { what: current.shape, fromSeconds: current.at_ms * 1e-3, toSeconds: end * 1e-3, amperes: to - from };
}

/** What a judge wants to know of the readings of one front end, beside the truth. */
export class ErrorTally {
  judged = 0;
  clipped = 0;
  worstAmperes = 0;
  worstSeconds = 0;
  truthSum = 0;
  readingSum = 0;
  private squares = 0;
  /** Readings just before a change of the current and at the end of what follows. */
  beforeChange: number | null = null;
  afterChange: number | null = null;

  constructor(readonly change: Change | null) {}

  hear(seconds: number, reading: number, truth: number, clipped: boolean, judged: boolean): void {
    const { change } = this;
    if (change !== null) {
      if (seconds <= change.fromSeconds) this.beforeChange = reading;
      else if (seconds <= change.toSeconds) this.afterChange = reading;
    }
    if (!judged) return;
    const error = reading - truth;
    if (this.judged === 0 || Math.abs(error) > Math.abs(this.worstAmperes)) {
      this.worstAmperes = error;
      this.worstSeconds = seconds;
    }
    this.judged++;
    if (clipped) this.clipped++;
    this.squares += error * error;
    this.truthSum += truth;
    this.readingSum += reading;
  }

  result(scenario: Scenario, sentences: string[]): WeighedScenario {
    const { judged, worstAmperes, worstSeconds } = this;
    const base = { scenario: scenario.name, readings: judged, sentences };
    if (judged === 0) return { ...base, worstAmperes: null, worstSeconds: null, rmsAmperes: null, clippedShare: null };
    return {
      ...base, worstAmperes, worstSeconds, rmsAmperes: Math.sqrt(this.squares / judged),
      clippedShare: this.clipped / judged,
    };
  }
}
