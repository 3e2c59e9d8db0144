/**
 * What sections leave at rest, measured by running the integers: a small constant in, after everything has settled the
 * peak-to-peak of what comes out (dither) and how far its mean is off (dead band). Several constants, because what
 * rounding does depends on them. Without error feedback a constant that was not tried may fare worse: there the bound
 * of the dead band counts, half a count over 1 + a1 + a2 for each section (Oppenheim and Schafer, zero-input limit
 * cycles; value from memory).
 */
import { Block, Sections, type SectionsConstants, type UnitConstants } from '../../lib/index.ts';
import { poleRadius, realOf } from './sections.ts';

export interface Residue {
  /** Counts, peak to peak. */
  dither: number;
  /** Counts. */
  meanError: number;
}

/** Small enough for a dead band to swallow, odd enough to meet many remainders. */
const LEVELS = [5, -3, 101, -1234567];
const BLOCK = 1024;
const TIME_CONSTANTS = 20;
const MOST_SETTLE_SAMPLES = 400_000;
const WATCHED_SAMPLES = 4 * BLOCK;

export function residueOf(constants: SectionsConstants): Residue {
  const slowest = Math.max(...constants.sections.map((section) => poleRadius(realOf(section))));
  const settle = Math.min(MOST_SETTLE_SAMPLES, Math.ceil(TIME_CONSTANTS / (1 - slowest)) + 64);
  const limit = Math.min(...constants.sections.map((section) => section.limit));
  const residue = { dither: 0, meanError: 0 };
  for (const level of LEVELS.filter((value) => Math.abs(value) <= limit)) {
    const { dither, meanError } = atRest(constants, level, settle);
    residue.dither = Math.max(residue.dither, dither);
    residue.meanError = Math.max(residue.meanError, Math.abs(meanError));
  }
  residue.meanError = Math.max(residue.meanError, deadBandOf(constants));
  return residue;
}

function deadBandOf(constants: SectionsConstants): number {
  const plain = constants.sections.filter((section) => section.feedback === 0).map(realOf);
  const bands = plain.map(({ a1, a2 }) => 0.5 / (1 + a1 + a2));
  // rounding to the nearest can be off by half a count at any corner, which is no dead band
  return bands.reduce((sum, band) => sum + (band > 1 ? band : 0), 0);
}

function atRest(constants: SectionsConstants, level: number, settle: number): Residue {
  // from zero, so that the level has to be reached; a section does not look at the unit
  const stage = new Sections({ ...constants, primed: 0 }, {} as UnitConstants);
  const gain = constants.sections.reduce((product, s) => product * ((s.b0 + s.b1 + s.b2) / (2 ** s.fractionBits + s.a1 + s.a2)), 1);
  const block = new Block(BLOCK);
  let lowest = Infinity;
  let highest = -Infinity;
  let sum = 0;
  for (let done = 0; done < settle + WATCHED_SAMPLES; done += BLOCK) {
    block.count = BLOCK;
    block.value.fill(level);
    block.status.fill(0);
    stage.process(block);
    if (done < settle) continue;
    for (const value of block.value) {
      sum += value;
      if (value < lowest) lowest = value;
      if (value > highest) highest = value;
    }
  }
  const watched = Math.ceil((settle + WATCHED_SAMPLES) / BLOCK) - Math.ceil(settle / BLOCK);
  return { dither: highest - lowest, meanError: sum / (watched * BLOCK) - gain * level };
}

/** The order of error feedback that leaves no dead band and the least dither; the higher order where they are equal. */
export function quietestFeedback(make: (feedback: number) => SectionsConstants): SectionsConstants {
  const tried = [0, 1, 2].map((feedback) => {
    const constants = make(feedback);
    return { constants, ...residueOf(constants) };
  });
  // half a count of mean error is what rounding a constant in between may leave anyway
  const exact = tried.filter(({ meanError }) => meanError < 0.5);
  const candidates = exact.length > 0 ? exact : tried;
  return candidates.reduce((best, other) => (other.dither <= best.dither ? other : best)).constants;
}
