/**
 * How soon an over-range is told, and how soon readings are good again. An excursion is a stretch of grid points where
 * the current is beyond the nominal range; it is found in the current itself, walked once more beside the readings, so
 * that a clip shorter than a reading is not missed.
 *   delay     from the first point beyond the range to the first reading flagged as unusable
 *   recovery  from the first point back in the range to the first reading behind it that is not flagged, given that the
 *             excursion was flagged at all
 * The next excursion that begins before readings are good again belongs to the one under way. The worst one counts.
 * Memory does not grow with their number.
 */
import { gridFactorOf } from '../hardware/grid.ts';
import { openCurrent, type CurrentSource } from '../current/source.ts';
import type { Probe, Requirement, Scenario } from '../probe/fields.ts';
import { shareOf, timeText, type Measure, type Measured } from './measures.ts';
import { UNUSABLE, type Readings } from './play.ts';

type Of<M extends Requirement['measure']> = Extract<Requirement, { measure: M }>;

export interface Excursion {
  fromSeconds: number;
  /** First point back in the range; Infinity: the scenario ends first. */
  toSeconds: number;
  peakAmperes: number;
}

const POINTS_AT_ONCE = 4096;

/** Excursions of a current, one after another. */
export class Excursions {
  private readonly source: CurrentSource;
  private readonly points = new Float64Array(POINTS_AT_ONCE);
  private readonly stepSeconds: number;
  private readonly total: number;
  private readonly rangeAmperes: number;
  private read = 0;
  private at = 0;
  private filled = 0;

  constructor(probe: Probe, scenario: Scenario, folder: string) {
    const factor = gridFactorOf(probe).factor;
    this.stepSeconds = 1 / (probe.converter.rate_kHz * 1e3 * factor);
    this.total = Math.floor(scenario.duration_ms * probe.converter.rate_kHz + 1e-6) * factor;
    this.rangeAmperes = probe.range_A;
    this.source = openCurrent(scenario.current, this.stepSeconds, folder);
  }

  next(): Excursion | null {
    while (this.more() && Math.abs(this.points[this.at]) <= this.rangeAmperes) this.at++;
    if (!this.more()) {
      this.source.close();
      return null;
    }
    const fromSeconds = this.seconds();
    let peakAmperes = 0;
    while (this.more() && Math.abs(this.points[this.at]) > this.rangeAmperes) {
      if (Math.abs(this.points[this.at]) > Math.abs(peakAmperes)) peakAmperes = this.points[this.at];
      this.at++;
    }
    return { fromSeconds, toSeconds: this.more() ? this.seconds() : Infinity, peakAmperes };
  }

  private seconds(): number {
    return (this.read - this.filled + this.at) * this.stepSeconds;
  }

  private more(): boolean {
    if (this.at < this.filled) return true;
    if (this.read >= this.total) return false;
    this.filled = Math.min(POINTS_AT_ONCE, this.total - this.read);
    this.source.next(this.points, this.filled);
    this.read += this.filled;
    this.at = 0;
    return true;
  }
}

/** Hears readings and excursions side by side. */
abstract class Excursed implements Measure {
  passes = 1;
  protected worstSeconds = -1;
  protected worst: Excursion | null = null;
  protected worstReading = NaN;
  protected judged = 0;
  /** The one under way; `told` is its first flagged reading, `good` the first good one behind it; NaN: not yet. */
  protected current: Excursion | null;
  protected told = NaN;
  protected good = NaN;
  protected readonly rangeAmperes: number;
  private upcoming: Excursion | null;
  private answer: Measured | string | null = null;
  private readonly list: Excursions;

  constructor(probe: Probe, scenario: Scenario, folder: string) {
    this.rangeAmperes = probe.range_A;
    this.list = new Excursions(probe, scenario, folder);
    this.current = this.list.next();
    this.upcoming = this.current === null ? null : this.list.next();
  }

  readings(block: Readings): void {
    for (let i = 0; i < block.count; i++) {
      const seconds = block.seconds[i];
      while (this.upcoming !== null && seconds >= this.upcoming.fromSeconds) this.goOn(this.upcoming);
      const { current } = this;
      if (current === null || seconds < current.fromSeconds) continue;
      const usable = (block.status[i] & UNUSABLE) === 0;
      if (!usable && Number.isNaN(this.told)) this.told = seconds;
      const recovering = !Number.isNaN(this.told) && Number.isNaN(this.good);
      if (usable && recovering && seconds >= current.toSeconds) this.good = seconds;
    }
  }

