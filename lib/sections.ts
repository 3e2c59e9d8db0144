/**
 * Sections: up to 8 second-order sections one behind the other, direct form I with error feedback. Takes and gives
 * counts, or readings. Each section has its own fraction bits F (a0 = 2^F):
 *
 *   s[n] = b0 x[n] + b1 x[n-1] + b2 x[n-2] - a1 y[n-1] - a2 y[n-2] + k1 e[n-1] + k2 e[n-2]
 *   y[n] = round(s[n] / 2^F),   e[n] = s[n] - y[n] * 2^F
 * Error feedback order 0: k = 0, 0; order 1: 1, 0; order 2: 2, -1: the rounding error is shaped by (1 - z^-1)^order
 * (W. E. Higgins and D. C. Munson, "Noise reduction strategies for digital filters", IEEE Trans. ASSP-30 no. 6, 1982;
 * value from memory), so with order 1 or 2 a constant comes out as itself in the mean, without a dead band.
 * A result beyond +-limit is clamped -> CLAMPED; the clamped value is what is fed back, and e is emptied.
 * DC gain (b0+b1+b2) / (2^F+a1+a2): exactly 1 or 0 when the integers say so. First sample: primed, x and y as if that
 * sample had always been there (y = round(x * DC gain), the section behind primed with that y); from zero, all 0 and
 * SETTLING for memorySamples samples. Lingering bits, and the CLAMPED of a section, stay for memorySamples samples. Bound: (sum |b|) * |x| + (|a1|+|a2|) * limit + 2^(F+1) < 2^53
 * (k1 e1 + k2 e2 is at most 3 * 2^(F-1), the rounding half 2^(F-1)).
 */
import { add, clamp, divideRound, multiply, multiplyAdd, shiftLeft, shiftRound, subtract } from './arithmetic.ts';
import { CLAMPED, SETTLING } from './status.ts';
import { LINGER_FIELDS, linger } from './linger.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface SectionConstants {
  fractionBits: number;
  b0: number;
  b1: number;
  b2: number;
  a1: number;
  a2: number;
  /** Order of the error feedback, 0..2. */
  feedback: number;
  limit: number;
}

export interface SectionsConstants {
  kind: 'sections';
  sections: SectionConstants[];
  primed: number;
  memorySamples: number;
}

const NONE: readonly string[] = [];
const SECTION_FIELDS = ['x1', 'x2', 'y1', 'y2', 'e1', 'e2'];
const SECTION_AT = 7;

export class Sections implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: SectionsConstants;

  constructor(constants: SectionsConstants, _unit: UnitConstants) {
    const fields = ['started', 'settleLeft', LINGER_FIELDS[0], LINGER_FIELDS[1], LINGER_FIELDS[2], LINGER_FIELDS[3], LINGER_FIELDS[4]];
    for (let n = 0; n < constants.sections.length; n++) {
      for (let k = 0; k < SECTION_FIELDS.length; k++) fields.push(SECTION_FIELDS[k] + '.' + (n + 1));
    }
    this.kind = constants.kind;
    this.fields = fields;
    this.kept = NONE;
    this.state = new Float64Array(fields.length);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.reset();
  }

  reset(): void {
    clearState(this);
    this.state[1] = this.constants.primed === 1 ? 0 : this.constants.memorySamples;
  }

  process(block: Block): void {
    const status = block.status;
    const count = block.count;
    const state = this.state;
    const sections = this.constants.sections;
    if (count === 0) return;
    if (state[0] === 0) {
      state[0] = 1;
      if (this.constants.primed === 1) this.prime(block.value[0]);
    }
    for (let n = 0; n < sections.length; n++) this.section(block, sections[n], SECTION_AT + 6 * n);
    linger(block, state, 2, this.constants.memorySamples);
    let settleLeft = state[1];
    for (let i = 0; i < count && settleLeft > 0; i++) {
      status[i] |= SETTLING;
      settleLeft--;
    }
    state[1] = settleLeft;
  }

  /** Every section as if x had always been there. */
  prime(first: number): void {
    const sections = this.constants.sections;
    let x = first;
    for (let n = 0; n < sections.length; n++) {
      const c = sections[n];
      const at = SECTION_AT + 6 * n;
      const ahead = add(add(c.b0, c.b1), c.b2);
      const back = add(add(shiftLeft(1, c.fractionBits), c.a1), c.a2);
      const held = clamp(divideRound(multiply(ahead, x), back), -c.limit, c.limit); // |ahead * x| <= (sum |b|) * |x|
      this.state[at] = x;
      this.state[at + 1] = x;
      this.state[at + 2] = held;
      this.state[at + 3] = held;
      x = held;
    }
  }

  section(block: Block, c: SectionConstants, at: number): void {
    const value = block.value;
    const status = block.status;
    const count = block.count;
    const state = this.state;
    const fractionBits = c.fractionBits;
    const b0 = c.b0;
    const b1 = c.b1;
    const b2 = c.b2;
    const a1 = -c.a1;
    const a2 = -c.a2;
    const k1 = c.feedback;
    const k2 = c.feedback === 2 ? -1 : 0;
    const limit = c.limit;
    let x1 = state[at];
    let x2 = state[at + 1];
    let y1 = state[at + 2];
    let y2 = state[at + 3];
    let e1 = state[at + 4];
    let e2 = state[at + 5];
    for (let i = 0; i < count; i++) {
      const x = value[i];
      let sum = multiplyAdd(multiplyAdd(multiply(b0, x), b1, x1), b2, x2); // <= (sum |b|) * |x|
      sum = multiplyAdd(multiplyAdd(sum, a1, y1), a2, y2); // + (|a1| + |a2|) * limit
      sum = multiplyAdd(multiplyAdd(sum, k1, e1), k2, e2); // + 3 * 2^(F-1), altogether < 2^53
      const rounded = shiftRound(sum, fractionBits);
      const y = clamp(rounded, -limit, limit);
      e2 = e1;
      e1 = subtract(sum, shiftLeft(rounded, fractionBits)); // -2^(F-1) .. 2^(F-1) - 1
      if (y !== rounded) {
        e1 = 0;
        e2 = 0;
        status[i] |= CLAMPED;
      }
      x2 = x1;
      x1 = x;
      y2 = y1;
      y1 = y;
      value[i] = y;
    }
    state[at] = x1;
    state[at + 1] = x2;
    state[at + 2] = y1;
    state[at + 3] = y2;
    state[at + 4] = e1;
    state[at + 5] = e2;
  }

  describe(): string {
    const c = this.constants;
    let text = 'sections: ' + c.sections.length + ', fraction bits';
    for (let n = 0; n < c.sections.length; n++) text += ' ' + c.sections[n].fractionBits;
    return text + ', error feedback ' + c.sections[0].feedback + ', ' + (c.primed ? 'primed' : 'from zero') +
      ', over-range stays ' + c.memorySamples + ' samples';
  }
}

