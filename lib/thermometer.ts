/**
 * Thermometer: temperature code to temperature, for the trims behind it. Leaves values as they are, fills the
 * temperature lane (1/256 °C).
 *
 * target = table(code), piecewise linear, rounded; converted once a block because the code is one number a block.
 * A code outside lowCode..highCode is a broken thermometer: the last good target is held for holdSamples samples,
 * then `fallback` is used, with THERMOMETER_BROKEN on every such sample; `fallback` at once when none was good yet.
 * Low-pass:  s[n] = s[n-1] - floor(s[n-1] / 2^shift) + target,   T[n] = floor(s[n] / 2^shift)
 * which follows any constant exactly (no dead band). First sample: primed. Delay 2^shift - 1 samples at DC, gain 1.
 * Bound: |target| * 2^shift < 2^53.
 */
import { add, shiftFloor, shiftLeft, subtract } from './arithmetic.ts';
import { THERMOMETER_BROKEN } from './status.ts';
import { clearState } from './stage.ts';
import { checkTable, interpolate } from './table.ts';
import type { Block } from './block.ts';
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface ThermometerConstants {
  kind: 'thermometer';
  codes: number[];
  temperatures: number[];
  lowCode: number;
  highCode: number;
  shift: number;
  holdSamples: number;
  fallback: number;
}

const FIELDS = ['started', 'good', 'target', 'holdLeft', 'smooth'];
const NONE: readonly string[] = [];

export class Thermometer implements Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  constants: ThermometerConstants;

  constructor(constants: ThermometerConstants, _unit: UnitConstants) {
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
    const constants = this.constants;
    const status = block.status;
    const temperature = block.temperature;
    const count = block.count;
    const shift = constants.shift;
    const fallback = constants.fallback;
    const state = this.state;
    const code = block.temperatureCode;
    const broken = code < constants.lowCode || code > constants.highCode;
    if (count === 0) return;
    if (!broken) {
      state[1] = 1;
      state[2] = interpolate(constants.codes, constants.temperatures, code);
      state[3] = constants.holdSamples;
    }
    const lastGood = state[2];
    let holdLeft = state[1] === 1 ? state[3] : 0;
    let smooth = state[4];
    for (let i = 0; i < count; i++) {
      let target = lastGood;
      if (broken) {
        status[i] |= THERMOMETER_BROKEN;
        if (holdLeft > 0) holdLeft--;
        else target = fallback;
      }
      if (state[0] === 0) {
        state[0] = 1;
        smooth = shiftLeft(target, shift);
      }
      smooth = add(subtract(smooth, shiftFloor(smooth, shift)), target); // |smooth| <= (|target| + 1) * 2^shift
      temperature[i] = shiftFloor(smooth, shift);
    }
    state[3] = holdLeft;
    state[4] = smooth;
  }

  describe(): string {
    const c = this.constants;
    return 'thermometer: ' + c.codes.length + ' knots, codes ' + c.lowCode + ' to ' + c.highCode + ', low-pass over 2^' +
      c.shift + ' samples, then ' + c.fallback / 256 + ' °C after ' + c.holdSamples + ' samples without a good code';
  }
}

export function checkThermometer(c: ThermometerConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  if (flow.domain === 'codes') problems.add('order', flow.domain, 'behind intake', 'put intake first');
  if (flow.domain === 'samples') flow.domain = 'counts';
  checkTable(problems, 'temperatures', c.codes, c.temperatures, 33, -131072, 131072);
  problems.integer('lowCode', c.lowCode, -2147483648, 2147483647, 'the coldest or warmest code that is credible');
  problems.integer('highCode', c.highCode, c.lowCode, 2147483647, 'not below lowCode');
  problems.integer('shift', c.shift, 0, 30, 'use a shorter time constant or put it behind the decimator');
  problems.integer('holdSamples', c.holdSamples, 0, 2147483647, 'hold for a shorter time');
  problems.integer('fallback', c.fallback, -131072, 131072, '-512 °C to 512 °C');
  flow.temperature = true;
}
