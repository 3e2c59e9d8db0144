/**
 * Zero: removes what is read at zero current. Takes and gives counts;  y = x - taken - tracked, clamped to `limit`.
 *
 * taken    the stored zero: the unit's factory zero at first, then the mean of `meanSamples` samples, rounded, taken at
 *          start-up (after `settleSamples` undisturbed samples) or at a rising edge of EVENT_ZERO. Refused, with
 *          ZERO_REFUSED until one succeeds, when their span is over spanLimit, their mean is further than windowLimit
 *          from the factory zero, or (start-up only) while the zero is suspect. SETTLING until it is decided; the sample
 *          that decides still carries it and already has the new zero removed. A disturbed sample (over range, rail,
 *          clamped, stuck, settling) starts the wait or the mean anew. The button is low before the first sample, so
 *          one held at reset is an edge; an edge ends an attempt under way, start-up included.
 * tracked  while tracking: one count towards x every stepSamples samples, |tracked| <= authority. Only after
 *          holdSamples samples in a row with |x - factoryZero| <= trackWindow, none disturbed, no zero being taken,
 *          not suspect; TRACKING then. The window looks at x, not at y, so a wrong zero cannot hold its own gate shut.
 * suspect  (suspectMode) from the first over-range or rail until a zero is taken or EVENT_DEGAUSSED; ZERO_SUSPECT. An
 *          overload on the same sample as EVENT_DEGAUSSED leaves it suspect.
 * Kept over a power cycle: taken, its temperature, suspect. After reset: the factory zero. The zero lane carries
 * taken + tracked. Delay 0, gain 1, no memory that lingers. Bound: meanSamples * (|x| + 1) < 2^53.
 */
import { add, clamp, divideRound, magnitude, subtract } from './arithmetic.ts';
import {
  CLAMPED, EVENT_DEGAUSSED, EVENT_ZERO, LINGERING, OVERLOAD, SETTLING, TRACKING, ZERO_REFUSED, ZERO_SUSPECT,
} from './status.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface ZeroConstants {
  kind: 'zero';
  startMode: number;
  settleSamples: number;
  meanSamples: number;
  spanLimit: number;
  windowLimit: number;
  buttonMode: number;
  trackMode: number;
  trackWindow: number;
  holdSamples: number;
  stepSamples: number;
  authority: number;
  suspectMode: number;
  limit: number;
}

const FIELDS = [
  'taken', 'takenTemperature', 'suspect', 'tracked', 'phase', 'left', 'automatic', 'sum', 'lowest', 'highest', 'refused',
  'holdLeft', 'stepLeft', 'button',
];
const KEPT: readonly string[] = ['taken', 'takenTemperature', 'suspect'];
const IDLE = 0;
const WAITING = 1;
const MEASURING = 2;

