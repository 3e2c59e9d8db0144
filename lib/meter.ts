/**
 * Meter: mean, RMS and peaks over windows; a tap, it leaves every sample as it is. Takes counts or readings.
 *
 * Fixed windows (cycles = 0): windowSamples samples each, one directly behind the other.
 * Whole cycles (cycles > 0): a window runs from one upward crossing to the cycles-th after it. A crossing is upward
 * when x reaches mean + hysteresis after it was at mean - hysteresis or below; mean is that of the window before, or
 * while there is none, of the samples since this skip or window began, x not included. Samples ahead of the first
 * crossing are skipped (counted in the record). windowSamples samples without an end close the window as one without
 * cycles (cycles 0 in the record), also when the next sample would have been its crossing.
 * Over a window of N samples, S = sum x, Q = sum x^2, both exact:
 *   mean = round(S / N)   trueRms = floor(sqrt(Q / N))   acRms = floor(sqrt(N Q - S^2) / N)
 * With q = floor(|S| / N), r = |S| - q N:  N Q - S^2 = N D - r^2 where D = Q - N q^2 - 2 q r, which fits two words.
 * After reset: no window open, no record. No delay. A record's status is the OR over its samples and those skipped.
 * The last `capacity` records are held in `ring`, the next goes to number `slot`; `written` counts all, modulo 2^32.
 * Bounds: N <= 2^20, so N |x| <= 2^51; Q < 2^82 in two words.
 */
import { add, divideFloor, divideRound, lowBits, multiply, shiftFloor, shiftLeft, subtract } from './arithmetic.ts';
import { divide, square, squareRoot, subtractNumber, subtractSquares } from './twoword.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface MeterConstants {
  kind: 'meter';
  windowSamples: number;
  cycles: number;
  hysteresis: number;
  /** Records that the ring holds. */
  capacity: number;
}

/** Words of a record, in this order. */
export const RECORD_FIELDS = [
  'skipped', 'count', 'mean', 'trueRms', 'acRms', 'highest', 'lowest', 'cycles', 'status', 'zero',
];
export const RECORD_WORDS = 10;

const FIELDS = [
  'count', 'sum', 'squareHigh', 'squareLow', 'highest', 'lowest', 'status', 'crossings', 'skipped', 'armed',
  'referenceSum', 'referenceCount', 'open', 'zero', 'slot', 'written',
];
const NONE: readonly string[] = [];

