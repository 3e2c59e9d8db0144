import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { TransformerUnit } from '../../../sim/hardware/draw.ts';
import { droopSeconds, saturationHz, Transformer } from '../../../sim/hardware/transformer.ts';
import { cutAt } from './frontcuts.ts';

/** 1000 turns, 10 Ω burden and 40 Ω winding, 1 H: tau = 20 ms; the pole of leakage has 0.16 ns. */
function unitOf(change: Partial<TransformerUnit> = {}): TransformerUnit {
  return {
    turns: 1000, burden_ohm: 10, winding_ohm: 40, magnetising_mH: 1000, saturation_V_ms: null,
    saturatedShare_percent: 1, bandwidth_kHz: 1e6, ...change,
  };
}

const STEP_SECONDS = 1e-4;
/** Lag of the leakage over one step, as a share of any value that decays slower than that: 0.16 ns of 0.1 ms. */
const LEAKAGE = 2e-6;

function played(unit: TransformerUnit, amperes: ArrayLike<number>, stepSeconds = STEP_SECONDS) {
  const transformer = new Transformer(unit, unit, stepSeconds);
  const volts = Float64Array.from(amperes);
  const marks = new Uint8Array(volts.length);
  transformer.process(volts, marks, volts.length);
  return { transformer, marks, readings: volts.map((value) => transformer.readingAmperes(value)) };
}

/** From 0 at point 0 to `amperes` at point 1. */
const stepTo = (amperes: number, count: number): Float64Array =>
  Float64Array.from({ length: count }, (_, n) => (n === 0 ? 0 : amperes));
const sineOf = (amperes: number, hertz: number, count: number, stepSeconds = STEP_SECONDS): Float64Array =>
  Float64Array.from({ length: count }, (_, n) => amperes * Math.sin(2 * Math.PI * hertz * stepSeconds * n));

describe('a transformer without saturation is a first-order high-pass', () => {
  test('shows nothing of a direct current that was always there', () => {
    const { readings } = played(unitOf(), new Float64Array(1000).fill(10));
    // the magnetising current is the current but for one rounding a step
    for (const reading of readings) expect(Math.abs(reading)).toBeLessThan(1e-11);
  });

  test('droops by exp(-t R/L) behind a step', () => {
    const tau = droopSeconds(unitOf());
    expect(tau).toBeCloseTo(1 / 50, 15);
    const { readings } = played(unitOf(), stepTo(10, 1001));
    const r = STEP_SECONDS / tau;
    for (let n = 1; n <= 1000; n++) {
      // the step is a ramp over one grid step: (1 - exp(-r))/r instead of 1 at its end
      const expected = 10 * (-Math.expm1(-r) / r) * Math.exp(-(n - 1) * r);
      expect(Math.abs(readings[n] - expected)).toBeLessThan(10 * LEAKAGE);
    }
  });

  const tried = [0.5, 2, 50 / (2 * Math.PI), 20, 200];
  test.each(tried)('at %s Hz its gain is w tau/sqrt(1 + (w tau)^2), its phase atan(1/(w tau))', (hertz) => {
    const perPeriod = Math.round(1 / (hertz * STEP_SECONDS));
    const exactHertz = 1 / (perPeriod * STEP_SECONDS);
    // 40 tau for the start to decay, then one whole period
    const skip = Math.ceil(0.8 / STEP_SECONDS / perPeriod) * perPeriod;
    const { readings } = played(unitOf(), sineOf(10, exactHertz, skip + perPeriod));
    let inPhase = 0;
    let quadrature = 0;
    for (let n = 0; n < perPeriod; n++) {
      inPhase += (2 / perPeriod) * readings[skip + n] * Math.sin((2 * Math.PI * n) / perPeriod);
      quadrature += (2 / perPeriod) * readings[skip + n] * Math.cos((2 * Math.PI * n) / perPeriod);
    }
    const x = 2 * Math.PI * exactHertz * 0.02;
    const gain = Math.hypot(inPhase, quadrature) / 10;
    const phase = Math.atan2(quadrature, inPhase);
    // straight lines carry sinc^2 = 1 - (pi f h)^2/3 of the sine, and images that fold back no stronger than that
    const lines = (Math.PI * exactHertz * STEP_SECONDS) ** 2 / 3 + LEAKAGE;
    expect(Math.abs(gain - x / Math.hypot(1, x))).toBeLessThan(2 * lines);
    expect(Math.abs(phase - Math.atan(1 / x))).toBeLessThan(2 * lines * Math.max(1, 1 / x));
  });

  test('in the middle of its band the burden has i/N * burden, whatever the winding has', () => {
    for (const winding_ohm of [0, 40, 500]) {
      const unit = unitOf({ winding_ohm, magnetising_mH: 1e8 });
      const transformer = new Transformer(unit, unit, STEP_SECONDS);
      const volts = stepTo(30, 2);
      transformer.process(volts, new Uint8Array(2), 2);
      // one step of 0.1 ms against tau = L/R of 185 s and more
      expect(Math.abs(volts[1] - 0.3)).toBeLessThan(0.3 * (1e-4 / 185 + LEAKAGE));
    }
  });

  test('leakage is one more pole: -3 dB and -45° at its corner', () => {
    const perPeriod = 2000;
    const unit = unitOf({ bandwidth_kHz: 1, magnetising_mH: 1e8 });
    const sine = Float64Array.from({ length: 41 * perPeriod }, (_, n) => Math.sin((2 * Math.PI * n) / perPeriod));
    const { readings } = played(unit, sine, 1 / (1000 * perPeriod));
    const at = 40 * perPeriod;
    // straight lines: (pi/2000)^2/3 = 8e-7; droop over 41 ms of 1e5/50 s: 2e-5
    expect(Math.abs(readings[at + perPeriod / 8])).toBeLessThan(3e-5);
    expect(Math.abs(readings[at + (3 * perPeriod) / 8] - Math.SQRT1_2)).toBeLessThan(3e-5);
  });
});

