/**
 * Average: running mean of the last `length` samples, 1..65536. Takes and gives counts, or readings.
 *
 * sum[n] = sum[n-1] + x[n] - x[n-length],   y[n] = round(sum[n] / length); the sum is an exact integer, for ever.
 * First sample: primed, the history holds that sample; from zero, it holds 0 and SETTLING is set until `length` samples
 * are in and does not linger. Lingering bits stay for length - 1 samples. DC gain 1, delay (length - 1) / 2 samples.
 * Memory: `length` words. Bound: length * |x| < 2^47.
 */
import { add, divideRound, multiply, subtract } from './arithmetic.ts';
import { SETTLING } from './status.ts';
import { LINGER_FIELDS, linger } from './linger.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface AverageConstants {
  kind: 'average';
  length: number;
  primed: number;
}

const FIELDS = [
  'sum', 'position', 'seen',
  LINGER_FIELDS[0], LINGER_FIELDS[1], LINGER_FIELDS[2], LINGER_FIELDS[3], LINGER_FIELDS[4],
];
const LINGER_AT = 3;
const NONE: readonly string[] = [];

export class Average implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: AverageConstants;

  constructor(constants: AverageConstants, _unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = NONE;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(constants.length);
    this.constants = constants;
    this.reset();
  }

  reset(): void {
    clearState(this);
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const count = block.count;
    const length = this.constants.length;
    const ring = this.ring;
    const state = this.state;
    if (count === 0) return;
    linger(block, state, LINGER_AT, length - 1);
    if (state[2] === 0 && this.constants.primed === 1) this.prime(value[0]);
    let sum = state[0];
    let position = state[1];
    let seen = state[2];
    for (let i = 0; i < count; i++) {
      const x = value[i];
      sum = add(sum, subtract(x, ring[position])); // <= length * |x|
      ring[position] = x;
      position = position + 1 === length ? 0 : position + 1;
      if (seen < length) seen++;
      if (seen < length) status[i] |= SETTLING;
      value[i] = divideRound(sum, length);
    }
    state[0] = sum;
    state[1] = position;
    state[2] = seen;
  }

  prime(first: number): void {
    const length = this.constants.length;
    for (let i = 0; i < length; i++) this.ring[i] = first;
    this.state[0] = multiply(first, length);
    this.state[2] = length;
  }

  describe(): string {
    const c = this.constants;
    return 'average: of ' + c.length + ', ' + (c.primed ? 'primed' : 'from zero') + ', ' + c.length + ' words of memory, delay ' +
      (c.length - 1) / 2 + ', gain 1';
  }
}

export function checkAverage(c: AverageConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeAny(problems);
  problems.integer('length', c.length, 1, 65536, 'decimate first');
  problems.integer('primed', c.primed, 0, 1, 'primed 1, from zero 0');
}
