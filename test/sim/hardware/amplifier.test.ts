import fc from 'fast-check';
import { expect, test } from 'vitest';
import { Amplifier, amplifierVolts } from '../../../sim/hardware/amplifier.ts';
import { CLIP_AMPLIFIER } from '../../../sim/hardware/clip.ts';
import { nominalUnit, type AmplifierUnit } from '../../../sim/hardware/draw.ts';
import { standProbe } from './stand.ts';

function amplifierUnit(change: Partial<AmplifierUnit> = {}): AmplifierUnit {
  return { ...nominalUnit(standProbe()).amplifier, ...change };
}

function outputs(unit: AmplifierUnit, input: Float64Array) {
  const volts = Float64Array.from(input);
  const marks = new Uint8Array(input.length);
  const amplifier = new Amplifier(unit, 1e-6);
  amplifier.process(volts, marks, input.length);
  return { volts, marks, clips: amplifier.clips };
}

test('an input at the virtual ground stays there, whatever the gain', () => {
  fc.assert(fc.property(fc.double({ min: -1e4, max: 1e4, noNaN: true }), (gain) => {
    expect(amplifierVolts(amplifierUnit({ gain }), 2.5)).toBe(2.5);
  }));
});

test('offset is amplified with the signal', () => {
  // 2.5 V + 10 * (2.6 V - 2.5 V + 3 mV)
  const input = new Float64Array(5).fill(2.6);
  expect(outputs(amplifierUnit({ gain: 10, offset_mV: 3 }), input).volts[4]).toBeCloseTo(3.53, 12);
  expect(outputs(amplifierUnit({ gain: -10, offset_mV: 3 }), input).volts[4]).toBeCloseTo(1.47, 12);
});

test('the rails clip ahead of the filter: a clipped peak leaves the filter inside the rails, but is marked', () => {
  // 5 points beyond the rail, filter of 20 kHz = 8 points time constant: it reaches less than half way
  const input = Float64Array.from({ length: 100 }, (_, n) => (n >= 50 && n < 55 ? 12 : 2.5));
  const { volts, marks, clips } = outputs(amplifierUnit(), input);
  expect(clips).toBe(5);
  const marked = [...marks].map((mark, n) => (mark === CLIP_AMPLIFIER ? n : -1)).filter((n) => n >= 0);
  expect(marked).toEqual([50, 51, 52, 53, 54]);
  expect(Math.max(...volts)).toBeLessThan(2.5 + 0.5 * 2.5);
  // and it is the clipped peak that is filtered: 2.5 V for 5 us, give or take the two edges of one step
  const area = volts.reduce((sum, v) => sum + v - 2.5, 0);
  expect(area).toBeGreaterThan(0.99 * 5 * 2.5);
  expect(area).toBeLessThan(5 * 2.5 + 1e-9);
});

test('a single supply without virtual ground cannot show negative currents', () => {
  // common practice, no source: around 0 V with a rail at 0 V, the negative half of a sine is cut off
  const unit = amplifierUnit({ virtualGround_V: 0, gain: 2, bandwidth_kHz: 1e5 });
  const input = Float64Array.from({ length: 1000 }, (_, n) => Math.sin(2 * Math.PI * n / 1000));
  const { volts, clips } = outputs(unit, input);
  expect(Math.min(...volts)).toBe(0);
  // the pole lags by 1.6e-9 s = 1.6e-3 steps, in which the sine near its peak moves 2 (2 pi/1000)^2/2 a step
  expect(Math.abs(Math.max(...volts) - 2)).toBeLessThan(1.7e-3 * (2 * Math.PI / 1000) ** 2);
  expect(clips).toBe(499);
  // with a virtual ground in the middle, nothing is lost
  const input25 = input.map((v) => v + 2.5);
  expect(outputs(amplifierUnit({ gain: 2, bandwidth_kHz: 1e5 }), input25).clips).toBe(0);
});
