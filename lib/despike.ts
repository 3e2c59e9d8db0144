/**
 * Despike: running median of the last 3 or 5 samples by a compare network. Takes and gives counts.
 *
 * y[n] = median(x[n], x[n-1], ..., x[n-window+1]); exact, no rounding, DC gain 1, delay (window - 1) / 2 samples.
 * First sample: primed, the history holds that sample; from zero, the history holds 0 and SETTLING is set until
 * window samples are in and does not linger. A lingering status bit stays on the window - 1 samples behind. Bound: none beyond the input.
 * Network of five: seven compare-exchanges (D. E. Knuth, The Art of Computer Programming 3, section 5.3.3, median
 * selection; value from memory).
 */
import { SETTLING } from './status.ts';
import { LINGER_FIELDS, linger } from './linger.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface DespikeConstants {
  kind: 'despike';
  window: number;
  /** 1: the first sample fills the history, 0: it starts at zero. */
  primed: number;
}

const FIELDS = [
  'x1', 'x2', 'x3', 'x4', 'seen',
  LINGER_FIELDS[0], LINGER_FIELDS[1], LINGER_FIELDS[2], LINGER_FIELDS[3], LINGER_FIELDS[4],
];
const LINGER_AT = 5;
const NONE: readonly string[] = [];

export class Despike implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: DespikeConstants;

  constructor(constants: DespikeConstants, _unit: UnitConstants) {
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
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const count = block.count;
    const window = this.constants.window;
    const primed = this.constants.primed;
    const state = this.state;
    linger(block, state, LINGER_AT, window - 1);
    let x1 = state[0];
    let x2 = state[1];
    let x3 = state[2];
    let x4 = state[3];
    let seen = state[4];
    for (let i = 0; i < count; i++) {
      const x = value[i];
      if (seen === 0 && primed === 1) {
        x1 = x;
        x2 = x;
        x3 = x;
        x4 = x;
        seen = window;
      }
      if (seen < window) seen++;
      if (seen < window) status[i] |= SETTLING;
      value[i] = window === 3 ? medianOf3(x, x1, x2) : medianOf5(x, x1, x2, x3, x4);
      x4 = x3;
      x3 = x2;
      x2 = x1;
      x1 = x;
    }
    state[0] = x1;
    state[1] = x2;
    state[2] = x3;
    state[3] = x4;
    state[4] = seen;
  }

  describe(): string {
    const c = this.constants;
    return 'despike: median of ' + c.window + ', ' + (c.primed ? 'primed' : 'from zero') + ', delay ' + (c.window - 1) / 2 +
      ', gain 1';
  }
}

function medianOf3(a: number, b: number, c: number): number {
  const low = a < b ? a : b;
  const high = a < b ? b : a;
  const lowerOfHigh = high < c ? high : c;
  return low > lowerOfHigh ? low : lowerOfHigh;
}

function medianOf5(a: number, b: number, c: number, d: number, e: number): number {
  const lowAB = a < b ? a : b;
  const highAB = a < b ? b : a;
  const lowCD = c < d ? c : d;
  const highCD = c < d ? d : c;
  // neither the lowest nor the highest of these four can be the median of five
  const middle1 = lowAB > lowCD ? lowAB : lowCD;
  const middle2 = highAB < highCD ? highAB : highCD;
  return medianOf3(e, middle1, middle2);
}

export function checkDespike(c: DespikeConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  if (c.window !== 3 && c.window !== 5) problems.add('window', c.window, '3 or 5', 'choose one of them');
  problems.integer('primed', c.primed, 0, 1, 'primed 1, from zero 0');
}
