import fc from 'fast-check';
import { expect, test } from 'vitest';
import { Coupling } from '../../../sim/hardware/coupling.ts';
import { couplingUnit } from './parts.ts';

const STEP_SECONDS = 1e-7;

test('a ramp of the field induces area times its slope (Faraday)', () => {
  // 3 mm^2 * 20 T/s = 60 uV
  const tesla = Float64Array.from({ length: 50 }, (_, n) => 20 * n * STEP_SECONDS);
  const volts = new Float64Array(50).fill(2.5);
  new Coupling(couplingUnit({ loop_mm2: 3 }), STEP_SECONDS).add(volts, tesla, null, 50);
  expect(volts[0]).toBe(2.5);
  for (const v of volts.subarray(1)) expect(v - 2.5).toBeCloseTo(60e-6, 14);
});

test('volt-seconds of a spike are area times the change of field, however the field gets there', () => {
  const fields = fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: 2, maxLength: 60 });
  fc.assert(fc.property(fields, fc.double({ min: -1000, max: 1000, noNaN: true }), (field, loop_mm2) => {
    const volts = new Float64Array(field.length);
    const tesla = Float64Array.from(field);
    new Coupling(couplingUnit({ loop_mm2 }), STEP_SECONDS).add(volts, tesla, null, field.length);
    const voltSeconds = volts.reduce((sum, v) => sum + v * STEP_SECONDS, 0);
    const flux = loop_mm2 * 1e-6 * (field[field.length - 1] - field[0]);
    // 60 sums of at most 2e-3 Vs, each rounded
    expect(Math.abs(voltSeconds - flux)).toBeLessThan(60 * 2e-3 * 2 ** -52);
  }));
});

test('a conductor that changes by 10 V/ns gives ten times the voltage of one volt a nanosecond', () => {
  const volts = new Float64Array(3);
  new Coupling(couplingUnit({ slew_mV_per_V_per_ns: -2 }), STEP_SECONDS)
    .add(volts, new Float64Array(3), Float64Array.of(0, 1e10, -5e8), 3);
  expect(volts[0]).toBeCloseTo(0, 15);
  expect(volts[1]).toBeCloseTo(-20e-3, 15);
  expect(volts[2]).toBeCloseTo(1e-3, 15);
});

test('how the input is cut changes nothing', () => {
  const numbers = fc.array(fc.double({ min: -1, max: 1, noNaN: true }), { minLength: 1, maxLength: 30 });
  fc.assert(fc.property(numbers, fc.nat(30), (field, cut) => {
    const unit = couplingUnit({ loop_mm2: 5, slew_mV_per_V_per_ns: 1 });
    const tesla = Float64Array.from(field);
    const slew = tesla.map((x) => 1e9 * x);
    const whole = new Float64Array(field.length);
    new Coupling(unit, STEP_SECONDS).add(whole, tesla, slew, field.length);
    const parts = new Float64Array(field.length);
    const coupling = new Coupling(unit, STEP_SECONDS);
    for (const [from, to] of [[0, Math.min(cut, field.length)], [Math.min(cut, field.length), field.length]]) {
      coupling.add(parts.subarray(from, to), tesla.subarray(from, to), slew.subarray(from, to), to - from);
    }
    expect([...parts]).toEqual([...whole]);
  }));
});