export function checkSections(c: SectionsConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeAny(problems);
  problems.integer('primed', c.primed, 0, 1, 'primed 1, from zero 0');
  problems.integer('memorySamples', c.memorySamples, 0, 2147483646, 'a faster filter');
  if (c.sections.length < 1 || c.sections.length > 8) {
    problems.add('sections', c.sections.length, '1 to 8', 'use two stages of sections');
  }
  for (let n = 0; n < c.sections.length; n++) checkSection(c.sections[n], 'section ' + (n + 1) + ' ', flow, problems);
}

function checkSection(s: SectionConstants, name: string, flow: Flow, problems: Problems): void {
  const most = 2147483647;
  const sane = problems.integer(name + 'fractionBits', s.fractionBits, 1, 30, 'use 1 to 30 fraction bits') &&
    problems.integer(name + 'b0', s.b0, -most, most, 'use fewer fraction bits') &&
    problems.integer(name + 'b1', s.b1, -most, most, 'use fewer fraction bits') &&
    problems.integer(name + 'b2', s.b2, -most, most, 'use fewer fraction bits') &&
    problems.integer(name + 'a1', s.a1, -most, most, 'use fewer fraction bits') &&
    problems.integer(name + 'a2', s.a2, -most, most, 'use fewer fraction bits') &&
    problems.integer(name + 'feedback', s.feedback, 0, 2, 'error feedback of order 0, 1 or 2') &&
    problems.integer(name + 'limit', s.limit, 1, most, 'the largest magnitude that it may give');
  if (!sane) return;
  const unity = shiftLeft(1, s.fractionBits);
  // both poles inside the circle: |a2| < 1 and |a1| < 1 + a2 (the stability triangle)
  if (s.a2 >= unity || s.a2 <= -unity || s.a1 >= unity + s.a2 || -s.a1 >= unity + s.a2) {
    problems.add(name + 'a1, a2', s.a1 + ', ' + s.a2, 'poles inside the unit circle', 'decimate first, or use more fraction bits');
    return;
  }
  const ahead = sizeOf(s.b0) + sizeOf(s.b1) + sizeOf(s.b2);
  const back = sizeOf(s.a1) + sizeOf(s.a2);
  problems.width(name + 'sum', ahead * flow.limit + back * s.limit + 2 * unity,
    'use fewer guard bits or fewer fraction bits, or decimate first');
  flow.give(problems, s.limit, 'lower the limit');
}

function sizeOf(value: number): number {
  return value < 0 ? -value : value;
}
