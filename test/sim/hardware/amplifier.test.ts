import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Amplifier, amplifierVolts } from '../../../sim/hardware/amplifier.ts';
import { CLIP_AMPLIFIER } from '../../../sim/hardware/clip.ts';
import type { AmplifierUnit } from '../../../sim/hardware/draw.ts';
import { amplifierUnit, AT_HOME } from './parts.ts';

/** The corner that the filter has when it must not show: it lags by 1.6e-9 s. */
const NO_FILTER = 1e5;

function outputs(unit: AmplifierUnit, input: ArrayLike<number>, stepSeconds = 1e-6, surroundings = AT_HOME) {
  const volts = Float64Array.from(input);
  const marks = new Uint8Array(input.length);
  const amplifier = new Amplifier(unit, stepSeconds);
  amplifier.surround(surroundings);
  amplifier.process(volts, marks, input.length);
  return { volts, marks, clips: amplifier.clips };
}

function marked(marks: Uint8Array): number[] {
  return [...marks.keys()].filter((n) => marks[n] === CLIP_AMPLIFIER);
}

test('an input at the virtual ground stays there, whatever the gain', () => {
  fc.assert(fc.property(fc.double({ min: -1e4, max: 1e4, noNaN: true }), (gain) => {
    expect(amplifierVolts(amplifierUnit({ gain }), 2.5)).toBe(2.5);
  }));
});

test('offset and its drift from 25 °C are amplified with the signal', () => {
  // 2.5 V + 10 * (2.6 V - 2.5 V + 3 mV)
  const input = new Float64Array(5).fill(2.6);
  expect(outputs(amplifierUnit({ gain: 10, offset_mV: 3 }), input).volts[4]).toBeCloseTo(3.53, 12);
  expect(outputs(amplifierUnit({ gain: -10, offset_mV: 3 }), input).volts[4]).toBeCloseTo(1.47, 12);
  // 40 K * 20 uV/K * 10 = 8 mV
  const warm = { ...AT_HOME, amplifierCelsius: 65 };
  const drifting = amplifierUnit({ gain: 10, offset_mV: 3, offsetDrift_uV_per_K: 20 });
  expect(outputs(drifting, input, 1e-6, warm).volts[4]).toBeCloseTo(3.538, 12);
});

describe('rails', () => {
  test('clip ahead of the filter: a clipped peak leaves the filter inside the rails, but is marked', () => {
    // 5 points beyond the rail, filter of 20 kHz = 8 points time constant: it reaches less than half way
    const input = Float64Array.from({ length: 100 }, (_, n) => (n >= 50 && n < 55 ? 12 : 2.5));
    for (const filterOrder of [1, 2, 3, 4]) {
      const { volts, marks, clips } = outputs(amplifierUnit({ filterOrder }), input);
      expect(Math.max(...volts)).toBeLessThan(4);
      expect(marked(marks)).toEqual([50, 51, 52, 53, 54]);
      expect(clips).toBe(5);
    }
  });

  test('an output exactly at the rail is not clipped', () => {
    // 2.5 V + 2 * 1.25 V
    expect(outputs(amplifierUnit({ gain: 2 }), new Float64Array(5).fill(3.75)).clips).toBe(0);
    expect(outputs(amplifierUnit({ gain: 2, recovery_us: 5 }), new Float64Array(5).fill(3.75)).clips).toBe(0);
  });

  test('scale with the supply', () => {
    const low = { ...AT_HOME, supplyRatio: 0.9 };
    const { volts } = outputs(amplifierUnit({ gain: 2 }), new Float64Array(5).fill(4), 1e-6, low);
    expect(volts[4]).toBe(4.5);
  });

  test('an amplifier without virtual ground cannot show negative currents', () => {
    // common practice, no source: around 0 V with a rail at 0 V, the negative half of a sine is cut off
    const unit = amplifierUnit({ virtualGround_V: 0, gain: 2, bandwidth_kHz: NO_FILTER });
    const input = Float64Array.from({ length: 1000 }, (_, n) => Math.sin(2 * Math.PI * n / 1000));
    const { volts, clips } = outputs(unit, input);
    expect(Math.min(...volts)).toBe(0);
    // the pole lags by 1.6e-9 s = 1.6e-3 steps, in which the sine near its peak moves 2 (2 pi/1000)^2/2 a step
    expect(Math.abs(Math.max(...volts) - 2)).toBeLessThan(1.7e-3 * (2 * Math.PI / 1000) ** 2);
    expect(clips).toBe(499);
    // with a virtual ground in the middle, nothing is lost
    const input25 = input.map((v) => v + 2.5);
    expect(outputs(amplifierUnit({ gain: 2, bandwidth_kHz: NO_FILTER }), input25).clips).toBe(0);
  });
});

