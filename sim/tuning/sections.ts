/**
 * Sections from float64 to integers. Coefficients are rounded so that the DC gain stays exactly one (low-pass, notch)
 * or exactly zero (high-pass): the feedback coefficients are rounded first, the rest of the numerator follows. Each
 * section takes the most fraction bits (30 at the most) that keep its sum below 2^53. A design whose integers miss
 * the asked corner by more than 1 % is refused.
 */
import type { SectionConstants, SectionsConstants } from '../../lib/index.ts';
import type { StageSpecOf } from '../probe/fields.ts';
import { butterworth, magnitudeAt, notch, type Biquad } from './filters.ts';
import { complain, type Place } from './place.ts';
import { quietestFeedback } from './residue.ts';

const MOST_CORNER_ERROR = 0.01;
const MOST_FRACTION_BITS = 30;
const LEAST_FRACTION_BITS = 8;
const LIMIT_OF_SUM = 2 ** 53;

export function tuneSections(spec: StageSpecOf<'sections'>, place: Place): SectionsConstants | null {
  const design = designOf(spec, place.rateHz);
  const sections = design.map((biquad) => quantise(biquad, spec, place));
  const asked = spec.corner_Hz / place.rateHz;
  const rounded = sections.map(realOf);
  if (spec.filter !== 'notch') {
    const real = cornerOf(rounded, spec.filter, asked);
    if (!(Math.abs(real / asked - 1) <= MOST_CORNER_ERROR)) {
      complain(place, 'corner_Hz', `${spec.corner_Hz} Hz, which the integers turn into ${Number.isNaN(real) ? 'no corner at all' : `${(real * place.rateHz).toPrecision(4)} Hz`}`,
        `a corner that integers hold within ${MOST_CORNER_ERROR * 100} %`, 'decimate first, or use fewer guard bits');
      return null;
    }
  }
  const memorySamples = memoryOf(rounded, place.limit, place.countsPerCode / 2);
  const make = (feedback: number): SectionsConstants => ({
    kind: 'sections', sections: sections.map((section) => ({ ...section, feedback })), primed: spec.start === 'primed' ? 1 : 0, memorySamples,
  });
  return spec.errorFeedback === null ? quietestFeedback(make) : make(spec.errorFeedback);
}

function designOf(spec: StageSpecOf<'sections'>, rateHz: number): Biquad[] {
  const corner = spec.corner_Hz / rateHz;
  if (spec.filter !== 'notch') return butterworth(spec.filter, spec.order, corner);
  return [notch(corner, (spec.width_Hz ?? 0) / rateHz)];
}

function quantise(biquad: Biquad, spec: StageSpecOf<'sections'>, place: Place): SectionConstants {
  const most = spec.fractionBits ?? MOST_FRACTION_BITS;
  for (let bits = most; bits > LEAST_FRACTION_BITS; bits--) {
    const section = atFractionBits(biquad, bits, spec, place.roof);
    if (spec.fractionBits !== null || fits(section, place)) return section;
  }
  return atFractionBits(biquad, LEAST_FRACTION_BITS, spec, place.roof);
}

function fits(s: SectionConstants, place: Place): boolean {
  const coefficients = [s.b0, s.b1, s.b2, s.a1, s.a2].map(Math.abs);
  const sum = (coefficients[0] + coefficients[1] + coefficients[2]) * place.limit + (coefficients[3] + coefficients[4]) * s.limit;
  return Math.max(...coefficients) < 2 ** 31 && sum + 2 ** (s.fractionBits + 1) < LIMIT_OF_SUM;
}

function atFractionBits(biquad: Biquad, fractionBits: number, spec: StageSpecOf<'sections'>, limit: number): SectionConstants {
  const unity = 2 ** fractionBits;
  const a1 = Math.round(biquad.a1 * unity);
  const a2 = Math.round(biquad.a2 * unity);
  const [b0, b1, b2] = numerator(biquad, spec.filter, unity, unity + a1 + a2);
  return { fractionBits, b0, b1, b2, a1, a2, feedback: 0, limit };
}

/** Numerator integers whose sum is the denominator's at DC (gain one), or zero for a high-pass. */
function numerator(biquad: Biquad, filter: string, unity: number, atDc: number): [number, number, number] {
  const firstOrder = biquad.b[2] === 0;
  if (filter === 'high-pass') {
    const outer = Math.round(biquad.b[0] * unity);
    return firstOrder ? [outer, -outer, 0] : [outer, -2 * outer, outer];
  }
  if (filter === 'notch') {
    const outer = Math.round(biquad.b[0] * unity);
    return [outer, atDc - 2 * outer, outer];
  }
  if (firstOrder) return [Math.round(atDc / 2), atDc - Math.round(atDc / 2), 0];
  const outer = Math.round(atDc / 4);
  return [outer, atDc - 2 * outer, outer];
}

/** What the integers of a section really are. */
export function realOf(s: SectionConstants): Biquad {
  const unity = 2 ** s.fractionBits;
  return { b: [s.b0 / unity, s.b1 / unity, s.b2 / unity], a1: s.a1 / unity, a2: s.a2 / unity };
}

/** -3 dB corner by bisection around the asked one; NaN when there is none within a factor of four. */
export function cornerOf(sections: readonly Biquad[], filter: 'low-pass' | 'high-pass', asked: number): number {
  const passes = (f: number): boolean => (magnitudeAt(sections, f) >= Math.SQRT1_2) === (filter === 'low-pass');
  let low = asked / 4;
  let high = Math.min(0.5, asked * 4);
  if (!passes(low) || passes(high)) return NaN;
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2;
    if (passes(middle)) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

/**
 * Samples until what a full-range sample leaves behind is less than half an A/D code: after that a past overload can
 * no longer be seen. The tail of the impulse response is summed in magnitude, from the end.
 */
export function memoryOf(sections: readonly Biquad[], range: number, least: number): number {
  const slowest = Math.max(...sections.map(poleRadius));
  // the response has fallen by 2^-60 after this many samples, plus room for the build-up of many sections
  const length = Math.min(4_000_000, Math.ceil((-60 * Math.LN2) / Math.log(slowest)) * 2 + 64);
  const response = impulse(sections, length);
  let tail = 0;
  for (let n = length - 1; n > 0; n--) {
    tail += Math.abs(response[n]);
    if (tail * range >= least) return n;
  }
  return 0;
}

export function poleRadius({ a1, a2 }: Biquad): number {
  const root = a1 * a1 - 4 * a2;
  return root < 0 ? Math.sqrt(a2) : (Math.abs(a1) + Math.sqrt(root)) / 2;
}

function impulse(sections: readonly Biquad[], length: number): Float64Array {
  const response = new Float64Array(length);
  response[0] = 1;
  for (const { b, a1, a2 } of sections) {
    let x1 = 0;
    let x2 = 0;
    let y1 = 0;
    let y2 = 0;
    for (let n = 0; n < length; n++) {
      const x = response[n];
      const y = b[0] * x + b[1] * x1 + b[2] * x2 - a1 * y1 - a2 * y2;
      x2 = x1;
      x1 = x;
      y2 = y1;
      y1 = y;
      response[n] = y;
    }
  }
  return response;
}
