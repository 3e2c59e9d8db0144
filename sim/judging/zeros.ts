/**
 * How far the zero of the reading moves: over temperature, by an overload, and over time (Allan deviation). The zero of
 * a stretch of time is the mean of reading minus true current over its unflagged readings.
 * Over temperature the scenarios are made here: no current, the whole probe at the coldest, at 25 °C if that lies
 * inside, and at the warmest; a zero at start-up is then taken at that temperature, as the firmware would.
 */
import { TRACKING, ZERO_SUSPECT } from '../../lib/index.ts';
import type { Probe, Requirement, Scenario } from '../probe/fields.ts';
import { AllanStream, slopeWords } from './allan.ts';
import { temperaturesOf } from './band.ts';
import { madeScenario, startOf } from './made.ts';
import { shareOf, timeText, type Measure, type Measured } from './measures.ts';
import { UNUSABLE, type Observer, type Readings } from './play.ts';
import { Epoch } from './stepstates.ts';
import type { Study } from './study.ts';

type Of<M extends Requirement['measure']> = Extract<Requirement, { measure: M }>;

const LEAST_READINGS = 10;
/** Readings in the mean at each temperature, unless they would take longer than MOST_MEAN_SECONDS. */
const MEAN_READINGS = 1000;
const MOST_MEAN_SECONDS = 1;

export class ZeroOverTemperature implements Study {
  readonly plays: { scenario: Scenario; observer: Observer }[];
  private readonly zeros: { celsius: number; observer: MeanError }[];
  private readonly takesZero: boolean;

  constructor(private readonly requirement: Of<'zeroOverTemperature'>, probe: Probe) {
    const { lowest_C, highest_C } = requirement;
    const temperatures = temperaturesOf(lowest_C, highest_C);
    const { zeroSeconds, memorySeconds, readingSeconds } = startOf(probe);
    this.takesZero = zeroSeconds > 0;
    const wanted = Math.min(MEAN_READINGS * readingSeconds, MOST_MEAN_SECONDS);
    const meanSeconds = Math.max((LEAST_READINGS + 1) * readingSeconds, wanted);
    const judgeFrom = zeroSeconds + memorySeconds;
    this.zeros = temperatures.map((celsius) => ({ celsius, observer: new MeanError() }));
    this.plays = this.zeros.map(({ celsius, observer }) => {
      const name = `no current at ${celsius} °C`;
      const current = { shape: 'dc' as const, level_A: 0 };
      return { scenario: madeScenario(name, current, celsius, judgeFrom, judgeFrom + meanSeconds), observer };
    });
  }

  result(): Measured | string {
    const lacking = this.zeros.find(({ observer }) => observer.mean.count < LEAST_READINGS);
    if (lacking !== undefined) {
      return `fewer than ${LEAST_READINGS} usable readings at ${lacking.celsius} °C ` +
        `(${lacking.observer.flagged} are flagged as unusable)`;
    }
    const distance = ({ observer }: { observer: MeanError }): number => Math.abs(observer.mean.mean);
    const worst = this.zeros.reduce((one, other) => (distance(other) > distance(one) ? other : one));
    const value = worst.observer.mean.mean;
    const all = this.zeros.map(({ celsius, observer }) => `${signed(observer.mean.mean)} A at ${celsius} °C`);
    const limit = this.requirement.limit_A;
    return {
      value, limit, unit: 'A', share: shareOf(Math.abs(value), limit), where: `at ${worst.celsius} °C`,
      shape: `the mean reading at zero current is ${all.join(', ')}` +
        (this.takesZero ? '; the zero at start-up was taken at each of these temperatures' : ''),
    };
  }
}

class MeanError implements Observer {
  passes = 1;
  readonly mean = new Epoch();
  flagged = 0;

  readings(block: Readings): void {
    for (let i = 0; i < block.count; i++) {
      if (block.judged[i] === 0) continue;
      if (block.status[i] & UNUSABLE) this.flagged++;
      else this.mean.hear(block.amperes[i] - block.truth[i]);
    }
  }

  record(): void {}
}

