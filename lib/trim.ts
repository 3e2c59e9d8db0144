/**
 * Offset trim and gain trim: corrections over temperature from the unit's tables. Take and give counts.
 *
 *   offset trim:  y = x - offset(T)                                   exact; clamped to `limit` -> CLAMPED
 *   gain trim:    g = round(gainQ24 * gain(T) / 2^24),   y = round(x * g / 2^24); clamped -> CLAMPED
 * T is the temperature lane; tables are held beyond their ends. A table is read anew only where T changes. A table of
 * one knot needs no thermometer. No memory beyond that, so the first sample is like any other; delay 0.
 * An absolute offset table behind a zero is refused, because the zero has already removed that offset.
 * Bounds: |x| + |offset| < 2^33;  gains up to 4 each, so g <= 2^28 and |x| * g < 2^53 where |x| < 2^25.
 */
import { clamp, multiply, shiftRound, subtract } from './arithmetic.ts';
import { CLAMPED } from './status.ts';
import { clearState } from './stage.ts';
import { interpolate } from './table.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface OffsetTrimConstants {
  kind: 'offsetTrim';
  limit: number;
}

export interface GainTrimConstants {
  kind: 'gainTrim';
  limit: number;
}

const FIELDS = ['started', 'temperature', 'correction'];
const NONE: readonly string[] = [];

export class OffsetTrim implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: OffsetTrimConstants;
  unit: UnitConstants;

  constructor(constants: OffsetTrimConstants, unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = NONE;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.unit = unit;
    this.reset();
  }

  reset(): void {
    clearState(this);
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const temperature = block.temperature;
    const count = block.count;
    const limit = this.constants.limit;
    const unit = this.unit;
    const state = this.state;
    let started = state[0];
    let before = state[1];
    let offset = state[2];
    for (let i = 0; i < count; i++) {
      const now = temperature[i];
      if (started === 0 || now !== before) {
        started = 1;
        before = now;
        offset = interpolate(unit.offsetTemperatures, unit.offsets, now);
      }
      const y = subtract(value[i], offset);
      const held = clamp(y, -limit, limit);
      if (held !== y) status[i] |= CLAMPED;
      value[i] = held;
    }
    state[0] = started;
    state[1] = before;
    state[2] = offset;
  }

  describe(): string {
    return 'offsetTrim: ' + this.unit.offsets.length + ' knots, limit ' + this.constants.limit + ', delay 0, gain 1';
  }
}

export class GainTrim implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: GainTrimConstants;
  unit: UnitConstants;

  constructor(constants: GainTrimConstants, unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = NONE;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.unit = unit;
    this.reset();
  }

  reset(): void {
    clearState(this);
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const temperature = block.temperature;
    const count = block.count;
    const limit = this.constants.limit;
    const unit = this.unit;
    const state = this.state;
    let started = state[0];
    let before = state[1];
    let gainQ24 = state[2];
    for (let i = 0; i < count; i++) {
      const now = temperature[i];
      if (started === 0 || now !== before) {
        started = 1;
        before = now;
        gainQ24 = shiftRound(multiply(unit.gainQ24, interpolate(unit.gainTemperatures, unit.gainsQ24, now)), 24); // <= 2^28
      }
      const y = shiftRound(multiply(value[i], gainQ24), 24); // |value| * gainQ24 < 2^53
      const held = clamp(y, -limit, limit);
      if (held !== y) status[i] |= CLAMPED;
      value[i] = held;
    }
    state[0] = started;
    state[1] = before;
    state[2] = gainQ24;
  }

  describe(): string {
    return 'gainTrim: unit gain ' + this.unit.gainQ24 + '/2^24, ' + this.unit.gainsQ24.length + ' knots, limit ' +
      this.constants.limit + ', delay 0';
  }
}

export function checkOffsetTrim(c: OffsetTrimConstants, unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  problems.integer('limit', c.limit, 1, 2147483647, 'the largest magnitude that it may give');
  if (flow.zeroed) problems.add('order', 'behind zero', 'ahead of zero', 'the zero has already removed this offset');
  if (unit.offsets.length > 1 && !flow.temperature) {
    problems.add('order', 'no temperature', 'a thermometer ahead of it', 'put thermometer ahead, or use a table of one knot');
  }
  flow.give(problems, c.limit, 'lower the limit');
}

export function checkGainTrim(c: GainTrimConstants, unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  problems.integer('limit', c.limit, 1, 2147483647, 'the largest magnitude that it may give');
  if (unit.gainsQ24.length > 1 && !flow.temperature) {
    problems.add('order', 'no temperature', 'a thermometer ahead of it', 'put thermometer ahead, or use a table of one knot');
  }
  let largest = 0;
  for (let i = 0; i < unit.gainsQ24.length; i++) if (unit.gainsQ24[i] > largest) largest = unit.gainsQ24[i];
  const gainQ24 = Math.floor((unit.gainQ24 * largest) / 16777216) + 1;
  problems.width('|x| * gain', flow.limit * gainQ24 + 8388608, 'use fewer guard bits');
  flow.give(problems, c.limit, 'lower the limit');
}
