/**
 * What is measured of a scenario: one observer a requirement. Readings that are flagged unusable, and readings at times
 * that are not judged, are left out of the error (they are counted elsewhere). A measure that its scenario cannot support
 * says why instead of guessing.
 */
import type { Probe, Requirement, Scenario, StageSpecOf } from '../probe/fields.ts';
import { ErrorShape } from './errorshape.ts';
import { longestPeriodSeconds } from './period.ts';
import { UNUSABLE, type Observer, type Readings, type Record } from './play.ts';

export type Unit = 'A' | 'ms' | '%' | 'Hz' | '°' | 'dB' | 'bits';
export type Better = 'less' | 'more';

export interface Measured {
  /** In `unit`. */
  value: number;
  limit: number;
  unit: Unit;
  /** 'more': the limit is a least value. Left out: 'less'. */
  better?: Better;
  /** Share of the allowance used: 1 is all of it. */
  share: number;
  where: string;
  /** Share of the readings or windows that were flagged and left out of the error. */
  leftOut?: number;
  /** What the error is made of, in words, for a failing row. */
  shape: string;
}

/** A measure: an observer with a result. A string says why there is none. */
export interface Measure extends Observer {
  result(): Measured | string;
}

type Allowance = { percentOfReading: number; percentOfRange: number; amperes: number };

/** What a requirement asks for, for a row that could not be measured. */
export function limitOf(requirement: Requirement): { limit: number; unit: Unit; better: Better } {
  switch (requirement.measure) {
    case 'reading':
    case 'mean':
    case 'trueRms':
    case 'acRms':
    case 'band': return { limit: requirement.amperes, unit: 'A', better: 'less' };
    case 'gain':
    case 'overshoot': return { limit: requirement.limit_percent, unit: '%', better: 'less' };
    case 'phase': return { limit: requirement.limit_deg, unit: '°', better: 'less' };
    case 'bandwidth': return { limit: requirement.atLeast_Hz, unit: 'Hz', better: 'more' };
    case 'sinad': return { limit: requirement.atLeast_dB, unit: 'dB', better: 'more' };
    case 'effectiveBits': return { limit: requirement.atLeast_bits, unit: 'bits', better: 'more' };
    case 'settling':
    case 'transition':
    case 'overRangeDelay':
    case 'overRangeRecovery': return { limit: requirement.limit_ms, unit: 'ms', better: 'less' };
    case 'noise':
    case 'zeroOverTemperature':
    case 'zeroAfterOverload':
    case 'zeroOverTime':
    case 'swallowed': return { limit: requirement.limit_A, unit: 'A', better: 'less' };
  }
}

/** Share of an allowance; nothing used of an allowance of nothing is no share of it. */
export function shareOf(value: number, limit: number): number {
  return value === 0 ? 0 : Math.abs(value) / limit;
}

export function allowed(allowance: Allowance, trueAmperes: number, rangeAmperes: number): number {
  return (allowance.percentOfReading / 100) * Math.abs(trueAmperes) + (allowance.percentOfRange / 100) * rangeAmperes + allowance.amperes;
}

type MeterSpec = StageSpecOf<'meter'>;
type RecordAllowance = Allowance & { measure: 'mean' | 'trueRms' | 'acRms'; meter: string };

/** A statistic of less than a period is a matter of where the window begins. */
function shortWindow(spec: MeterSpec | undefined, { name, current }: Scenario): string | null {
  const period = longestPeriodSeconds(current);
  if (period === null || spec === undefined) return null;
  // a window that is meant to be a period may be off by rounding
  if (spec.window_ms / 1e3 >= period * (1 - 1e-6)) return null;
  return `a window of meter "${spec.name}" (${timeText(spec.window_ms / 1e3)}) is shorter than a period of ` +
    `the current of "${name}" (${timeText(period)})`;
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
    const share = shareOf(error, limit);
    if (!(share > this.share)) return;
    this.share = share;
    this.error = error;
    this.limit = limit;
    this.truth = truth;
    this.slope = slope;
    this.seconds = seconds;
  }

  /** `left`, `out`: how many were judged and how many were flagged and left out. */
  measured(shape: string, left: number, out: number): Measured {
    const flagged = out === 0 ? '' : `; ${((100 * out) / (left + out)).toPrecision(3)} % flagged and left out`;
    return {
      value: this.error, limit: this.limit, unit: 'A', share: this.share, shape, leftOut: out / (left + out),
      where: `at ${timeText(this.seconds)}, true ${this.truth.toPrecision(4)} A${flagged}`,
    };
  }
}

export class ReadingError implements Measure {
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
    return this.worst.measured(this.shape.words(this.worst), this.left, this.flagged);
  }
}

export class RecordError implements Measure {
  passes = 1;
  private readonly worst = new Worst();
  private readonly shape = new ErrorShape();
  private left = 0;
  private flagged = 0;
  /** Windows that timed out although the meter counts whole cycles. */
  private cycleless = 0;
  private readonly wantsCycles: boolean;
  /** Why no window of this meter can show this current; null: they can. */
  private readonly tooShort: string | null;

  constructor(private readonly requirement: RecordAllowance, private readonly probe: Probe, scenario: Scenario) {
    const meter = probe.chain.find((stage): stage is MeterSpec => stage.stage === 'meter' && stage.name === requirement.meter);
    this.tooShort = shortWindow(meter, scenario);
    this.wantsCycles = meter !== undefined && meter.cycles > 0;
  }

  /** The worst error as a share of the true value there. */
  get worstShareOfTruth(): number {
    return this.worst.error / this.worst.truth;
  }

  /** Windows that were judged and not flagged. */
  get windows(): number {
    return this.left;
  }

  readings(): void {}

  record(record: Record): void {
    if (record.meter !== this.requirement.meter || !record.judged) return;
    if (record.status & UNUSABLE) {
      this.flagged++;
      return;
    }
    if (this.wantsCycles && record.cycles === 0) {
      this.cycleless++;
      return;
    }
    const statistic = this.requirement.measure;
    const truth = record.truth[statistic];
    const error = record[statistic] - truth;
    this.left++;
    this.shape.hear(error, truth, 0);
    this.worst.hear(error, allowed(this.requirement, truth, this.probe.range_A), truth, 0, record.seconds);
  }

  result(): Measured | string {
    if (this.tooShort !== null) return this.tooShort;
    if (this.cycleless > 0) {
      return `${this.cycleless} of ${this.cycleless + this.left} windows of meter "${this.requirement.meter}" timed out without whole ` +
        'cycles: its hysteresis_A is beyond the current, or its window_ms too short';
    }
    if (this.left === 0) return nothingLeft(this.flagged, `window of meter "${this.requirement.meter}"`);
    return this.worst.measured(this.shape.words(this.worst), this.left, this.flagged);
  }
}

export class NoiseOfReading implements Measure {
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
      value, limit: this.limitAmperes, unit: 'A', share: shareOf(value, this.limitAmperes), where: `over ${this.count} readings`,
      shape: `the readings scatter by ${value.toPrecision(3)} A (standard deviation)`,
    };
  }
}

/** First pass: the end value, mean of the last tenth. Second pass: the last reading outside the band around it. */
export class SettlingTime implements Measure {
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
