/**
 * -3 dB bandwidth of hardware and chain together: the frequency at which the gain of the reading (four-parameter fit,
 * sines.ts) has fallen to 1/sqrt(2) of that at a low frequency. The low frequency is a twentieth of the required
 * bandwidth, where a pole at that bandwidth has lost 0.12 %; should the bandwidth turn out to be less than ten times it,
 * a twentieth of what was found, and once more. Octaves up or down from the required bandwidth until the point lies
 * between two sines, then bisection in octaves, and a straight line at the end.
 */
import type { Probe, Requirement, Scenario } from '../probe/fields.ts';
import { madeScenario, startOf, type Start } from './made.ts';
import type { Measured } from './measures.ts';
import type { Play } from './study.ts';
import { LEAST_PERIODS, SineResponse } from './sines.ts';

/** Periods and readings in a record: more than the fit asks for, so that noise moves the gain less. */
const PERIODS = LEAST_PERIODS + 3;
const READINGS = 512;
const REFERENCE_SHARE = 1 / 20;
const LEAST_DISTANCE = 10;
const REFERENCES = 4;
const BISECTIONS = 7;
/** Share of half the reading rate up to which sines are tried. */
const HIGHEST_SHARE = 0.95;

interface Point {
  hertz: number;
  /** log2 of the gain over that at the low frequency. */
  octaves: number;
}

interface Bracket {
  below: Point;
  above: Point | null;
}

const TARGET = -0.5;

export class Bandwidth {
  readonly plays: Iterable<Play>;
  private readonly start: Start;
  private readonly highestHz: number;
  private outcome: Measured | string = 'it has not been played';
  private readonly peak: number;
  private readonly limit: number;

  constructor(requirement: Extract<Requirement, { measure: 'bandwidth' }>, probe: Probe) {
    this.start = startOf(probe);
    this.highestHz = HIGHEST_SHARE / (2 * this.start.readingSeconds);
    this.peak = requirement.peak_A;
    this.limit = requirement.atLeast_Hz;
    this.plays = { [Symbol.iterator]: () => this.search() };
  }

  result(): Measured | string {
    return this.outcome;
  }

  private *search(): Generator<Play, void> {
    const { limit, highestHz } = this;
    if (limit > highestHz) {
      this.outcome = `${limit} Hz is not below half the reading rate of ${(1 / this.start.readingSeconds).toPrecision(4)} Hz`;
      return;
    }
    let referenceHz = limit * REFERENCE_SHARE;
    for (let tried = 1; ; tried++) {
      const reference = yield* this.gainAt(referenceHz);
      if (reference === null) return;
      if (reference === 0) {
        this.outcome = `at ${referenceHz.toPrecision(3)} Hz, the low frequency to compare with, the reading shows no sine`;
        return;
      }
      const bracket = yield* this.bracket(referenceHz, reference, tried === 1 ? limit : referenceHz / REFERENCE_SHARE);
      if (bracket === null) return;
      if (bracket.above === null) {
        const still = `still ${decibels(bracket.below.octaves)} at the highest sine that the reading rate can show`;
        this.conclude(bracket.below.hertz, referenceHz, still);
        return;
      }
      const hertz = yield* this.narrow(bracket.below, bracket.above, reference);
      if (hertz === null) return;
      if (hertz >= LEAST_DISTANCE * referenceHz || tried === REFERENCES) {
        this.conclude(hertz, referenceHz, 'by sines');
        return;
      }
      referenceHz = hertz * REFERENCE_SHARE;
    }
  }

  /** Two sines around the point, an octave apart; `above` is null where even the highest is not beyond it. */
  private *bracket(referenceHz: number, reference: number, fromHz: number): Generator<Play, Bracket | null> {
    let below: Point = { hertz: referenceHz, octaves: 0 };
    let above: Point | null = null;
    let hertz = Math.min(fromHz, this.highestHz);
    for (;;) {
      const point = yield* this.pointAt(hertz, reference);
      if (point === null) return null;
      if (point.octaves >= TARGET) {
        below = point;
        if (above !== null || hertz === this.highestHz) return { below, above };
        hertz = Math.min(2 * hertz, this.highestHz);
      } else {
        above = point;
        if (below.hertz > referenceHz || hertz <= 2 * referenceHz) return { below, above };
        hertz /= 2;
      }
    }
  }

  private *narrow(from: Point, to: Point, reference: number): Generator<Play, number | null> {
    let below = from;
    let above = to;
    for (let i = 0; i < BISECTIONS; i++) {
      const point = yield* this.pointAt(Math.sqrt(below.hertz * above.hertz), reference);
      if (point === null) return null;
      if (point.octaves >= TARGET) below = point;
      else above = point;
    }
    const share = (TARGET - below.octaves) / (above.octaves - below.octaves);
    return below.hertz * (above.hertz / below.hertz) ** share;
  }

  private *pointAt(hertz: number, reference: number): Generator<Play, Point | null> {
    const gain = yield* this.gainAt(hertz);
    return gain === null ? null : { hertz, octaves: Math.log2(gain / reference) };
  }

  private *gainAt(hertz: number): Generator<Play, number | null> {
    const scenario = this.sineAt(hertz);
    const observer = new SineResponse(scenario);
    yield { scenario, observer };
    const response = observer.response();
    // where nothing of the sine is left to be fitted the gain has fallen far enough
    if (observer.drowned) return 0;
    if (typeof response === 'string') {
      this.outcome = `at ${hertz.toPrecision(4)} Hz: ${response}`;
      return null;
    }
    return response.gain;
  }

  private sineAt(hertz: number): Scenario {
    const { zeroSeconds, memorySeconds, readingSeconds } = this.start;
    const from = zeroSeconds + memorySeconds;
    const record = Math.max(PERIODS / hertz, READINGS * readingSeconds);
    return madeScenario(`sine of ${hertz.toPrecision(4)} Hz`,
      { shape: 'sine', peak_A: this.peak, frequency_Hz: hertz, offset_A: 0, phase_deg: 0 }, 25, from, from + record);
  }

  private conclude(hertz: number, referenceHz: number, how: string): void {
    const { limit } = this;
    this.outcome = {
      value: hertz, limit, unit: 'Hz', better: 'more', share: limit / hertz, where: `${how}, against ${referenceHz.toPrecision(3)} Hz`,
      shape: `the reading has lost 3 dB at ${hertz.toPrecision(4)} Hz: the corners of sensor, amplifier and chain add up`,
    };
  }
}

function decibels(octaves: number): string {
  return `${(20 * octaves * Math.log10(2)).toFixed(2)} dB`;
}
