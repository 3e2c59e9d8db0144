/**
 * What is measured of a scenario: one observer a requirement. Readings that are flagged unusable, and readings at times
 * that are not judged, are left out of the error (they are counted elsewhere). A measure that its scenario cannot support
 * says why instead of guessing.
 */
import type { Requirement, Scenario } from '../probe/fields.ts';
import { ErrorShape } from './errorshape.ts';
import { UNUSABLE, type Observer, type Readings, type Record } from './play.ts';

export interface Measured {
  /** In `unit`. */
  value: number;
  limit: number;
  unit: 'A' | 'ms';
  /** Share of the allowance used: 1 is all of it. */
  share: number;
  where: string;
  /** What the error is made of, in words, for a failing row. */
  shape: string;
}

/** A measure: an observer with a result. A string says why there is none. */
export interface Measure extends Observer {
  result(): Measured | string;
}

type Allowance = { percentOfReading: number; percentOfRange: number; amperes: number };

export function measureFor(requirement: Requirement, scenario: Scenario, rangeAmperes: number): Measure {
  switch (requirement.measure) {
    case 'reading': return new ReadingError(requirement, rangeAmperes);
    case 'mean':
    case 'trueRms':
    case 'acRms': return new RecordError(requirement, rangeAmperes);
    case 'noise': return new NoiseOfReading(requirement.limit_A);
    case 'settling': return new SettlingTime(requirement, scenario);
    case 'swallowed': throw new TypeError('swallowed: told from the constants, not from a scenario');
  }
}

export function allowed(allowance: Allowance, trueAmperes: number, rangeAmperes: number): number {
  return (allowance.percentOfReading / 100) * Math.abs(trueAmperes) + (allowance.percentOfRange / 100) * rangeAmperes + allowance.amperes;
}

/** The point where an error uses most of its allowance. */
class Worst {
  share = -1;
  error = 0;
  limit = 0;
  truth = 0;
  slope = 0;
  seconds = 0;

  hear(error: number, limit: number, truth: number, slope: number, seconds: number): void {
    const share = Math.abs(error) / limit;
    if (!(share > this.share)) return;
    this.share = share;
    this.error = error;
    this.limit = limit;
    this.truth = truth;
    this.slope = slope;
    this.seconds = seconds;
  }

  measured(shape: string): Measured {
    return {
      value: this.error, limit: this.limit, unit: 'A', share: this.share, shape,
      where: `at ${timeText(this.seconds)}, true ${this.truth.toPrecision(4)} A`,
    };
  }
}

class ReadingError implements Measure {
  passes = 1;
  private readonly worst = new Worst();
  private readonly shape = new ErrorShape();
  private left = 0;
  private flagged = 0;

  constructor(private readonly allowance: Allowance, private readonly rangeAmperes: number) {}

  readings(block: Readings): void {
    for (let i = 0; i < block.count; i++) {
      if (block.judged[i] === 0) continue;
      if (block.status[i] & UNUSABLE) {
        this.flagged++;
        continue;
      }
      const truth = block.truth[i];
      const error = block.amperes[i] - truth;
      this.left++;
      this.shape.hear(error, truth, block.slope[i]);
      this.worst.hear(error, allowed(this.allowance, truth, this.rangeAmperes), truth, block.slope[i], block.seconds[i]);
    }
  }

  record(): void {}

  result(): Measured | string {
    if (this.left === 0) return nothingLeft(this.flagged, 'reading');
    return this.worst.measured(this.shape.words(this.worst));
  }
}

class RecordError implements Measure {
  passes = 1;
  private readonly worst = new Worst();
  private readonly shape = new ErrorShape();
  private left = 0;
  private flagged = 0;
  private cycleless = 0;

  constructor(
    private readonly requirement: Extract<Requirement, { measure: 'mean' | 'trueRms' | 'acRms' }>,
    private readonly rangeAmperes: number,
  ) {}

  readings(): void {}

  record(record: Record): void {
    if (record.meter !== this.requirement.meter || !record.judged) return;
    if (record.status & UNUSABLE) {
      this.flagged++;
      return;
    }
    if (record.cycles === 0) this.cycleless++;
    const statistic = this.requirement.measure;
    const truth = record.truth[statistic];
    const error = record[statistic] - truth;
    this.left++;
    this.shape.hear(error, truth, 0);
    this.worst.hear(error, allowed(this.requirement, truth, this.rangeAmperes), truth, 0, record.seconds);
  }