/**
 * Change of the zero by a pulse: mean error before it (from judgeFrom_ms on) against mean error behind it, from
 * settle_ms behind its last edge on, or behind the zero button, a degaussing or a power cycle that follows it.
 */
export class ZeroAfterOverload implements Measure {
  passes = 1;
  private readonly fromSeconds: number;
  private readonly pulseSeconds: number;
  private readonly afterSeconds: number;
  private readonly lastEvent: string | null;
  private readonly shape: string;
  private readonly before = new Epoch();
  private readonly after = new Epoch();
  private firstAfter = NaN;
  private lastAfter = NaN;
  private suspect = 0;
  private tracking = 0;
  private overloaded = false;
  private flaggedAfter = 0;

  constructor(private readonly requirement: Of<'zeroAfterOverload'>, scenario: Scenario) {
    const { current } = scenario;
    this.shape = current.shape;
    const { at_ms, width_us, edge_us } = current.shape === 'pulse' ? current : { at_ms: 0, width_us: 0, edge_us: 0 };
    this.fromSeconds = scenario.judgeFrom_ms / 1e3;
    this.pulseSeconds = at_ms / 1e3;
    const overMs = at_ms + (width_us + edge_us) / 1e3;
    const remedies = remediesOf(scenario).filter((remedy) => remedy.endMs > overMs);
    remedies.sort((one, other) => one.endMs - other.endMs);
    const last = remedies.at(-1);
    this.lastEvent = last?.what ?? null;
    this.afterSeconds = (Math.max(overMs, last?.endMs ?? 0) + scenario.settle_ms) / 1e3;
  }

  readings(block: Readings): void {
    for (let i = 0; i < block.count; i++) {
      const seconds = block.seconds[i];
      const status = block.status[i];
      const usable = (status & UNUSABLE) === 0;
      const error = block.amperes[i] - block.truth[i];
      if (seconds < this.pulseSeconds) {
        if (usable && seconds >= this.fromSeconds) this.before.hear(error);
        continue;
      }
      if (!usable) this.overloaded = true;
      if (seconds < this.afterSeconds) continue;
      if (!usable) {
        this.flaggedAfter++;
        continue;
      }
      this.after.hear(error);
      if (this.after.count === 1) this.firstAfter = error;
      this.lastAfter = error;
      if (status & ZERO_SUSPECT) this.suspect++;
      if (status & TRACKING) this.tracking++;
    }
  }

  record(): void {}

  result(): Measured | string {
    const { before, after, requirement } = this;
    if (this.shape !== 'pulse') return `the current has the shape "${this.shape}", allowed "pulse"`;
    if (before.count < LEAST_READINGS) {
      return `fewer than ${LEAST_READINGS} usable readings between judgeFrom_ms and the pulse`;
    }
    if (after.count < LEAST_READINGS) {
      return `fewer than ${LEAST_READINGS} usable readings behind the pulse ` +
        `(${this.flaggedAfter} are flagged as unusable)`;
    }
    const value = after.mean - before.mean;
    const limit = requirement.limit_A;
    return {
      value, limit, unit: 'A', share: shareOf(Math.abs(value), limit),
      where: `from ${timeText(this.afterSeconds)} on${this.lastEvent === null ? '' : `, behind ${this.lastEvent}`}`,
      shape: `the zero moved by ${signed(value)} A, from ${signed(before.mean)} A before the pulse to ` +
        `${signed(after.mean)} A behind it; ${this.flagWords()}${this.trackingWords()}`,
    };
  }

  private flagWords(): string {
    const share = ((100 * this.suspect) / this.after.count).toPrecision(3);
    const told = this.suspect === 0 ? 'no reading says that the zero is suspect'
      : this.suspect === this.after.count ? 'every reading behind it says that the zero is suspect'
        : `${share} % of the readings behind it say that the zero is suspect`;
    return this.overloaded ? told : `no reading was flagged during the pulse, and ${told}`;
  }

  private trackingWords(): string {
    if (this.tracking === 0) return '; tracking stood still';
    const share = ((100 * this.tracking) / this.after.count).toPrecision(3);
    return `; tracking was at work in ${share} % of the readings behind it and learns the moved zero: ` +
      `${signed(this.firstAfter)} A at first, ${signed(this.lastAfter)} A in the end`;
  }
}

