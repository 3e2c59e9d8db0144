/** Inrush, motor, pulse and ramp against their closed forms: values, charge and square integral. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { openCurrent } from '../../../sim/current/source.ts';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';
import { expectNear, points, pointsFrom, statistics, SUMMED } from './statistics.ts';

type Of<K extends CurrentSpec['shape']> = Extract<CurrentSpec, { shape: K }>;

describe('inrush', () => {
  const inrush = (more: Partial<Of<'inrush'>>): CurrentSpec => ({ shape: 'inrush', peak_A: 100, steady_A: 20,
    timeConstant_ms: 10, at_ms: 5, frequency_Hz: 0, ...more });

  test('nothing, the peak at switch-on, 1/e of the excess after a time constant, the steady current in the end', () => {
    const found = points(inrush({}), 1e-5, 60_000);
    expect([found[0], found[499], found[500]]).toEqual([0, 0, 100]);
    expectNear(found[1500], 20 + 80 / Math.E, 1e-15);
    expect(found[59_999]).toBe(20); // exp(-59.5) of 80 A is below half the last bit of 20
  });

  // integral of peak^2 exp(-2 t / T): the trapezoidal rule adds h^2 / 12 * 2 / T * peak^2, and terms in h^4
  test('square integral of what decays to nothing: peak^2 T / 2', () => {
    const found = points(inrush({ steady_A: 0 }), 1e-5, 40_500);
    const squares = found.reduce((sum, value) => sum + value * value, 0) - found[500] ** 2 / 2;
    // 4e4 roundings of sums up to 5e6, and h^4 / 720 * 8 / T^3 relative to h^0: 1e-14
    expectNear(squares * 1e-5 - (1e-5 ** 2 / 12) * (2 / 0.01) * 100 ** 2, 100 ** 2 * 0.01 / 2, 4e4 * 2 ** -53);
  });

  test('with mains it is the same decay on a cosine from switch-on, also far from the start', () => {
    // switched on at 1000.003 s, on no grid point; periods of 20 ms are 2000 points
    const found = pointsFrom(inrush({ at_ms: 1_000_003, frequency_Hz: 50 }), 1e-2, 100_000, 6000);
    // at 1e-2 s a point every half period, 3 ms ahead: cosines of 0.3 periods, then alternating
    const turn = Math.cos(2 * Math.PI * 0.35);
    for (let n = 1; n < 60; n++) {
      const seconds = n * 0.01 - 0.003;
      const envelope = 20 + 80 * Math.exp(-seconds / 0.01);
      // times near 1000 s are off by 2^-43 s: 3e4 A/s at most
      expect(Math.abs(found[n] - envelope * turn * (n % 2 === 1 ? 1 : -1))).toBeLessThan(3e4 * 2 ** -43 * 4);
    }
    expect(found[0]).toBe(0);
  });
});

describe('motor', () => {
  const motor = (more: Partial<Of<'motor'>>): CurrentSpec => ({ shape: 'motor', stall_A: 50, run_A: 8, runUp_ms: 200,
    electrical_ms: 1, at_ms: 10, stallAt_ms: null, ...more });

  /** Current of a permanent-magnet machine at a voltage step, constant load torque, from the roots of its equation. */
  function machine(stall: number, run: number, runUp: number, electrical: number, seconds: number): number {
    // electrical * runUp * s^2 + runUp * s + 1 = 0; i(0) = 0, di/dt(0) = stall / electrical
    const root = Math.sqrt(runUp * runUp - 4 * electrical * runUp);
    const slow = (-runUp + root) / (2 * electrical * runUp);
    const fast = (-runUp - root) / (2 * electrical * runUp);
    const b = (stall / electrical + run * slow) / (fast - slow);
    return run + (-run - b) * Math.exp(slow * seconds) + b * Math.exp(fast * seconds);
  }

  test('with the winding much faster than the rotor it is the two-pole answer of the machine', () => {
    const step = 1e-4;
    const found = points(motor({}), step, 15_000);
    for (let n = 0; n < 100; n++) expect(found[n]).toBe(0);
    // to first order in e = electrical / runUp: amplitudes off by 2 e, each exponential by e / exp(1) at its worst
    const bound = (50 * 3 * 1) / 200;
    for (let n = 100; n < 15_000; n += 7) {
      expect(Math.abs(found[n] - machine(50, 8, 0.2, 0.001, (n - 100) * step))).toBeLessThan(bound);
    }
    expect(Math.max(...found)).toBeGreaterThan(45);
    expectNear(found[14_999], 8, (42 / 8) * Math.exp(-(14_899 * step) / 0.2) * 1.01);
  });

  test('the charge above the running current is (stall - run) runUp - stall electrical', () => {
    const step = 1e-5;
    const found = points(motor({ at_ms: 0 }), step, 800_000);
    const charge = found.reduce((sum, value) => sum + (value - 8), 0) * step - (found[0] - 8) * step / 2;
    // exp(-40) is left; trapezoidal rule: h^2 / 12 * (stall / electrical - (stall - run) / runUp)
    expectNear(charge + (step ** 2 / 12) * (50 / 0.001 - 42 / 0.2), 42 * 0.2 - 50 * 0.001, 1e-9);
  });

  test('blocked, it goes on from where it was and ends at the stall current', () => {
    const found = points(motor({ stallAt_ms: 1500 }), 1e-4, 16_000);
    const before = found[14_999];
    expectNear(before, 8, 0.01); // 42 exp(-7.45) = 0.024 A above
    expect(Math.abs(found[15_000] - before)).toBeLessThan((42 / 200) * Math.exp(-7) * 0.1 * 2);
    expectNear(found[15_010], 50 - (50 - found[15_000]) / Math.E, 1e-14);
    expectNear(found[15_999], 50, 1e-15);
  });

  test('without an electrical time constant there are jumps; blocking ahead of the start is refused', () => {
    const found = points(motor({ electrical_ms: 0, stallAt_ms: 100 }), 1e-3, 200);
    expect([found[9], found[10], found[100], found[199]]).toEqual([0, 50, 50, 50]);
    expectNear(found[99], 8 + 42 * Math.exp(-89 / 200), 1e-15);
    expect(() => openCurrent(motor({ stallAt_ms: 9 }), 1e-3, '.')).toThrow(/^stallAt_ms: found 9/);
  });
});

