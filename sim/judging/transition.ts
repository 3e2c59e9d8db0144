/**
 * Transition duration and overshoot of a step, in the terms of IEC 60469 (as IEEE Std 181): the states as stepstates.ts
 * finds them in the first pass; in the second pass the instants at which the reading crosses 10 % and 90 % of the step,
 * those nearest to its first crossing of 50 %, on straight lines between readings; overshoot is the largest distance
 * beyond the top state behind the 50 % instant, as a share of the step.
 */
import type { Requirement, Scenario } from '../probe/fields.ts';
import { type Measure, type Measured, shareOf, timeText } from './measures.ts';
import type { Readings } from './play.ts';
import { StepStates } from './stepstates.ts';

type Of<M extends Requirement['measure']> = Extract<Requirement, { measure: M }>;

/** Instants of the transition, heard reading by reading; levels run from 0 (base) to 1 (top). */
export class Transition {
  tenSeconds = NaN;
  fiftySeconds = NaN;
  ninetySeconds = NaN;
  /** Largest level behind the 50 % instant. */
  peakLevel = -Infinity;
  peakSeconds = NaN;
  periodSeconds = NaN;
  /** 10 % and 90 % lie between the same two readings. */
  unresolved = false;
  private level = NaN;
  private seconds = NaN;
  private tenReading = -1;
  private reading = 0;

  hear(level: number, seconds: number): void {
    const from = this.level;
    const since = this.seconds;
    const crossing = (at: number): number => since + ((at - from) / (level - from)) * (seconds - since);
    this.reading++;
    if (Number.isNaN(this.fiftySeconds)) {
      if (from < 0.1 && level >= 0.1) {
        this.tenSeconds = crossing(0.1);
        this.tenReading = this.reading;
      }
      if (from < 0.5 && level >= 0.5) this.fiftySeconds = crossing(0.5);
    }
    if (!Number.isNaN(this.fiftySeconds)) {
      if (Number.isNaN(this.ninetySeconds) && level >= 0.9) {
        this.ninetySeconds = from < 0.9 ? crossing(0.9) : since;
        this.unresolved = this.reading === this.tenReading;
      }
      if (level > this.peakLevel) {
        this.peakLevel = level;
        this.peakSeconds = seconds;
      }
    }
    this.periodSeconds = seconds - since;
    this.level = level;
    this.seconds = seconds;
  }
}

abstract class StepMeasure implements Measure {
  passes = 2;
  protected readonly states: StepStates;
  protected readonly transition = new Transition();

  constructor(scenario: Scenario) {
    this.states = new StepStates(scenario);
  }

  readings(block: Readings, pass: number): void {
    if (pass === 1) {
      this.states.hear(block);
      return;
    }
    const base = this.states.baseAmperes;
    const height = this.states.topAmperes - base;
    // a reading belongs to the base until the current begins to change
    const from = this.states.beginSeconds;
    for (let i = 0; i < block.count; i++) {
      const level = block.seconds[i] < from ? 0 : (block.amperes[i] - base) / height;
      this.transition.hear(level, block.seconds[i]);
    }
  }

  record(): void {}

  result(): Measured | string {
    return this.states.refusal() ?? this.measured();
  }

  protected abstract measured(): Measured | string;
}

export class TransitionDuration extends StepMeasure {
  constructor(private readonly requirement: Of<'transition'>, scenario: Scenario) {
    super(scenario);
  }

  protected measured(): Measured | string {
    const { tenSeconds, ninetySeconds, unresolved, periodSeconds } = this.transition;
    if (Number.isNaN(tenSeconds + ninetySeconds)) return 'the reading does not cross 10 % and 90 % of the step';
    // between two readings anything may have happened: their distance is the least that can be claimed
    const value = (unresolved ? periodSeconds : ninetySeconds - tenSeconds) * 1e3;
    const limit = this.requirement.limit_ms;
    const own = 0.8 * this.states.edgeSeconds;
    return {
      value, limit, unit: 'ms', share: shareOf(value, limit),
      where: unresolved ? 'within one reading: at most its period' : '10 % to 90 %',
      shape: `the reading takes ${timeText(value / 1e3)} from 10 % to 90 %, the current itself ${timeText(own)}` +
        (unresolved ? '; readings come too seldom to show more' : ''),
    };
  }
}

export class Overshoot extends StepMeasure {
  constructor(private readonly requirement: Of<'overshoot'>, scenario: Scenario) {
    super(scenario);
  }

  protected measured(): Measured | string {
    const { peakLevel, peakSeconds } = this.transition;
    if (peakLevel === -Infinity) return 'the reading does not cross 50 % of the step';
    const value = Math.max(0, 100 * (peakLevel - 1));
    const limit = this.requirement.limit_percent;
    const after = timeText(peakSeconds - this.states.beginSeconds);
    const height = Math.abs(this.states.topAmperes - this.states.baseAmperes);
    const scatter = (100 * this.states.scatterAmperes) / height;
    return {
      value, limit, unit: '%', share: shareOf(value, limit), where: `${after} behind the step`,
      shape: `the reading goes ${value.toPrecision(3)} % of the step beyond its end value, ${after} behind the step` +
        (scatter > value / 4 ? `; its states scatter by ${scatter.toPrecision(2)} % of the step (noise)` : ''),
    };
  }
}
