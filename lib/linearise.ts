/**
 * Linearise: piecewise-linear correction on a grid of 2^gridBits counts. Takes and gives counts.
 *
 * i = floor((x - origin) / 2^gridBits), f = the rest,  y = knot[i] + round((knot[i+1] - knot[i]) * f / 2^gridBits)
 * Exact at the knots. Beyond the ends: the end value with CLAMPED (beyond 0), or on along the end segment (beyond 1),
 * clamped to `limit` -> CLAMPED. No memory, delay 0; gain from the knots.
 * Bound: |knot difference| * |x - origin| + |knot| + 2^(gridBits-1) < 2^53.
 */
import { add, clamp, lowBits, multiply, shiftFloor, shiftLeft, shiftRound, subtract } from './arithmetic.ts';
import { CLAMPED } from './status.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface LineariseConstants {
  kind: 'linearise';
  origin: number;
  gridBits: number;
  knots: number[];
  /** 0: hold the end value, 1: go on with the end slope. */
  beyond: number;
  limit: number;
}

const NONE: readonly string[] = [];

export class Linearise implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: LineariseConstants;

  constructor(constants: LineariseConstants, _unit: UnitConstants) {
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
    const origin = this.constants.origin;
    const gridBits = this.constants.gridBits;
    const knots = this.constants.knots;
    const beyond = this.constants.beyond;
    const limit = this.constants.limit;
    const last = knots.length - 1;
    for (let i = 0; i < count; i++) {
      const distance = subtract(value[i], origin);
      const segment = shiftFloor(distance, gridBits);
      const rest = lowBits(distance, gridBits);
      let y: number;
      if (segment >= 0 && segment < last) {
        y = add(knots[segment], shiftRound(multiply(subtract(knots[segment + 1], knots[segment]), rest), gridBits));
      } else if (segment === last && rest === 0) {
        y = knots[last];
      } else if (beyond === 0) {
        status[i] |= CLAMPED;
        y = segment < 0 ? knots[0] : knots[last];
      } else if (segment < 0) {
        y = add(knots[0], shiftRound(multiply(subtract(knots[1], knots[0]), distance), gridBits));
      } else {
        const past = subtract(distance, shiftLeft(last, gridBits));
        y = add(knots[last], shiftRound(multiply(subtract(knots[last], knots[last - 1]), past), gridBits));
      }
      const held = clamp(y, -limit, limit);
      if (held !== y) status[i] |= CLAMPED;
      value[i] = held;
    }
  }

  describe(): string {
    const c = this.constants;
    return 'linearise: ' + c.knots.length + ' knots from ' + c.origin + ' every 2^' + c.gridBits + ' counts, ' +
      (c.beyond ? 'end slope' : 'held') + ' beyond, delay 0';
  }
}

export function checkLinearise(c: LineariseConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  problems.integer('origin', c.origin, -2147483648, 2147483647, 'the input of the first knot');
  problems.integer('beyond', c.beyond, 0, 1, 'hold 0, slope 1');
  problems.integer('limit', c.limit, 1, 2147483647, 'the largest magnitude that it may give');
  const sane = problems.integer('gridBits', c.gridBits, 0, 30, 'a coarser or finer grid');
  if (c.knots.length < 2 || c.knots.length > 257) {
    problems.add('knots', c.knots.length, '2 to 257 knots', 'use a coarser grid');
    return;
  }
  let steepest = 0;
  for (let i = 0; i < c.knots.length; i++) {
    problems.integer('knots', c.knots[i], -2147483648, 2147483647, 'keep it in 32 bits');
    const rise = i === 0 ? 0 : c.knots[i] - c.knots[i - 1];
    if (rise > steepest) steepest = rise;
    if (-rise > steepest) steepest = -rise;
  }
  const reach = flow.limit + (c.origin < 0 ? -c.origin : c.origin) + (sane ? shiftLeft(c.knots.length, c.gridBits) : 0);
  // the end knot (2^31) and the rounding half (2^29 at most) come on top of the product
  problems.width('knot difference * |x - origin|', steepest * reach + 2684354560, 'use fewer guard bits');
  flow.give(problems, c.limit, 'lower the limit');
}