export class Zero implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: ZeroConstants;
  factoryZero: number;

  constructor(constants: ZeroConstants, unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = KEPT;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.factoryZero = unit.factoryZero;
    this.reset();
  }

  reset(): void {
    clearState(this);
    const state = this.state;
    state[0] = this.factoryZero;
    state[11] = this.constants.holdSamples;
    state[12] = this.constants.stepSamples;
    if (this.constants.startMode === 1) this.beginZero(this.constants.settleSamples > 0 ? WAITING : MEASURING, 1);
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const zero = block.zero;
    const count = block.count;
    const buttonMode = this.constants.buttonMode;
    const trackMode = this.constants.trackMode;
    const suspectMode = this.constants.suspectMode;
    const limit = this.constants.limit;
    const state = this.state;
    for (let i = 0; i < count; i++) {
      const x = value[i];
      let bits = status[i];
      if (bits & EVENT_DEGAUSSED) state[2] = 0;
      if (suspectMode === 1 && bits & OVERLOAD) state[2] = 1;
      if (bits & EVENT_ZERO) {
        if (state[13] === 0 && buttonMode === 1) this.beginZero(MEASURING, 0);
        state[13] = 1;
      } else {
        state[13] = 0;
      }
      const undisturbed = (bits & LINGERING) === 0;
      if (state[4] !== IDLE) {
        bits |= SETTLING;
        this.takeZero(x, undisturbed, block.temperature[i]);
      } else if (trackMode === 1 && this.track(x, undisturbed)) {
        bits |= TRACKING;
      }
      const removed = add(state[0], state[3]);
      const y = subtract(x, removed); // < 2^33
      const held = clamp(y, -limit, limit);
      if (held !== y) bits |= CLAMPED;
      if (state[2] === 1) bits |= ZERO_SUSPECT;
      if (state[10] === 1) bits |= ZERO_REFUSED;
      value[i] = held;
      status[i] = bits;
      zero[i] = removed;
    }
  }

  beginZero(phase: number, automatic: number): void {
    const state = this.state;
    state[4] = phase;
    state[5] = phase === WAITING ? this.constants.settleSamples : this.constants.meanSamples;
    state[6] = automatic;
    state[7] = 0;
    state[11] = this.constants.holdSamples;
    state[12] = this.constants.stepSamples;
  }

  takeZero(x: number, undisturbed: boolean, temperature: number): void {
    const state = this.state;
    const meanSamples = this.constants.meanSamples;
    if (!undisturbed) {
      this.beginZero(state[4], state[6]);
      return;
    }
    if (state[4] === WAITING) {
      state[5]--;
      if (state[5] === 0) this.beginZero(MEASURING, state[6]);
      return;
    }
    if (state[5] === meanSamples || x < state[8]) state[8] = x;
    if (state[5] === meanSamples || x > state[9]) state[9] = x;
    state[7] = add(state[7], x); // <= meanSamples * |x| < 2^53
    state[5]--;
    if (state[5] > 0) return;
    state[4] = IDLE;
    const mean = divideRound(state[7], meanSamples);
    const refused = subtract(state[9], state[8]) > this.constants.spanLimit ||
      magnitude(subtract(mean, this.factoryZero)) > this.constants.windowLimit ||
      (state[6] === 1 && state[2] === 1);
    state[10] = refused ? 1 : 0;
    if (refused) return;
    state[0] = mean;
    state[1] = temperature;
    state[2] = 0;
    state[3] = 0;
  }

  /** true while drift is being followed at this sample. */
  track(x: number, undisturbed: boolean): boolean {
    const state = this.state;
    const near = magnitude(subtract(x, this.factoryZero)) <= this.constants.trackWindow;
    if (!undisturbed || !near || state[2] === 1) {
      state[11] = this.constants.holdSamples;
      state[12] = this.constants.stepSamples;
      return false;
    }
    if (state[11] > 0) {
      state[11]--;
      return false;
    }
    state[12]--;
    if (state[12] > 0) return true;
    state[12] = this.constants.stepSamples;
    const rest = subtract(x, add(state[0], state[3]));
    const moved = rest > 0 ? state[3] + 1 : rest < 0 ? state[3] - 1 : state[3];
    if (magnitude(moved) <= this.constants.authority) state[3] = moved;
    return true;
  }

  describe(): string {
    const c = this.constants;
    return 'zero: ' + (c.startMode ? 'at start-up, ' : '') + (c.buttonMode ? 'on the button, ' : '') + 'mean of ' +
      c.meanSamples + ', span ' + c.spanLimit + ', window ' + c.windowLimit +
      (c.trackMode ? ', tracking within ' + c.trackWindow + ' up to ' + c.authority : '') + ', delay 0, gain 1';
  }
}

export function checkZero(c: ZeroConstants, unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  problems.integer('startMode', c.startMode, 0, 1, 'at start-up 1');
  problems.integer('buttonMode', c.buttonMode, 0, 1, 'on the button 1');
  problems.integer('trackMode', c.trackMode, 0, 1, 'tracking 1');
  problems.integer('suspectMode', c.suspectMode, 0, 1, 'suspect after an overload 1');
  problems.integer('settleSamples', c.settleSamples, 0, 2147483647, 'a shorter wait');
  problems.integer('meanSamples', c.meanSamples, 1, 16777216, 'average over a shorter time');
  problems.integer('spanLimit', c.spanLimit, 0, 4294967295, 'a smaller span');
  problems.integer('windowLimit', c.windowLimit, 0, 2147483647, 'a smaller window');
  problems.integer('trackWindow', c.trackWindow, 0, 2147483647, 'a smaller window');
  problems.integer('holdSamples', c.holdSamples, 0, 2147483647, 'a shorter hold time');
  problems.integer('stepSamples', c.stepSamples, 1, 2147483647, 'one count every so many samples');
  problems.integer('authority', c.authority, 0, 2147483647, 'a smaller authority');
  problems.integer('limit', c.limit, 1, 2147483647, 'the largest magnitude that it may give');
  problems.width('meanSamples * |x|', c.meanSamples * (flow.limit + 1), 'average over a shorter time or use fewer guard bits');
  // the zero travels in 32 bits
  if (flow.limit + c.authority > 2147483647) {
    problems.add('authority', c.authority, 'at most ' + (2147483647 - flow.limit), 'use a smaller authority');
  }
  if (unit.factoryZero > flow.limit || unit.factoryZero < -flow.limit) {
    problems.add('factoryZero', unit.factoryZero, 'within ' + flow.limit + ' counts', 'calibrate the zero anew');
  }
  flow.zeroed = true;
  flow.give(problems, c.limit, 'lower the limit');
}
