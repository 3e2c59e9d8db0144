/**
 * Over-range and stuck-code watch. Takes and gives undisturbed samples (directly behind intake, so what it sees is
 * the raw code); leaves the values as they are and only sets status. In code direction, x = sign * value:
 *   rail:  x >= highLimit, or x <= lowLimit, `consecutive` samples in a row     -> RAILED
 *   limit: |x| > magnitudeLimit                                                -> OVER_RANGE
 *   slew:  |x[n] - x[n-1]| > slewLimit                                         -> OVER_RANGE
 *   hold:  OVER_RANGE on the `holdSamples` samples behind the last of these, while the analog side recovers
 *   latch: OVER_RANGE_LATCHED from the first of these until a sample with EVENT_CLEAR that is none of these itself (one
 *          that is only held clears it, and its hold goes on)
 *   stuck: the same value `stuckAfter` times in a row, not at a rail           -> STUCK (0: not watched)
 * The samples of a rail before the `consecutive`-th are already gone and stay unflagged. First sample: no slew.
 * Delay 0. Counters stop at their limit. Bound: |x[n] - x[n-1]| < 2^32.
 */
import { magnitude, multiply, subtract } from './arithmetic.ts';
import { EVENT_CLEAR, OVER_RANGE, OVER_RANGE_LATCHED, RAILED, STUCK } from './status.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface OverRangeConstants {
  kind: 'overRange';
  /** Counts in code direction. */
  highLimit: number;
  lowLimit: number;
  consecutive: number;
  magnitudeLimit: number;
  slewLimit: number;
  holdSamples: number;
  stuckAfter: number;
}

const FIELDS = ['started', 'previous', 'highCount', 'lowCount', 'sameCount', 'holdLeft', 'latched'];
const NONE: readonly string[] = [];

export class OverRange implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: OverRangeConstants;
  sign: number;

  constructor(constants: OverRangeConstants, unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = NONE;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.sign = unit.sign;
    this.reset();
  }

  reset(): void {
    clearState(this);
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const count = block.count;
    const highLimit = this.constants.highLimit;
    const lowLimit = this.constants.lowLimit;
    const consecutive = this.constants.consecutive;
    const magnitudeLimit = this.constants.magnitudeLimit;
    const slewLimit = this.constants.slewLimit;
    const holdSamples = this.constants.holdSamples;
    const stuckAfter = this.constants.stuckAfter;
    const sign = this.sign;
    const state = this.state;
    let started = state[0];
    let previous = state[1];
    let highCount = state[2];
    let lowCount = state[3];
    let sameCount = state[4];
    let holdLeft = state[5];
    let latched = state[6];
    for (let i = 0; i < count; i++) {
      const x = multiply(sign, value[i]);
      let bits = status[i];
      const high = x >= highLimit;
      const low = x <= lowLimit;
      highCount = high ? (highCount < consecutive ? highCount + 1 : consecutive) : 0;
      lowCount = low ? (lowCount < consecutive ? lowCount + 1 : consecutive) : 0;
      const railed = highCount === consecutive || lowCount === consecutive;
      const beyond = magnitude(x) > magnitudeLimit ||
        (started === 1 && magnitude(subtract(x, previous)) > slewLimit); // < 2^32
      if (railed) bits |= RAILED;
      if (railed || beyond) {
        if (beyond) bits |= OVER_RANGE;
        holdLeft = holdSamples;
        latched = 1;
      } else {
        if (bits & EVENT_CLEAR) latched = 0;
        if (holdLeft > 0) {
          bits |= OVER_RANGE;
          holdLeft--;
        }
      }
      if (latched === 1) bits |= OVER_RANGE_LATCHED;
      if (high || low) sameCount = 0;
      else if (started === 1 && x === previous) sameCount = sameCount < stuckAfter ? sameCount + 1 : stuckAfter;
      else sameCount = stuckAfter > 0 ? 1 : 0;
      if (stuckAfter > 0 && sameCount === stuckAfter) bits |= STUCK;
      previous = x;
      started = 1;
      status[i] = bits;
    }
    state[0] = started;
    state[1] = previous;
    state[2] = highCount;
    state[3] = lowCount;
    state[4] = sameCount;
    state[5] = holdLeft;
    state[6] = latched;
  }

  describe(): string {
    const c = this.constants;
    return 'overRange: rail from ' + c.highLimit + ' and ' + c.lowLimit + ' counts after ' + c.consecutive +
      ', limit ' + c.magnitudeLimit + ', slew ' + c.slewLimit + ' a sample, hold ' + c.holdSamples +
      (c.stuckAfter ? ', stuck after ' + c.stuckAfter : '') + ', delay 0';
  }
}

export function checkOverRange(c: OverRangeConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  if (flow.domain !== 'samples') {
    problems.add('order', flow.domain, 'undisturbed samples', 'put overRange directly behind intake');
  }
  problems.integer('highLimit', c.highLimit, -2147483647, 2147483647, 'counts of the highest code');
  problems.integer('lowLimit', c.lowLimit, -2147483647, 2147483647, 'counts of the lowest code');
  if (c.lowLimit >= c.highLimit) problems.add('lowLimit', c.lowLimit, 'below highLimit ' + c.highLimit, 'swap them');
  problems.integer('consecutive', c.consecutive, 1, 65535, 'samples in a row');
  problems.integer('magnitudeLimit', c.magnitudeLimit, 0, 2147483647, '2147483647 for no limit');
  problems.integer('slewLimit', c.slewLimit, 0, 4294967295, '4294967295 for no limit');
  problems.integer('holdSamples', c.holdSamples, 0, 2147483647, 'shorten the hold time');
  problems.integer('stuckAfter', c.stuckAfter, 0, 2147483647, '0 when it is not watched');
  if (c.stuckAfter === 1) problems.add('stuckAfter', 1, '0, or 2 and more', 'a single code is not stuck');
}