describe('pulse and ramp', () => {
  const pulse = (more: Partial<Of<'pulse'>>): CurrentSpec =>
    ({ shape: 'pulse', base_A: 2, peak_A: 10, at_ms: 1, width_us: 500, edge_us: 200, ...more });

  test('its first edge starts at its time; width is that between the middles of the edges', () => {
    const found = points(pulse({}), 1e-4, 30);
    const expected = [...new Array(11).fill(2), 6, 10, 10, 10, 10, 6, ...new Array(13).fill(2)];
    found.forEach((value, n) => expectNear(value, expected[n], 1e-12));
  });

  test('whatever its edges, its mean is base + (peak - base) * width / duration', () => {
    const level = fc.integer({ min: -1000, max: 1000 });
    fc.assert(fc.property(level, level, fc.integer({ min: 0, max: 300 }), fc.integer({ min: 1, max: 300 }),
      fc.double({ min: 0, max: 1, noNaN: true }), (base_A, peak_A, at, width, share) => {
        const edge = 2 * Math.floor((share * width) / 2); // an even number of points: jumps count from their point on
        const spec = pulse({ base_A, peak_A, at_ms: at, width_us: width * 1e3, edge_us: edge * 1e3 });
        const { mean } = statistics(points(spec, 1e-3, 1000));
        expectNear(mean, base_A + ((peak_A - base_A) * width) / 1000, 2000 * SUMMED);
      }));
  });

  test('a ramp is an edge: straight from its start, then steady; also far from the start', () => {
    const spec: CurrentSpec = { shape: 'ramp', from_A: -5, to_A: 15, at_ms: 3_000_000, rise_ms: 2000 };
    const found = pointsFrom(spec, 1e-3, 2_999_999, 2003);
    expect([found[0], found[1], found[2001], found[2002]]).toEqual([-5, -5, 15, 15]);
    for (const n of [1, 250, 1000, 1999]) expectNear(found[1 + n], -5 + n / 100, 1e-15);
  });

  test('edges that overlap are refused by their name, edges that just meet are not', () => {
    expect(() => openCurrent(pulse({ edge_us: 501 }), 1e-5, '.')).toThrow(/^edge_us: found 501, allowed at most 500/);
    expectNear(Math.max(...points(pulse({ edge_us: 500 }), 1e-5, 300)), 10, 1e-15);
  });
});
