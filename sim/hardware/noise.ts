/**
 * Slow noise: random values at evenly spaced points with straight lines between them, so that slow noise costs little.
 *   random walk  w(n + 1) = w(n) + step * normal, from 0
 *   1/f noise    a sum of first-order noises of equal power, corners two octaves apart: density power/f
 * One noise of variance s^2 and corner g has the density s^2 * 2/(pi g) / (1 + (f/g)^2). With s^2 = power * ln 4 the
 * sum over g = top * 4^-k is (power/f) * (1 + 2 sum_m cos(2 pi m log4(f/top)) / cosh(pi^2 m/ln 4)): a ripple of 0.33 %.
 * What corners above 2 * top would add is flat there: white noise of density power * 2/(pi * 2 top), added by the sensor.
 * Straight lines between points of correlation rho have (2 + rho)/3 of their variance; s^2 makes up for that.
 * Sources: A. van der Ziel, Physica 16 (1950) 359; M. S. Keshner, "1/f noise", Proc. IEEE 70 (1982) 212; the recursion
 * of one noise: D. T. Gillespie, Phys. Rev. E 54 (1996) 2084.
 */
import type { RandomStream } from './random.ts';

export interface Points {
  next(): number;
}

/** Corners from one to the next lower. */
const CORNER_RATIO = 4;
/** The flat rest stands for all corners above this multiple of the frequency where 1/f noise equals white noise. */
const EDGE_OVER_CORNER = 64;
/** Grid points for one period of the highest edge: beyond, straight lines would cost power in the sensor's band. */
const STEPS_PER_EDGE_PERIOD = 8;
/** Points of a noise for one period of its corner. */
const POINTS_PER_CORNER_PERIOD = 32;
/** A multiple of the corner ratio. */
const VALUES_AT_ONCE = 64;
/** Three days: at 1/(1 hour) less than 1 % of the density is left out. */
const LOWEST_EDGE_HZ = 4e-6;

/** Adds points with straight lines between them to a block. */
export class Lines {
  private from: number;
  private to: number;
  private at = 0;

  constructor(private readonly points: Points, private readonly interval: number) {
    this.from = points.next();
    this.to = points.next();
  }

  add(values: Float64Array, count: number, scale: number): void {
    const { interval, points } = this;
    const share = 1 / interval;
    let { from, to, at } = this;
    for (let i = 0; i < count; i++) {
      values[i] += scale * (from + (to - from) * (at * share));
      if (++at === interval) {
        at = 0;
        from = to;
        to = points.next();
      }
    }
    this.from = from;
    this.to = to;
    this.at = at;
  }
}

export class RandomWalk implements Points {
  private value = 0;

  constructor(private readonly step: number, private readonly stream: RandomStream) {}

  next(): number {
    const value = this.value;
    this.value += this.step * this.stream.normal();
    return value;
  }
}

export interface FlickerPlan {
  /** Highest corner of the sum. */
  topHz: number;
  /** Grid points between two values of the noise with the highest corner. */
  interval: number;
  /** How many noises. */
  levels: number;
  /** White density squared that stands for all corners above, for a power of 1. */
  flatRest: number;
}

/** `cornerHz`: where the 1/f noise equals the white noise. */
export function flickerPlan(cornerHz: number, stepSeconds: number): FlickerPlan {
  const edgeHz = Math.min(EDGE_OVER_CORNER * cornerHz, 1 / (STEPS_PER_EDGE_PERIOD * stepSeconds));
  const topHz = edgeHz / Math.sqrt(CORNER_RATIO);
  return {
    topHz,
    interval: Math.max(1, Math.floor(1 / (POINTS_PER_CORNER_PERIOD * topHz * stepSeconds))),
    levels: Math.max(1, Math.ceil(Math.log(edgeHz / LOWEST_EDGE_HZ) / Math.log(CORNER_RATIO))),
    flatRest: 2 / (Math.PI * edgeHz),
  };
}

/** 1/f noise of density `power`/f, one value every plan.interval grid points. */
export class Flicker implements Points {
  private readonly fastest: Level;

  constructor(plan: FlickerPlan, power: number, stepSeconds: number, stream: RandomStream) {
    // the same for all: each has a quarter of the corner and a quarter of the points
    const keep = Math.exp(-2 * Math.PI * plan.topHz * plan.interval * stepSeconds);
    // the mean of f * density over log f is the variance on the lines over ln 4
    const deviation = Math.sqrt((power * Math.log(CORNER_RATIO) * 3) / (2 + keep));
    let level: Level | null = null;
    for (let i = 0; i < plan.levels; i++) level = new Level(keep, deviation, stream, level);
    this.fastest = level!;
  }

  next(): number {
    return this.fastest.next();
  }
}

/** One noise of the sum, and on straight lines all slower ones; values are made some at a time, which is faster. */
class Level {
  private readonly fresh: number;
  private own: number;
  /** Sum of the slower noises at its last and its next point. */
  private from: number;
  private to: number;
  private readonly values = new Float64Array(VALUES_AT_ONCE);
  private at = VALUES_AT_ONCE;

  constructor(
    private readonly keep: number, deviation: number, private readonly stream: RandomStream,
    private readonly slower: Level | null,
  ) {
    this.fresh = deviation * Math.sqrt((1 - keep) * (1 + keep));
    this.own = deviation * stream.normal();
    this.from = slower === null ? 0 : slower.next();
    this.to = slower === null ? 0 : slower.next();
  }

  next(): number {
    if (this.at === VALUES_AT_ONCE) this.refill();
    return this.values[this.at++];
  }

  private refill(): void {
    const { values, keep, fresh, slower } = this;
    let { own, from, to } = this;
    this.stream.fillNormals(values, VALUES_AT_ONCE);
    for (let i = 0; i < VALUES_AT_ONCE; i += CORNER_RATIO) {
      for (let part = 0; part < CORNER_RATIO; part++) {
        const value = own + from + (to - from) * (part / CORNER_RATIO);
        own = keep * own + fresh * values[i + part];
        values[i + part] = value;
      }
      from = to;
      if (slower !== null) to = slower.next();
    }
    this.own = own;
    this.from = from;
    this.to = to;
    this.at = 0;
  }
}