describe('gain-bandwidth', () => {
  test('is a pole at product over gain: a step is 1 - 1/e behind after 1/(2 pi f)', () => {
    // 1 MHz at gain -10: 100 kHz, tau = 1.5915 us = 100 steps
    const tau = 1 / (2 * Math.PI * 1e5);
    const unit = amplifierUnit({ gain: -10, gainBandwidth_MHz: 1, bandwidth_kHz: 1e5 });
    const input = Float64Array.from({ length: 400 }, (_, n) => (n >= 1 ? 2.6 : 2.5));
    const { volts } = outputs(unit, input, tau / 100);
    // the step is a ramp of one grid step, so its middle is at 0.5; the filter delays by 1.6e-9 s = 0.1 step
    for (const n of [101, 201, 301]) {
      const lag = (n - 0.5 - 0.1) / 100;
      expect(Math.abs(volts[n] - (1.5 + Math.exp(-lag)))).toBeLessThan(2e-5);
    }
  });

  test('a gain below one has the bandwidth of gain one', () => {
    const tau = 1 / (2 * Math.PI * 1e5);
    const unit = amplifierUnit({ gain: 0.01, gainBandwidth_MHz: 0.1, bandwidth_kHz: 1e5 });
    const input = Float64Array.from({ length: 102 }, (_, n) => (n >= 1 ? 102.5 : 2.5));
    // 1/e, half a step and 0.1 of a step later
    const { volts } = outputs(unit, input, tau / 100);
    expect(Math.abs(volts[101] - (3.5 - Math.exp(-1.004)))).toBeLessThan(2e-5);
  });
});

describe('slew limit', () => {
  const unit = (change: Partial<AmplifierUnit> = {}) =>
    amplifierUnit({
      gain: 1, slew_V_per_us: 0.1, bandwidth_kHz: NO_FILTER, railLow_V: -100, railHigh_V: 100, ...change,
    });

  test('a step of 2 V at 0.1 V/us takes 20 us; each point on the way is marked', () => {
    const input = Float64Array.from({ length: 60 }, (_, n) => (n >= 10 ? 4.5 : 2.5));
    const { volts, marks } = outputs(unit(), input);
    // the filter delays the ramp by 1.6e-3 us
    for (let n = 10; n <= 28; n++) expect(Math.abs(volts[n] - (2.5 + 0.1 * (n - 9)))).toBeLessThan(2e-4);
    expect(volts[31]).toBeCloseTo(4.5, 9);
    // 20 steps of 0.1 V: the last arrives exactly
    expect(marked(marks).slice(0, 19)).toEqual(Array.from({ length: 19 }, (_, i) => 10 + i));
    expect(marked(marks).length).toBeLessThanOrEqual(20);
  });

  test('a sine beyond the full-power frequency slew/(2 pi A) becomes a triangle of slew * T/4', () => {
    // common textbook fact: 1 V at 100 kHz would need 0.63 V/us; the triangle has the amplitude 0.1 * 10/4 = 0.25 V
    const input = Float64Array.from({ length: 4000 }, (_, n) => Math.sin((2 * Math.PI * n) / 200));
    const { volts } = outputs(unit({ virtualGround_V: 0 }), input, 0.05e-6);
    // a corner falls between two points of 0.005 V
    expect(Math.abs(Math.max(...volts.subarray(2000)) - 0.25)).toBeLessThan(0.005);
    expect(Math.abs(Math.min(...volts.subarray(2000)) + 0.25)).toBeLessThan(0.005);
  });

  test('below the full-power frequency nothing is marked and nothing changes', () => {
    const input = Float64Array.from({ length: 1000 }, (_, n) => 2.5 + Math.sin((2 * Math.PI * n) / 100));
    // 2 pi 10 kHz * 1 V = 0.063 V/us
    const { volts, clips } = outputs(unit(), input);
    expect(clips).toBe(0);
    expect([...volts]).toEqual([...outputs(unit({ slew_V_per_us: null }), input).volts]);
  });

  test('with a gain-bandwidth a large step ramps until slew * tau is left, then decays', () => {
    // 100 kHz: tau = 1.5915 us; 0.1 V/us * tau = 0.15915 V: the ramp of 2 V ends after (2 - 0.15915)/0.1 = 18.4085 us
    const tau = 1 / (2 * Math.PI * 0.1);
    const input = Float64Array.from({ length: 60 }, (_, n) => (n >= 11 ? 4.5 : 2.5));
    const { volts, marks } = outputs(unit({ gainBandwidth_MHz: 0.1 }), input);
    // the input is a ramp from point 10 to 11: slewing begins when it leads by slew * tau
    const lead = (t: number) => 2 * (t - tau * (1 - Math.exp(-t / tau)));
    let begin = 0;
    for (let step = 0.5; step > 1e-15; step /= 2) {
      if (2 * (begin + step) - lead(begin + step) < 0.1 * tau) begin += step;
    }
    const ramp = (n: number) => 2.5 + lead(begin) + 0.1 * (n - 10 - begin);
    const end = 10 + begin + (4.5 - 0.1 * tau - (2.5 + lead(begin))) / 0.1;
    // what the filter of 1.6e-3 us takes from a slope of 0.1 V/us
    const allowed = 1.7e-4;
    for (let n = 11; n < end; n++) expect(Math.abs(volts[n] - ramp(n))).toBeLessThan(allowed);
    for (let n = Math.ceil(end); n < 60; n++) {
      expect(Math.abs(volts[n] - (4.5 - 0.1 * tau * Math.exp(-(n - end) / tau)))).toBeLessThan(allowed);
    }
    expect(marked(marks)).toEqual(Array.from({ length: Math.ceil(end) - 10 }, (_, i) => 11 + i));
  });

  test('agrees with a fine integration of dy/dt = clamp((x - y)/tau, slew) on any straight lines', () => {
    const numbers = fc.array(fc.double({ min: -3, max: 3, noNaN: true }), { minLength: 2, maxLength: 12 });
    fc.assert(fc.property(numbers, fc.constantFrom(0.02, 0.1, 1, 5), (given, gainBandwidth_MHz) => {
      const stage = unit({ gainBandwidth_MHz, slew_V_per_us: 1, virtualGround_V: 0, bandwidth_kHz: 1e8 });
      const { volts } = outputs(stage, given);
      const tau = 1 / (2 * Math.PI * gainBandwidth_MHz);
      const parts = 4000;
      let y = given[0];
      for (let i = 1; i < given.length; i++) {
        for (let part = 0; part < parts; part++) {
          const x = given[i - 1] + ((given[i] - given[i - 1]) * (part + 0.5)) / parts;
          const halfway = y + (0.5 / parts) * Math.max(-1, Math.min(1, (x - y) / tau));
          y += (1 / parts) * Math.max(-1, Math.min(1, (x - halfway) / tau));
        }
        // second order: (h/tau)^2 of a signal below 6 V, and (h/tau) h where it meets the limit; tau > 0.03 us
        expect(Math.abs(volts[i] - y)).toBeLessThan(6 * (1 / parts / tau) ** 2 + 1e-4);
      }
    }), { numRuns: 60 });
  });
});