describe('saturation by volt-seconds', () => {
  test('without droop the core saturates when V t reaches its volt-seconds', () => {
    // 10 A in 1000 turns and 50 Ω: 0.5 V; 30 V·ms last 60 ms, and half a step more for the ramp of the step
    const unit = unitOf({ magnetising_mH: 1e7, saturation_V_ms: 30 });
    const { transformer } = played(unit, stepTo(10, 2000));
    // magnetising current meanwhile: psi/L = 30e-3/1e4 A of 10e-3 A, 0.03 %, twice as long at worst
    const seconds = transformer.pointsToSaturation! * STEP_SECONDS;
    expect(seconds).toBeGreaterThanOrEqual(0.06005);
    expect(seconds).toBeLessThan(0.06005 * 1.0004 + STEP_SECONDS);
  });

  test('with droop after -tau ln(1 - S N/(L i)), then tau falls to the stated share', () => {
    const stepSeconds = 1e-5;
    // 10 A: psi would settle at 10 mWb; S = 6 mWb
    const unit = unitOf({ saturation_V_ms: 6, saturatedShare_percent: 5 });
    const { readings, marks } = played(unit, stepTo(10, 4000), stepSeconds);
    const tau = 0.02;
    const r = stepSeconds / tau;
    // behind the ramp of one step, at t = 0, the magnetising current is 10 A * (1 - (1 - exp(-r))/r)
    const left = -Math.expm1(-r) / r;
    const crossing = stepSeconds + tau * Math.log((10 * left) / (10 - 6));
    for (let n = 1; n < 4000; n++) {
      const seconds = n * stepSeconds;
      const late = seconds - crossing;
      const expected = late < 0 ? 10 * left * Math.exp(-(n - 1) * r) : 4 * Math.exp(-late / (0.05 * tau));
      expect(marks[n] !== 0).toBe(late >= 0);
      // leakage, 0.16 ns, behind the ramp of 10 A in 10 µs at its end, then behind a decay of 4 A in 1 ms
      expect(Math.abs(readings[n] - expected)).toBeLessThan(n === 1 ? 1.6e-4 : 1e-6);
    }
  });

  test('a direct current beyond S N/L that was always there saturates it from the first point', () => {
    const unit = unitOf({ saturation_V_ms: 6 });
    for (const [amperes, saturated] of [[5.99, false], [-5.99, false], [6.01, true], [-6.01, true]] as const) {
      const { transformer, readings } = played(unit, new Float64Array(100).fill(amperes));
      expect(transformer.pointsToSaturation).toBe(saturated ? 0 : null);
      for (const reading of readings) expect(Math.abs(reading)).toBeLessThan(1e-9);
    }
  });

  test('a sine saturates it below the frequency of the closed form and not above', () => {
    const cases = fc.record({
      amperes: fc.double({ min: 7, max: 100, noNaN: true }), saturation: fc.double({ min: 2, max: 5, noNaN: true }),
    });
    fc.assert(fc.property(cases, ({ amperes, saturation }) => {
      const unit = unitOf({ saturation_V_ms: saturation });
      const limitHz = saturationHz(unit, amperes);
      for (const [share, saturates] of [[0.97, true], [1.03, false]] as const) {
        const hertz = limitHz * share;
        // at least 500 points a period; the start has left its offset behind after 0.4 s, 20 tau
        const stepSeconds = Math.min(STEP_SECONDS, 1 / (500 * hertz));
        const skip = Math.ceil(0.4 / stepSeconds);
        const count = skip + Math.ceil(1.1 / (hertz * stepSeconds));
        const { marks } = played(unit, sineOf(amperes, hertz, count, stepSeconds), stepSeconds);
        expect(marks.subarray(skip).some((mark) => mark !== 0)).toBe(saturates);
      }
    }), { numRuns: 25 });
  });

  test('never saturates by a sine whose peak times L stays within S N', () => {
    expect(saturationHz(unitOf({ saturation_V_ms: 6 }), 6)).toBe(0);
    expect(saturationHz(unitOf(), 1e6)).toBe(0);
  });

  test('agrees with the differential equation taken in small steps (Runge-Kutta of fourth order)', () => {
    const unit = unitOf({ saturation_V_ms: 6, saturatedShare_percent: 5 });
    const points = 1500;
    const amperes = Float64Array.from({ length: points }, (_, n) => 40 * Math.sin(n / 60) + 5 * Math.sin(n / 11));
    const { readings } = played(unit, amperes);
    const oracle = rungeKutta(unit, amperes, 400);
    // a kink inside a step of 0.25 µs moves the flux by at most (step)^2/2 * (slope of the slope), in currents of
    // 45 A and a tau of 1 ms: 45 * (2.5e-4)^2/2 = 1.4e-6 A; a few of them within 1 ms; leakage 45 * 0.16 ns/1 ms
    for (let n = 0; n < points; n++) expect(Math.abs(readings[n] - oracle[n])).toBeLessThan(2e-5);
  });
});