interface Remedy {
  what: string;
  endMs: number;
}

/** What may bring a zero back, and when it is over; a decaying coil current when a thousandth is left of it. */
function remediesOf({ events, coil }: Scenario): Remedy[] {
  const remedies: Remedy[] = [];
  for (const { event, at_ms, for_ms } of events) {
    if (event === 'zero button') remedies.push({ what: 'the zero button', endMs: at_ms + for_ms });
    else if (event === 'degaussed') remedies.push({ what: 'degaussing', endMs: at_ms + for_ms });
    else if (event === 'power cycle') remedies.push({ what: 'a power cycle', endMs: at_ms });
  }
  if (coil === null) return remedies;
  remedies.push({ what: 'degaussing by the coil', endMs: coil.at_ms + Math.log(1000) * coil.decay_ms });
  return remedies;
}

/** Overlapping Allan deviation at tau of the reading at a steady current, from the first usable judged reading on. */
export class ZeroOverTime implements Measure {
  passes = 1;
  private stream: AllanStream | null = null;
  private firstSeconds = NaN;
  private firstAmperes = NaN;
  private periodSeconds = NaN;
  private lastSeconds = NaN;
  private gaps = 0;
  private readonly shape: string;

  constructor(private readonly requirement: Of<'zeroOverTime'>, scenario: Scenario) {
    this.shape = scenario.current.shape;
  }

  readings(block: Readings): void {
    for (let i = 0; i < block.count; i++) {
      if (block.judged[i] === 0) continue;
      const usable = (block.status[i] & UNUSABLE) === 0;
      const seconds = block.seconds[i];
      if (Number.isNaN(this.firstSeconds)) {
        if (!usable) continue;
        this.firstSeconds = seconds;
        this.firstAmperes = block.amperes[i];
      } else if (!usable) {
        this.gaps++;
      } else {
        this.go(seconds, block.amperes[i]);
      }
    }
  }

  record(): void {}

  private go(seconds: number, amperes: number): void {
    if (this.stream === null) {
      this.periodSeconds = seconds - this.firstSeconds;
      this.lastSeconds = this.firstSeconds;
      this.stream = new AllanStream(Math.max(1, Math.round(this.requirement.tau_s / this.periodSeconds)));
      this.stream.hear(this.firstAmperes);
    }
    // a power cycle may leave out readings
    if (seconds - this.lastSeconds > 1.5 * this.periodSeconds) this.gaps++;
    this.lastSeconds = seconds;
    this.stream.hear(amperes);
  }

  result(): Measured | string {
    const { stream, periodSeconds, requirement } = this;
    const { tau_s, limit_A } = requirement;
    if (this.shape !== 'dc') return `the current has the shape "${this.shape}", allowed "dc"`;
    if (stream === null) return 'fewer than two usable readings at times that are judged';
    if (this.gaps > 0) {
      return `${this.gaps} readings in the record are missing or flagged as unusable: ` +
        'a record with gaps has no Allan deviation';
    }
    if (tau_s < periodSeconds * 0.75) {
      return `tau_s is shorter than the time between two readings (${timeText(periodSeconds)})`;
    }
    const record = stream.count * periodSeconds;
    // half a reading: tau and record are whole numbers of readings
    if (record < 3 * tau_s - periodSeconds / 2) {
      return `the record of ${timeText(record)} is shorter than three averaging times of ${timeText(tau_s)}`;
    }
    const value = stream.deviation();
    const tau = stream.blocks * stream.blockValues * periodSeconds;
    return {
      value, limit: limit_A, unit: 'A', share: shareOf(value, limit_A),
      where: `tau ${timeText(tau)}, ${Math.floor(record / tau + 1e-9)} of them in the record`,
      shape: `the Allan deviation is ${value.toPrecision(3)} A at ${timeText(tau)}, ${slopeWords(stream.slope())}`,
    };
  }
}

function signed(value: number): string {
  return (value < 0 ? '−' : '+') + Math.abs(value).toPrecision(3);
}
