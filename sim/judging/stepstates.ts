/**
 * The two states of a step, base and top, as means of settled epochs: base over the second half of the time before the
 * step, top over the last tenth of the time behind it. IEC 60469 and IEEE Std 181 leave the way to find a state to the
 * user and ask that it is stated; a histogram mode needs bins that a streamed record does not know beforehand.
 * Levels between the states are percentages of the step from base to top. Refuses a step that it cannot tell apart from
 * its noise, that has not settled, or whose readings are flagged.
 */
import type { Scenario } from '../probe/fields.ts';
import { UNUSABLE, type Readings } from './play.ts';

const LEAST_READINGS = 10;
/** The level at 10 % must be this many standard deviations away from the state. */
const LEAST_DEVIATIONS = 4;
const MOST_DRIFT = 0.01;

export class StepStates {
  /** When the edge of the current begins, and how long it lasts. */
  readonly beginSeconds: number;
  readonly edgeSeconds: number;
  private readonly endSeconds: number;
  private readonly topSeconds: number;
  private readonly base = new Epoch();
  private readonly topEarly = new Epoch();
  private readonly topLate = new Epoch();
  private readonly shape: string;
  private flagged = 0;

  constructor(scenario: Scenario) {
    this.shape = scenario.current.shape;
    const { at_ms, edge_us } = scenario.current.shape === 'step' ? scenario.current : { at_ms: 0, edge_us: 0 };
    this.beginSeconds = at_ms / 1e3;
    this.edgeSeconds = edge_us / 1e6;
    this.endSeconds = scenario.duration_ms / 1e3;
    const settleFrom = this.beginSeconds + this.edgeSeconds;
    this.topSeconds = settleFrom + 0.9 * (this.endSeconds - settleFrom);
  }

  hear(block: Readings): void {
    const middle = (this.topSeconds + this.endSeconds) / 2;
    for (let i = 0; i < block.count; i++) {
      const seconds = block.seconds[i];
      const usable = (block.status[i] & UNUSABLE) === 0;
      if (seconds < this.beginSeconds) {
        if (usable && seconds >= this.beginSeconds / 2) this.base.hear(block.amperes[i]);
      } else if (!usable) {
        this.flagged++;
      } else if (seconds >= this.topSeconds) {
        (seconds < middle ? this.topEarly : this.topLate).hear(block.amperes[i]);
      }
    }
  }

  get baseAmperes(): number {
    return this.base.mean;
  }

  get topAmperes(): number {
    const { topEarly, topLate } = this;
    return (topEarly.mean * topEarly.count + topLate.mean * topLate.count) / (topEarly.count + topLate.count);
  }

  /** Larger of the standard deviations in the two states. */
  get scatterAmperes(): number {
    return Math.max(this.base.deviation, this.topEarly.deviation, this.topLate.deviation);
  }

  /** Why the step cannot be judged, or null. */
  refusal(): string | null {
    const { base, topEarly, topLate } = this;
    if (this.shape !== 'step') return `the current has the shape "${this.shape}", allowed "step"`;
    if (this.flagged > 0) return `${this.flagged} readings behind the step are flagged as unusable`;
    if (base.count < LEAST_READINGS) {
      return `fewer than ${LEAST_READINGS} usable readings in the second half of the time before the step (at_ms)`;
    }
    if (topEarly.count + topLate.count < LEAST_READINGS) {
      return `the scenario is too short: fewer than ${LEAST_READINGS} readings in its last tenth`;
    }
    const height = Math.abs(this.topAmperes - this.baseAmperes);
    if (!(0.1 * height > LEAST_DEVIATIONS * this.scatterAmperes)) {
      return `the step of ${height.toPrecision(3)} A cannot be told from noise: its states scatter by ` +
        `${this.scatterAmperes.toPrecision(3)} A, and a tenth of the step must exceed ${LEAST_DEVIATIONS} times that`;
    }
    if (Math.abs(topLate.mean - topEarly.mean) > MOST_DRIFT * height) {
      return `the reading still moves in the last tenth of the scenario, from ${topEarly.mean.toPrecision(4)} A to ` +
        `${topLate.mean.toPrecision(4)} A: make it longer`;
    }
    return null;
  }
}

/** Running mean and sum of squares (B. P. Welford, Technometrics 4, 1962). */
export class Epoch {
  count = 0;
  mean = 0;
  private squares = 0;

  hear(value: number): void {
    this.count++;
    const step = value - this.mean;
    this.mean += step / this.count;
    this.squares += step * (value - this.mean);
  }

  get deviation(): number {
    return this.count < 2 ? 0 : Math.sqrt(this.squares / (this.count - 1));
  }
}
