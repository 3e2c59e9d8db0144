/**
 * Where a stage stands while a chain is compiled: what one sample and one count mean there. Engineering units are
 * turned into samples and counts here and nowhere else, so that rounding of times and currents is one rule.
 */
import type { Probe } from '../probe/fields.ts';
import { pathTo, type Problem } from '../probe/problem.ts';

export interface Place {
  probe: Probe;
  /** Index in the probe's chain. */
  index: number;
  /** Samples a second at this stage. */
  rateHz: number;
  /** Counts in an ampere at this stage, positive. */
  countsPerAmpere: number;
  /** 2^guardBits: counts in one A/D code. */
  countsPerCode: number;
  /** Largest magnitude that can arrive. */
  limit: number;
  /** Stages give at most this: one bit above what intake gives. */
  roof: number;
  problems: Problem[];
}

/** Samples nearest to a time, at least `least`; a problem where a wanted time is less than half a sample. */
export function samplesOf(place: Place, seconds: number, field: string, least = 0): number {
  const samples = Math.round(seconds * place.rateHz);
  if (samples < 1 && least >= 1) {
    complain(place, field, `${seconds * 1e3} ms`, `at least one sample of ${(1e3 / place.rateHz).toPrecision(4)} ms`,
      'make it longer, or put the stage ahead of a decimator');
    return least;
  }
  return Math.max(least, samples);
}

/** Most counts within a current: for what must not exceed it. */
export function countsWithin(place: Place, amperes: number): number {
  return Math.floor(amperes * place.countsPerAmpere);
}

/** Counts nearest to a current. */
export function countsOf(place: Place, amperes: number): number {
  return Math.round(amperes * place.countsPerAmpere);
}

export function complain(place: Place, field: string, found: string, allowed: string, hint = ''): void {
  place.problems.push({ path: pathTo(pathTo('chain', place.index), field), found, allowed, hint });
}