export class Meter implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: MeterConstants;
  words: Float64Array;
  scratch: Float64Array;

  constructor(constants: MeterConstants, _unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = NONE;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(constants.capacity * RECORD_WORDS);
    this.constants = constants;
    this.words = new Float64Array(2);
    this.scratch = new Float64Array(2);
    this.reset();
  }

  reset(): void {
    clearState(this);
    if (this.constants.cycles === 0) this.state[12] = 1;
  }

  process(block: Block): void {
    const value = block.value;
    const status = block.status;
    const count = block.count;
    const windowSamples = this.constants.windowSamples;
    const cycles = this.constants.cycles;
    const state = this.state;
    const scratch = this.scratch;
    for (let i = 0; i < count; i++) {
      const x = value[i];
      if (cycles > 0 && this.crosses(x)) this.endCycle();
      if (state[0] === 0 || x > state[4]) state[4] = x;
      if (state[0] === 0 || x < state[5]) state[5] = x;
      square(scratch, x < 0 ? -x : x);
      const low = add(state[3], scratch[1]); // < 2^33
      state[3] = lowBits(low, 32);
      state[2] = add(add(state[2], scratch[0]), shiftFloor(low, 32)); // <= N * 2^30
      state[1] = add(state[1], x); // <= N * 2^31
      state[0]++;
      state[6] |= status[i];
      state[13] = block.zero[i];
      if (state[0] === windowSamples) {
        this.close(0);
        state[12] = cycles === 0 ? 1 : 0;
      }
    }
  }

  /** true when x completes an upward crossing of the reference mean. */
  crosses(x: number): boolean {
    const state = this.state;
    const hysteresis = this.constants.hysteresis;
    const count = state[11] > 0 ? state[11] : state[0];
    const sum = state[11] > 0 ? state[10] : state[1];
    if (count === 0) return false;
    if (state[9] === 0) {
      if (multiply(add(x, hysteresis), count) <= sum) state[9] = 1; // < 2^32 * 2^20
      return false;
    }
    if (multiply(subtract(x, hysteresis), count) < sum) return false;
    state[9] = 0;
    return true;
  }

  /** A crossing: opens the first window, or ends the window when enough cycles are in. */
  endCycle(): void {
    const state = this.state;
    if (state[12] === 0) {
      const status = state[6];
      const skipped = state[8] + state[0];
      this.openWindow();
      state[6] = status;
      state[8] = skipped;
      state[12] = 1;
      return;
    }
    state[7]++;
    if (state[7] === this.constants.cycles) this.close(this.constants.cycles);
  }

  openWindow(): void {
    const state = this.state;
    for (let i = 0; i <= 8; i++) state[i] = 0;
  }

  close(cycles: number): void {
    const state = this.state;
    const records = this.ring;
    const at = multiply(state[14], RECORD_WORDS);
    const count = state[0];
    const sum = state[1];
    records[at] = state[8];
    records[at + 1] = count;
    records[at + 2] = divideRound(sum, count);
    records[at + 3] = this.trueRms();
    records[at + 4] = this.acRms();
    records[at + 5] = state[4];
    records[at + 6] = state[5];
    records[at + 7] = cycles;
    records[at + 8] = state[6];
    records[at + 9] = state[13];
    state[10] = sum;
    state[11] = count;
    state[14] = state[14] + 1 === this.constants.capacity ? 0 : state[14] + 1;
    state[15] = lowBits(state[15] + 1, 32);
    this.openWindow();
  }

  trueRms(): number {
    const words = this.words;
    words[0] = this.state[2];
    words[1] = this.state[3];
    divide(words, this.state[0]);
    return squareRoot(words, this.scratch);
  }

  acRms(): number {
    const words = this.words;
    const count = this.state[0];
    const sum = this.state[1];
    // the mean towards zero, so that q and r have one sign and 2 q r is never negative
    const size = sum < 0 ? -sum : sum;
    const q = divideFloor(size, count); // <= 2^31
    const r = subtract(size, multiply(q, count)); // < 2^20
    words[0] = this.state[2];
    words[1] = this.state[3];
    subtractSquares(words, q, count, this.scratch);
    subtractNumber(words, multiply(shiftLeft(q, 1), r)); // 2^32 * 2^20
    const rest = divide(words, count); // words = floor(D / N)
    if (multiply(count, rest) < multiply(r, r)) subtractNumber(words, 1); // both < 2^40
    return squareRoot(words, this.scratch);
  }

  describe(): string {
    const c = this.constants;
    return 'meter: ' + (c.cycles ? c.cycles + ' cycles, time-out ' : 'windows of ') + c.windowSamples + ' samples, ' +
      c.capacity + ' records, delay 0, gain 1';
  }
}

export function checkMeter(c: MeterConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  const limit = flow.limit;
  if (flow.domain === 'codes') problems.add('order', flow.domain, 'counts or readings', 'put intake first');
  problems.integer('windowSamples', c.windowSamples, 1, 1048576, 'decimate first, or use a shorter window');
  problems.integer('cycles', c.cycles, 0, 65535, '0 for fixed windows');
  problems.integer('hysteresis', c.hysteresis, 1, 2147483647, 'at least one count, so that a steady input never crosses');
  problems.integer('capacity', c.capacity, 1, 65536, 'read the records more often');
  problems.width('(|x| + hysteresis) * windowSamples', (limit + c.hysteresis) * c.windowSamples, 'use a shorter window');
}