describe('recovery', () => {
  test.each([0, 7])('after an overload the output stays %s us more at the rail, and is marked', (recovery_us) => {
    const unit = amplifierUnit({ gain: 1, recovery_us, slew_V_per_us: 1000, bandwidth_kHz: NO_FILTER });
    const input = Float64Array.from({ length: 60 }, (_, n) => (n >= 10 && n < 20 ? 7 : 2.5));
    const { volts, marks } = outputs(unit, input);
    const expected = Array.from({ length: 60 }, (_, n) => (n >= 10 && n < 20 + recovery_us ? 5 : 2.5));
    // a step through the filter of 1.6e-3 us: 1.6e-3 of it is left at the end of a ramp of 1 us
    for (let n = 0; n < 60; n++) expect(Math.abs(volts[n] - expected[n])).toBeLessThan(2.5 * 1.7e-3);
    expect(marked(marks)).toEqual(Array.from({ length: 10 + recovery_us }, (_, i) => 10 + i));
  });

  test('at the low rail too; an overload during recovery begins it anew', () => {
    const unit = amplifierUnit({ gain: 1, recovery_us: 6, bandwidth_kHz: NO_FILTER });
    const input = Float64Array.from({ length: 40 }, (_, n) => (n === 5 || n === 9 ? -1 : 2.5));
    expect(marked(outputs(unit, input).marks)).toEqual([5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15]);
  });
});

test('how the input is cut changes nothing, with every limit on', () => {
  const numbers = fc.array(fc.double({ min: -10, max: 10, noNaN: true }), { minLength: 1, maxLength: 40 });
  fc.assert(fc.property(numbers, fc.nat(40), fc.integer({ min: 1, max: 4 }), (given, cut, filterOrder) => {
    const unit = amplifierUnit({ gainBandwidth_MHz: 0.3, slew_V_per_us: 2, recovery_us: 3, filterOrder });
    const whole = outputs(unit, given);
    const parts = Float64Array.from(given);
    const marks = new Uint8Array(given.length);
    const amplifier = new Amplifier(unit, 1e-6);
    amplifier.surround(AT_HOME);
    const first = Math.min(cut, given.length);
    amplifier.process(parts.subarray(0, first), marks.subarray(0, first), first);
    amplifier.process(parts.subarray(first), marks.subarray(first), given.length - first);
    expect([...parts]).toEqual([...whole.volts]);
    expect([...marks]).toEqual([...whole.marks]);
  }));
});

describe('facts of the trade (common practice, no source): a front end of first order near 1 kHz', () => {
  test.each([[250, 0.99, 1], [3000, 0, 0.5]])('shows %s Hz PWM between %s and %s of it', (hertz, least, most) => {
    const points = 1000;
    const input = Float64Array.from({ length: 20 * points }, (_, n) => (n % points < points / 2 ? 3 : 2));
    const { volts } = outputs(amplifierUnit({ gain: 1, bandwidth_kHz: 1 }), input, 1 / (hertz * points));
    const settled = volts.subarray(19 * points);
    const height = Math.max(...settled) - Math.min(...settled);
    expect(height).toBeGreaterThan(least);
    expect(height).toBeLessThan(most);
    // a square wave through one pole swings tanh(T/(4 tau)) of its height; edges of a thousandth of the period cost
    // less than that thousandth of 2 pi f/fc
    expect(Math.abs(height - Math.tanh((2 * Math.PI * 1000) / (4 * hertz)))).toBeLessThan(0.01);
  });
});
