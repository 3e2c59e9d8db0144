/**
 * Scale: counts to readings in µA or mA. Takes counts, gives readings.
 *
 * y = round(x * gain / 2^shift), clamped to `limit` -> CLAMPED. No memory, delay 0, DC gain gain / 2^shift.
 * Bound: |x| * gain + 2^(shift-1) < 2^53.
 */
import { clamp, multiply, shiftRound } from './arithmetic.ts';
import { CLAMPED } from './status.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface ScaleConstants {
  kind: 'scale';
  gain: number;
  shift: number;
  /** Readings in an ampere: 1000000 (µA) or 1000 (mA). */
  readingsPerAmpere: number;
  limit: number;
}

const NONE: readonly string[] = [];

export class Scale implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: ScaleConstants;

  constructor(constants: ScaleConstants, _unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = NONE;
    this.kept = NONE;
    this.state = new Float64Array(0);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.reset();
  }

  reset(): void {}

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const count = block.count;
    const gain = this.constants.gain;
    const shift = this.constants.shift;
    const limit = this.constants.limit;
    for (let i = 0; i < count; i++) {
      const y = shiftRound(multiply(value[i], gain), shift); // |x| * gain < 2^53
      const held = clamp(y, -limit, limit);
      if (held !== y) status[i] |= CLAMPED;
      value[i] = held;
    }
  }

  describe(): string {
    const c = this.constants;
    return 'scale: ' + c.gain + ' / 2^' + c.shift + ' to ' + (c.readingsPerAmpere === 1000000 ? 'µA' : 'mA') + ', limit ' +
      c.limit + ', delay 0';
  }
}

export function checkScale(c: ScaleConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  problems.integer('gain', c.gain, 1, 2147483647, 'use another shift');
  problems.integer('limit', c.limit, 1, 2147483647, 'the largest reading');
  if (c.readingsPerAmpere !== 1000000 && c.readingsPerAmpere !== 1000) {
    problems.add('readingsPerAmpere', c.readingsPerAmpere, '1000000 or 1000', 'read in µA or mA');
  }
  if (problems.integer('shift', c.shift, 0, 52, 'use another gain')) {
    problems.width('|x| * gain', flow.limit * c.gain + roundingHalf(c.shift), 'use a smaller gain and shift');
  }
  flow.domain = 'reading';
  flow.give(problems, c.limit, 'lower the limit, or read in mA');
}

/** Half of the last place that the rounding adds. */
function roundingHalf(shift: number): number {
  let half = 0.5;
  for (let n = 0; n < shift; n++) half *= 2;
  return half;
}
