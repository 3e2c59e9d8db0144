/**
 * Decimate: integrator-comb of order 1..5 (order 1 is the boxcar). Takes and gives counts, or readings.
 *
 * order integrators at the input rate, one sample out of `ratio`, order combs at the output rate, all in registers
 * that wrap modulo 2^32; then y = round(comb / ratio^order), so any constant comes out as that constant.
 * An output falls on every ratio-th input after reset; block borders do not matter. First sample x0: primed, the
 * stage works on x - x0 and adds x0 back, which equals x0 having been there always; from zero, SETTLING until
 * order * (ratio - 1) + 1 inputs are in and does not linger. DC gain 1, delay order * (ratio - 1) / 2 input samples.
 * Status: event levels and states are ORed over the inputs of one output; a lingering bit stays while its sample is
 * within the order * (ratio - 1) + 1 inputs that make up an output. Temperature and zero: those of the last input.
 * Bound: register width = input bits + growth, growth = ceil(order * log2 ratio), at most 32 (E. B. Hogenauer, "An
 * economical class of digital filters for decimation and interpolation", IEEE Trans. ASSP-29 no. 2, 1981, pp. 155-162).
 */
import { add, addWrapping, divideRound, multiply, subtractWrapping } from './arithmetic.ts';
import { LINGERING, SETTLING } from './status.ts';
import { LINGER_FIELDS, linger } from './linger.ts';
import { clearState } from './stage.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface DecimateConstants {
  kind: 'decimate';
  order: number;
  ratio: number;
  primed: number;
}

const FIELDS = [
  'started', 'reference', 'phase', 'pending', 'seen',
  'integrator1', 'integrator2', 'integrator3', 'integrator4', 'integrator5',
  'comb1', 'comb2', 'comb3', 'comb4', 'comb5',
  LINGER_FIELDS[0], LINGER_FIELDS[1], LINGER_FIELDS[2], LINGER_FIELDS[3], LINGER_FIELDS[4],
];
const INTEGRATOR = 5;
const COMB = 10;
const LINGER_AT = 15;
const NONE: readonly string[] = [];

export class Decimate implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: DecimateConstants;
  gain: number;

  constructor(constants: DecimateConstants, _unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = FIELDS;
    this.kept = NONE;
    this.state = new Float64Array(FIELDS.length);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.gain = 1;
    for (let n = 0; n < constants.order; n++) this.gain = multiply(this.gain, constants.ratio);
    this.reset();
  }

  reset(): void {
    clearState(this);
  }

  process(block: Block): void {
    const state = this.state;
    const order = this.constants.order;
    if (block.count === 0) return;
    if (state[0] === 0) {
      state[0] = 1;
      state[1] = this.constants.primed === 1 ? block.value[0] : 0;
    }
    linger(block, state, LINGER_AT, order * (this.constants.ratio - 1));
    this.integrate(block);
    this.pick(block);
    this.comb(block);
  }

  integrate(block: Block): void {
    const value = block.value;
    const count = block.count;
    const reference = this.state[1];
    for (let i = 0; i < count; i++) value[i] = subtractWrapping(value[i], reference);
    for (let n = 0; n < this.constants.order; n++) {
      let sum = this.state[INTEGRATOR + n];
      for (let i = 0; i < count; i++) {
        sum = addWrapping(sum, value[i]);
        value[i] = sum;
      }
      this.state[INTEGRATOR + n] = sum;
    }
  }

  /** Keeps every ratio-th sample, with the status of all. */
  pick(block: Block): void {
    const value = block.value;
    const status = block.status;
    const temperature = block.temperature;
    const zero = block.zero;
    const count = block.count;
    const ratio = this.constants.ratio;
    const memory = this.constants.order * (ratio - 1) + 1;
    let phase = this.state[2];
    let pending = this.state[3];
    let seen = this.constants.primed === 1 ? memory : this.state[4];
    let out = 0;
    for (let i = 0; i < count; i++) {
      pending |= status[i];
      phase++;
      if (seen < memory) seen++;
      if (phase < ratio) continue;
      value[out] = value[i];
      status[out] = (pending & ~LINGERING) | (status[i] & LINGERING) | (seen < memory ? SETTLING : 0);
      temperature[out] = temperature[i];
      zero[out] = zero[i];
      out++;
      phase = 0;
      pending = 0;
    }
    block.count = out;
    this.state[2] = phase;
    this.state[3] = pending;
    this.state[4] = seen;
  }

  comb(block: Block): void {
    const value = block.value;
    const count = block.count;
    const gain = this.gain;
    const reference = this.state[1];
    for (let n = 0; n < this.constants.order; n++) {
      let before = this.state[COMB + n];
      for (let i = 0; i < count; i++) {
        const x = value[i];
        value[i] = subtractWrapping(x, before);
        before = x;
      }
      this.state[COMB + n] = before;
    }
    for (let i = 0; i < count; i++) value[i] = add(divideRound(value[i], gain), reference); // within the input's range
  }

  describe(): string {
    const c = this.constants;
    return 'decimate: order ' + c.order + ', one of ' + c.ratio + ', ' + (c.primed ? 'primed' : 'from zero') + ', delay ' +
      (c.order * (c.ratio - 1)) / 2 + ' input samples, gain 1';
  }
}

/** Growth of an integrator-comb in bits: the smallest g with 2^g >= ratio^order. */
export function growthBits(order: number, ratio: number): number {
  let gain = 1;
  for (let n = 0; n < order; n++) gain *= ratio;
  let bits = 0;
  for (let power = 1; power < gain; power *= 2) bits++;
  return bits;
}

/** Bits of a two's complement register that holds -limit .. limit. */
export function signedBits(limit: number): number {
  let bits = 1;
  for (let power = 1; power <= limit; power *= 2) bits++;
  return bits;
}

export function checkDecimate(c: DecimateConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeAny(problems);
  const sane = problems.integer('order', c.order, 1, 5, 'use an order from 1 to 5') &&
    problems.integer('ratio', c.ratio, 2, 65536, 'use two decimators in a row') &&
    problems.integer('primed', c.primed, 0, 1, 'primed 1, from zero 0');
  if (!sane) return;
  const inputBits = signedBits(c.primed === 1 ? 2 * flow.limit : flow.limit);
  const width = inputBits + growthBits(c.order, c.ratio);
  if (width > 32) {
    problems.add('ratio', c.ratio, 'input bits + growth at most 32, here ' + inputBits + ' + ' + (width - inputBits),
      'use two decimators in a row, a lower order, or fewer guard bits');
  }
  flow.ratio *= c.ratio;
}