  result(): Measured | string {
    if (this.left === 0) return nothingLeft(this.flagged, `window of meter "${this.requirement.meter}"`);
    return this.worst.measured(this.shape.words(this.worst));
  }
}

class NoiseOfReading implements Measure {
  passes = 1;
  private count = 0;
  private mean = 0;
  private squares = 0;
  private flagged = 0;

  constructor(private readonly limitAmperes: number) {}

  readings(block: Readings): void {
    for (let i = 0; i < block.count; i++) {
      if (block.judged[i] === 0) continue;
      if (block.status[i] & UNUSABLE) {
        this.flagged++;
        continue;
      }
      // running mean and sum of squares (B. P. Welford, Technometrics 4, 1962)
      this.count++;
      const step = block.amperes[i] - this.mean;
      this.mean += step / this.count;
      this.squares += step * (block.amperes[i] - this.mean);
    }
  }

  record(): void {}

  result(): Measured | string {
    if (this.count < 2) return nothingLeft(this.flagged, 'reading');
    const value = Math.sqrt(this.squares / (this.count - 1));
    return {
      value, limit: this.limitAmperes, unit: 'A', share: value / this.limitAmperes, where: `over ${this.count} readings`,
      shape: `the readings scatter by ${value.toPrecision(3)} A (standard deviation)`,
    };
  }
}

/** First pass: the end value, mean of the last tenth. Second pass: the last reading outside the band around it. */
class SettlingTime implements Measure {
  passes = 2;
  private endSum = 0;
  private endCount = 0;
  private lastOutsideSeconds = -1;
  private firstInsideSeconds = -1;
  private readonly middleSeconds: number;
  private readonly tenthSeconds: number;
  private readonly bandAmperes: number;

  constructor(private readonly requirement: Extract<Requirement, { measure: 'settling' }>, scenario: Scenario) {
    if (scenario.current.shape !== 'step') throw new TypeError(`settling: scenario "${scenario.name}" is no step`);
    const { from_A, to_A, at_ms, edge_us } = scenario.current;
    this.middleSeconds = at_ms / 1e3 + edge_us / 2e6;
    this.tenthSeconds = this.middleSeconds + 0.9 * (scenario.duration_ms / 1e3 - this.middleSeconds);
    this.bandAmperes = (requirement.band_percent / 100) * Math.abs(to_A - from_A);
  }

  readings(block: Readings, pass: number): void {
    for (let i = 0; i < block.count; i++) {
      const seconds = block.seconds[i];
      if (seconds < this.middleSeconds) continue;
      if (pass === 1) {
        if (seconds < this.tenthSeconds) continue;
        this.endSum += block.amperes[i];
        this.endCount++;
      } else if (Math.abs(block.amperes[i] - this.endSum / this.endCount) > this.bandAmperes) {
        this.lastOutsideSeconds = seconds;
        this.firstInsideSeconds = -1;
      } else if (this.firstInsideSeconds < 0) {
        this.firstInsideSeconds = seconds;
      }
    }
  }

  record(): void {}

  result(): Measured | string {
    if (this.endCount < 10) return 'the scenario is too short: fewer than 10 readings in its last tenth';
    const band = `within ${this.requirement.band_percent} % of the step`;
    if (this.firstInsideSeconds < 0 || this.firstInsideSeconds > this.tenthSeconds) {
      return `the reading does not stay ${band} (${this.bandAmperes.toPrecision(3)} A) before the scenario ends`;
    }
    const value = (this.firstInsideSeconds - this.middleSeconds) * 1e3;
    const share = value / this.requirement.limit_ms;
    return {
      value, limit: this.requirement.limit_ms, unit: 'ms', share, where: band,
      shape: this.lastOutsideSeconds < 0
        ? 'the first reading behind the step comes too late'
        : `the last reading outside the band comes ${((this.lastOutsideSeconds - this.middleSeconds) * 1e3).toPrecision(4)} ms ` +
          'behind the step: filters and averages ahead of the reading are slower than the limit',
    };
  }
}

function nothingLeft(flagged: number, what: string): string {
  return flagged === 0
    ? `the scenario is too short: not one ${what} at a time that is judged (judgeFrom_ms, settle_ms)`
    : `every ${what} is flagged as unusable (${flagged} of ${flagged})`;
}

export function timeText(seconds: number): string {
  return seconds < 1 ? `${(seconds * 1e3).toPrecision(4)} ms` : `${seconds.toPrecision(5)} s`;
}