/** Readings by d psi/dt = R (i/N - im(psi)), with a current of straight lines between the points, from 0. */
function rungeKutta(unit: TransformerUnit, amperes: Float64Array, parts: number): Float64Array {
  const henries = unit.magnetising_mH * 1e-3;
  const limit = unit.saturation_V_ms! * 1e-3;
  const share = unit.saturatedShare_percent / 100;
  const ohms = unit.burden_ohm + unit.winding_ohm;
  const magnetising = (flux: number): number => {
    const beyond = Math.max(0, Math.abs(flux) - limit);
    return (Math.sign(flux) * (Math.min(Math.abs(flux), limit) + beyond / share)) / henries;
  };
  const h = STEP_SECONDS / parts;
  let flux = 0;
  return amperes.map((to, n) => {
    const from = amperes[Math.max(0, n - 1)];
    for (let part = 0; n > 0 && part < parts; part++) {
      const slope = (at: number, psi: number): number =>
        ohms * ((from + ((to - from) * (part + at)) / parts) / unit.turns - magnetising(psi));
      const k1 = slope(0, flux);
      const k2 = slope(0.5, flux + (h / 2) * k1);
      const k3 = slope(0.5, flux + (h / 2) * k2);
      const k4 = slope(1, flux + h * k3);
      flux += (h / 6) * (k1 + 2 * k2 + 2 * k3 + k4);
    }
    return to - unit.turns * magnetising(flux);
  });
}

const anyUnit = fc.record({
  turns: fc.integer({ min: 1, max: 100_000 }),
  burden_ohm: fc.constantFrom(1e-9, 1, 1e6), winding_ohm: fc.constantFrom(0, 40, 1e6),
  magnetising_mH: fc.constantFrom(1e-6, 1, 1000, 1e9), saturation_V_ms: fc.constantFrom(null, 1e-9, 0.5, 1e9),
  saturatedShare_percent: fc.constantFrom(1e-6, 1, 100), bandwidth_kHz: fc.constantFrom(1e-3, 10, 1e5),
});
const anyAmperes = fc.array(fc.oneof(fc.double({ min: -100, max: 100, noNaN: true }), fc.constantFrom(0, 1e6, -1e6)),
  { minLength: 1, maxLength: 100 });

test('stays finite and odd in the current, at the extremes of its fields', () => {
  fc.assert(fc.property(anyUnit, anyAmperes, (unit, amperes) => {
    const forward = played(unit, amperes);
    const backward = played(unit, amperes.map((value) => -value));
    expect(forward.readings.every(Number.isFinite)).toBe(true);
    expect(backward.readings.map((value) => -value + 0)).toEqual(forward.readings.map((value) => value + 0));
    expect(backward.marks).toEqual(forward.marks);
  }));
});

test('how blocks are cut changes no value', () => {
  const unit = unitOf({ saturation_V_ms: 6, bandwidth_kHz: 2 });
  const amperes = Float64Array.from({ length: 400 }, (_, n) => 40 * Math.sin(n / 20) + 10);
  const whole = cutAt(new Transformer(unit, unit, STEP_SECONDS), amperes, []);
  expect(whole.marks.some((mark) => mark !== 0)).toBe(true);
  fc.assert(fc.property(fc.array(fc.integer({ min: 1, max: 80 }), { maxLength: 20 }), (cuts) => {
    const pieces = cutAt(new Transformer(unit, unit, STEP_SECONDS), amperes, cuts);
    expect(pieces).toEqual(whole);
  }));
});
