/**
 * The worst error of a meter over a band of frequencies and a range of temperatures, by scenarios made here: a sine at
 * each frequency (true RMS), a direct current at 0 Hz (mean), at the coldest temperature, at 25 °C if that lies inside,
 * and at the warmest. Each lasts until the meter has given three windows behind the settling of the chain.
 * The sine flows from the start, as around a conductor that carries current when the probe is switched on; the direct
 * current begins behind a zero at start-up, which would take a small one for its zero.
 */
import type { CurrentSpec, Probe, Requirement, Scenario, StageSpecOf } from '../probe/fields.ts';
import { tune } from '../tuning/tune.ts';
import { madeScenario, startOf, type Start } from './made.ts';
import { RecordError, type Measured } from './measures.ts';
import type { Observer } from './play.ts';

type BandRequirement = Extract<Requirement, { measure: 'band' }>;

const LEAST_WINDOWS = 3;
const MOST_BESIDE = 6;

interface Point {
  hertz: number;
  celsius: number;
  error: RecordError;
}

export class BandError {
  readonly plays: { scenario: Scenario; observer: Observer }[];
  private readonly points: Point[] = [];

  constructor(requirement: BandRequirement, probe: Probe) {
    const meter = probe.chain.find((stage): stage is StageSpecOf<'meter'> => stage.stage === 'meter' && stage.name === requirement.meter);
    if (meter === undefined) throw new RangeError(`band: found no meter "${requirement.meter}", allowed the name of a meter of the chain`);
    const start = startOf(probe, tune(probe));
    this.plays = [];
    for (const celsius of temperaturesOf(requirement.lowest_C, requirement.highest_C)) {
      for (const hertz of frequenciesOf(requirement, meter)) {
        const scenario = scenarioOf(requirement.peak_A, hertz, celsius, meter, start);
        const error = new RecordError({ ...requirement, measure: hertz === 0 ? 'mean' : 'trueRms' }, probe, scenario);
        this.points.push({ hertz, celsius, error });
        this.plays.push({ scenario, observer: error });
      }
    }
  }

  result(): Measured | string {
    let worst: { measured: Measured; point: Point } | null = null;
    for (const point of this.points) {
      const measured = point.error.result();
      if (typeof measured === 'string') return `at ${placeOf(point)}: ${measured}`;
      const { windows } = point.error;
      if (windows < LEAST_WINDOWS) return `at ${placeOf(point)}: ${windows} windows of the meter, needed are ${LEAST_WINDOWS}`;
      if (worst === null || measured.share > worst.measured.share) worst = { measured, point };
    }
    if (worst === null) return 'no frequency of the band can be tried';
    const { measured, point } = worst;
    return { ...measured, where: `worst of ${this.points.length}: ${placeOf(point)}`, shape: this.wordsOn(point) };
  }

  /** Beside the worst point its neighbours in frequency and in temperature: which of the two makes the error. */
  private wordsOn(worst: Point): string {
    const beside = this.points.filter((point) => point !== worst && (point.hertz === worst.hertz || point.celsius === worst.celsius));
    const percents = beside.slice(0, MOST_BESIDE).map((point) => `${percentOf(point)} at ${placeOf(point)}`);
    return `the meter is off by ${percentOf(worst)} at ${placeOf(worst)}${percents.length === 0 ? '' : ` (${percents.join(', ')})`}`;
  }
}

function placeOf({ hertz, celsius }: Point): string {
  return `${hertz === 0 ? 'direct current' : `${Number(hertz.toPrecision(4))} Hz`}, ${celsius} °C`;
}

function percentOf({ error }: Point): string {
  const percent = 100 * error.worstShareOfTruth;
  return `${percent < 0 ? '−' : '+'}${Math.abs(percent).toPrecision(3)} %`;
}

/** The ends, and 25 °C where it lies between them. */
export function temperaturesOf(lowestCelsius: number, highestCelsius: number): number[] {
  return [...new Set([lowestCelsius, ...(lowestCelsius < 25 && 25 < highestCelsius ? [25] : []), highestCelsius])];
}

/**
 * Evenly in octaves from end to end. Nothing lies evenly between 0 Hz and a frequency: direct current then takes one
 * point, and the others go down from the upper end octave by octave, as far as a window of the meter holds a period.
 */
export function frequenciesOf({ from_Hz, to_Hz, points }: BandRequirement, { window_ms }: { window_ms: number }): number[] {
  if (from_Hz === to_Hz) return [from_Hz];
  if (from_Hz > 0) {
    // one point is the upper end, where filters take most
    if (points === 1) return [to_Hz];
    return Array.from({ length: points }, (_, i) => (i === points - 1 ? to_Hz : from_Hz * (to_Hz / from_Hz) ** (i / (points - 1))));
  }
  const down = Array.from({ length: Math.max(1, points - 1) }, (_, i) => to_Hz / 2 ** i);
  return [0, ...down.filter((hertz, i) => i === 0 || hertz * window_ms >= 1e3).reverse()];
}

function scenarioOf(peakAmperes: number, hertz: number, celsius: number, meter: StageSpecOf<'meter'>, start: Start): Scenario {
  const current: CurrentSpec = hertz === 0
    ? { shape: 'step', from_A: 0, to_A: peakAmperes, at_ms: start.zeroSeconds * 1e3, edge_us: 1 }
    : { shape: 'sine', peak_A: peakAmperes, frequency_Hz: hertz, offset_A: 0, phase_deg: 0 };
  const timeOut = meter.window_ms / 1e3;
  // a window of whole cycles ends with a crossing, or with its time-out
  const cyclesSeconds = meter.cycles > 0 && hertz > 0 ? (meter.cycles + 1) / hertz : Infinity;
  const windowSeconds = Math.min(timeOut, cyclesSeconds) + start.readingSeconds;
  const from = start.zeroSeconds + start.memorySeconds;
  // the first window behind `from` began before it and is not judged
  const seconds = from + (LEAST_WINDOWS + 1) * windowSeconds + (Number.isFinite(cyclesSeconds) ? 2 / hertz : 0) + start.readingSeconds;
  return madeScenario(`${hertz === 0 ? 'direct current' : `${Number(hertz.toPrecision(4))} Hz`} at ${celsius} °C`, current, celsius, from, seconds);
}
