/**
 * Demodulate: undoes a Hall bias that is switched by event levels. Takes and gives counts, one out for one in.
 *
 * A phase is a stretch of samples with the same EVENT_REVERSED and EVENT_QUARTER (reversal looks at EVENT_REVERSED
 * alone). Its first `blank` samples are left out; the rest give its mean m = round(sum / n), which counts from the sample
 * behind the phase on, or behind its `longest`-th sample.
 *   reversal:     y = round((m0 - mR) / 2)                  removes what lies behind the plate (sensor amplifier, A/D)
 *   quarter turn: y = round((m0 + mQ - mR - mRQ) / 4)       removes the plate's own offset too
 * with the latest mean of each phase, held between. Neither removes remanence or an outer field, which are fields like
 * the measured one; and current near the switching frequency reads as DC.
 * First sample: SETTLING and y = 0 until each phase has been seen. A phase longer than `longest` (the bias does not
 * switch) sets STUCK. A phase wholly blanked keeps the old mean. Lingering bits of the samples in a mean stay with every
 * y made from it, also while settling; those of other samples do not come out.
 * Delay: (5 phases - blank) / 2 samples for a quarter turn, (3 phases - blank) / 2 for reversal, on average over the phase
 * for which an output is held; DC gain 1. Bound: longest * (|x| + 1) < 2^53.
 */
import { add, divideRound, shiftRound, subtract } from './arithmetic.ts';
import { EVENT_QUARTER, EVENT_REVERSED, LINGERING, SETTLING, STUCK } from './status.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface DemodulateConstants {
  kind: 'demodulate';
  /** 0: polarity reversal, 1: quarter turn. */
  quarter: number;
  blank: number;
  longest: number;
}

const FIELDS = [
  'phase', 'age', 'sum', 'taken', 'bits', 'output',
  'mean0', 'meanR', 'meanQ', 'meanRQ', 'bits0', 'bitsR', 'bitsQ', 'bitsRQ', 'seen0', 'seenR', 'seenQ', 'seenRQ',
];
const MEAN = 6;
const BITS = 10;
const SEEN = 14;
const NONE: readonly string[] = [];

export class Demodulate implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: DemodulateConstants;

  constructor(constants: DemodulateConstants, _unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = NONE;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.reset();
  }

  reset(): void {
    clearState(this);
    this.state[0] = -1;
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const count = block.count;
    const quarter = this.constants.quarter;
    const blank = this.constants.blank;
    const longest = this.constants.longest;
    const state = this.state;
    let phase = state[0];
    let age = state[1];
    let sum = state[2];
    let taken = state[3];
    let bits = state[4];
    for (let i = 0; i < count; i++) {
      const s = status[i];
      const now = (s & EVENT_REVERSED ? 1 : 0) + (quarter === 1 && s & EVENT_QUARTER ? 2 : 0);
      if (now !== phase) {
        if (taken > 0) this.closePhase(phase, sum, taken, bits);
        phase = now;
        age = 0;
        sum = 0;
        taken = 0;
        bits = 0;
      }
      if (age <= longest) age++;
      if (age > longest) {
        if (taken > 0) this.closePhase(phase, sum, taken, bits);
        sum = 0;
        taken = 0;
        bits = 0;
      } else if (age > blank) {
        sum = add(sum, value[i]); // < longest * |x| < 2^53
        taken++;
        bits |= s & LINGERING;
      }
      value[i] = state[5];
      status[i] = (s & ~LINGERING) | this.outputBits() | (age > longest ? STUCK : 0);
    }
    state[0] = phase;
    state[1] = age;
    state[2] = sum;
    state[3] = taken;
    state[4] = bits;
  }

  closePhase(phase: number, sum: number, taken: number, bits: number): void {
    const state = this.state;
    state[MEAN + phase] = divideRound(sum, taken);
    state[BITS + phase] = bits;
    state[SEEN + phase] = 1;
    if (!this.allSeen()) return;
    if (this.constants.quarter === 1) {
      const kept = add(state[MEAN], state[MEAN + 2]);
      state[5] = shiftRound(subtract(kept, add(state[MEAN + 1], state[MEAN + 3])), 2);
    } else {
      state[5] = shiftRound(subtract(state[MEAN], state[MEAN + 1]), 1);
    }
  }

  allSeen(): boolean {
    const state = this.state;
    const both = state[SEEN] === 1 && state[SEEN + 1] === 1;
    return both && (this.constants.quarter === 0 || (state[SEEN + 2] === 1 && state[SEEN + 3] === 1));
  }

  /** What still lingers in the means that make up the output; SETTLING while one is missing. */
  outputBits(): number {
    const state = this.state;
    const bits = state[BITS] | state[BITS + 1] | (this.allSeen() ? 0 : SETTLING);
    return this.constants.quarter === 1 ? bits | state[BITS + 2] | state[BITS + 3] : bits;
  }

  describe(): string {
    const c = this.constants;
    return 'demodulate: ' + (c.quarter ? 'quarter turn' : 'reversal') + ', ' + c.blank + ' samples blanked, phase at most ' +
      c.longest + ' samples, delay ' + (c.quarter ? 5 : 3) + ' half phases less ' + c.blank / 2 + ', gain 1';
  }
}

export function checkDemodulate(c: DemodulateConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  problems.integer('quarter', c.quarter, 0, 1, 'reversal 0, quarter turn 1');
  problems.integer('longest', c.longest, 1, 2097152, 'switch the bias faster');
  problems.integer('blank', c.blank, 0, c.longest - 1, 'blank less than the longest phase');
  problems.width('longest * |x|', c.longest * (flow.limit + 1), 'shorten the longest phase or use fewer guard bits');
  if (c.quarter === 0) flow.give(problems, flow.limit, 'use fewer guard bits');
}