  record(): void {}

  result(): Measured | string {
    if (this.current !== null) return this.answer ??= this.measured(this.current);
    return `the current never leaves the range of ±${this.rangeAmperes} A during the scenario`;
  }

  /** Called once for every excursion behind which readings were good again, and for the last one. */
  protected abstract conclude(excursion: Excursion): void;
  protected abstract measured(last: Excursion): Measured | string;

  protected hearWorst(excursion: Excursion, fromSeconds: number, reading: number): void {
    this.judged++;
    if (reading - fromSeconds <= this.worstSeconds) return;
    this.worstSeconds = reading - fromSeconds;
    this.worst = excursion;
    this.worstReading = reading;
  }

  private goOn(next: Excursion): void {
    const current = this.current!;
    this.upcoming = this.list.next();
    if (Number.isNaN(this.good)) {
      const peak = Math.abs(next.peakAmperes) > Math.abs(current.peakAmperes) ? next.peakAmperes : current.peakAmperes;
      this.current = { fromSeconds: current.fromSeconds, toSeconds: next.toSeconds, peakAmperes: peak };
      return;
    }
    this.conclude(current);
    this.current = next;
    this.told = NaN;
    this.good = NaN;
  }
}

export class OverRangeDelay extends Excursed {
  constructor(private readonly requirement: Of<'overRangeDelay'>, probe: Probe, scenario: Scenario, folder: string) {
    super(probe, scenario, folder);
  }

  protected conclude(excursion: Excursion): void {
    // a scenario that begins beyond the range does not say when the current left it
    if (excursion.fromSeconds === 0 || Number.isNaN(this.told)) return;
    this.hearWorst(excursion, excursion.fromSeconds, this.told);
  }

  protected measured(last: Excursion): Measured | string {
    if (Number.isNaN(this.told)) {
      return `the current leaves the range at ${timeText(last.fromSeconds)} (${extentText(last)}) ` +
        'and no reading is flagged from then on';
    }
    this.conclude(last);
    const { worst } = this;
    if (worst === null) return 'the current is beyond the range from the start and never leaves it anew';
    const value = this.worstSeconds * 1e3;
    const limit = this.requirement.limit_ms;
    return {
      value, limit, unit: 'ms', share: shareOf(value, limit),
      where: `from ${timeText(worst.fromSeconds)} on, worst of ${this.judged}`,
      shape: `the current leaves the range at ${timeText(worst.fromSeconds)} (${extentText(worst)}) and the first ` +
        `flagged reading comes at ${timeText(this.worstReading)}: nothing tells before a rail or limit of overRange ` +
        'is reached, and a decimated reading comes only once in its period',
    };
  }
}

export class OverRangeRecovery extends Excursed {
  constructor(private readonly requirement: Of<'overRangeRecovery'>, probe: Probe, scenario: Scenario, folder: string) {
    super(probe, scenario, folder);
  }

  protected conclude(excursion: Excursion): void {
    if (!Number.isNaN(this.good)) this.hearWorst(excursion, excursion.toSeconds, this.good);
  }

  protected measured(last: Excursion): Measured | string {
    if (Number.isNaN(this.told) && this.judged === 0) {
      return `no reading is flagged although the current is beyond the range at ${timeText(last.fromSeconds)} ` +
        `(${extentText(last)}): there is nothing to recover from`;
    }
    if (!Number.isNaN(this.told) && Number.isNaN(this.good)) {
      return last.toSeconds === Infinity ? 'the scenario ends while the current is still beyond the range'
        : `readings are not good again before the scenario ends; the current came back at ${timeText(last.toSeconds)}`;
    }
    this.conclude(last);
    const worst = this.worst!;
    const value = this.worstSeconds * 1e3;
    const limit = this.requirement.limit_ms;
    return {
      value, limit, unit: 'ms', share: shareOf(value, limit),
      where: `from ${timeText(worst.toSeconds)} on, worst of ${this.judged}`,
      shape: `the current is back in the range at ${timeText(worst.toSeconds)} and readings are good again from ` +
        `${timeText(this.worstReading)} on: hold_ms of overRange and the memory of filters and averages add up`,
    };
  }
}

function extentText(excursion: Excursion): string {
  const peak = `peak ${excursion.peakAmperes.toPrecision(4)} A`;
  if (excursion.toSeconds === Infinity) return `${peak}, to the end`;
  return `${peak}, ${timeText(excursion.toSeconds - excursion.fromSeconds)}`;
}
