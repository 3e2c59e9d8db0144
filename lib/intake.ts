/**
 * Intake: raw code words to signed counts. Takes codes, gives samples at 2^guardBits counts a code.
 *
 * code = the `bits` of the word that matter (left-justified words are shifted down), as an unsigned number, or for
 * two's complement minus 2^bits when it is 2^(bits-1) or more.   y = sign * (code - midCode) * 2^guardBits
 * Exact; no state, no delay; gain 2^guardBits counts a code; bound: max |code - midCode| * 2^guardBits < 2^31.
 */
import { lowBits, multiply, shiftFloor, shiftLeft, subtract } from './arithmetic.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface IntakeConstants {
  kind: 'intake';
  bits: number;
  /** 0 offset binary, 1 two's complement. */
  signed: number;
  /** Bits below the code in its word: word bits - bits when left justified, else 0. */
  justifyShift: number;
  midCode: number;
  guardBits: number;
}

const NONE: readonly string[] = [];

export class Intake implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: IntakeConstants;
  sign: number;

  constructor(constants: IntakeConstants, unit: UnitConstants) {
    this.kind = constants.kind;
    this.fields = NONE;
    this.kept = NONE;
    this.state = new Float64Array(0);
    this.ring = new Int32Array(0);
    this.constants = constants;
    this.sign = unit.sign;
    this.reset();
  }

  reset(): void {}

  process(block: Block): void {
    const value = block.value;
    const count = block.count;
    const bits = this.constants.bits;
    const signed = this.constants.signed;
    const justifyShift = this.constants.justifyShift;
    const midCode = this.constants.midCode;
    const guardBits = this.constants.guardBits;
    const sign = this.sign;
    const half = shiftLeft(1, bits - 1);
    const full = shiftLeft(1, bits);
    for (let i = 0; i < count; i++) {
      let code = lowBits(shiftFloor(value[i], justifyShift), bits);
      if (signed === 1 && code >= half) code = subtract(code, full);
      value[i] = multiply(sign, shiftLeft(subtract(code, midCode), guardBits)); // < 2^31
    }
  }

  describe(): string {
    const c = this.constants;
    return 'intake: ' + c.bits + ' bits ' + (c.signed ? "two's complement" : 'offset binary') + ', mid code ' + c.midCode +
      ', ' + c.guardBits + ' guard bits, direction ' + this.sign + ', delay 0';
  }
}

export function checkIntake(c: IntakeConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  if (flow.domain !== 'codes') problems.add('order', flow.domain, 'codes', 'have one intake, first');
  flow.domain = 'samples';
  const sane = problems.integer('bits', c.bits, 1, 24, 'use a converter of up to 24 bits') &&
    problems.integer('signed', c.signed, 0, 1, 'offset binary 0, two\'s complement 1') &&
    problems.integer('justifyShift', c.justifyShift, 0, 32 - c.bits, 'the word has at most 32 bits') &&
    problems.integer('guardBits', c.guardBits, 0, 20, 'use fewer guard bits');
  if (!sane) return;
  const lowest = c.signed ? -shiftLeft(1, c.bits - 1) : 0;
  const highest = c.signed ? shiftLeft(1, c.bits - 1) - 1 : shiftLeft(1, c.bits) - 1;
  if (!problems.integer('midCode', c.midCode, lowest, highest, 'the code of zero current')) return;
  const reach = c.midCode - lowest > highest - c.midCode ? c.midCode - lowest : highest - c.midCode;
  flow.give(problems, shiftLeft(reach, c.guardBits), 'use fewer guard bits');
}
