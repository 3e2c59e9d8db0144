/** The grid: phase far from the start against exact rational arithmetic, and cuts into blocks that change nothing. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { GridPhase } from '../../../sim/current/phase.ts';
import { openCurrent } from '../../../sim/current/source.ts';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';
import { Folder } from '../recorded/folder.ts';

const folder = new Folder();

/** A float64 as it is: whole * 2^-shift. */
function exactly(value: number): { whole: bigint; shift: bigint } {
  let shift = 0n;
  while (!Number.isInteger(value)) {
    value *= 2;
    shift++;
  }
  return { whole: BigInt(value), shift };
}

/** Distance on the circle between a phase and the exact n * step * frequency modulo 1. */
function phaseError(phase: number, n: number, frequencyHz: number, stepSeconds: number): number {
  const f = exactly(frequencyHz);
  const step = exactly(stepSeconds);
  const p = exactly(phase);
  const shift = f.shift + step.shift;
  const turn = 1n << (shift + p.shift);
  const difference = ((BigInt(n) * f.whole * step.whole) << p.shift) - (p.whole << shift);
  const rest = ((difference % turn) + turn) % turn;
  const nearest = rest * 2n > turn ? turn - rest : rest;
  return Number((nearest << 80n) / turn) / 2 ** 80;
}

describe('phase', () => {
  const frequencies =
    fc.oneof(fc.constantFrom(50, 60, 1e7, 1e-3, 400 / 3), fc.double({ min: 1e-3, max: 1e7, noNaN: true }));
  const steps = fc.oneof(fc.constantFrom(1 / 1.6e6, 1 / 3e5, 1e-3), fc.double({ min: 1e-9, max: 1e-3, noNaN: true }));
  const places = fc.oneof(fc.constantFrom(0, 1, 1e9, 1e9 + 1, 2 ** 53 - 1), fc.nat(1e9), fc.maxSafeNat());

  test('is exact to 2^-51 of a period after any number of steps, within 2^51 periods', () => {
    fc.assert(fc.property(frequencies, steps, places, (frequencyHz, stepSeconds, n) => {
      fc.pre(n * stepSeconds * frequencyHz < 2 ** 51);
      const phase = new GridPhase(frequencyHz, stepSeconds).at(n);
      expect(phase >= 0 && phase < 1).toBe(true);
      // three roundings of numbers below 1 (2^-54 each, the fraction itself is exact) and of the last bits' product
      expect(phaseError(phase, n, frequencyHz, stepSeconds)).toBeLessThan(2 ** -51);
    }), { numRuns: 5000 });
  });

  test('stays below 1 where the exact phase is nearer to a whole period than float64 can say', () => {
    for (let frequencyHz = 1; frequencyHz <= 1000; frequencyHz++) {
      const phase = new GridPhase(frequencyHz, 1 / frequencyHz).at(1);
      expect(phase >= 0 && phase < 1).toBe(true);
      expect(phaseError(phase, 1, frequencyHz, 1 / frequencyHz)).toBeLessThan(2 ** -51);
    }
  });

  test('a plain product would not do: its phase is off by more than 1e-4 of a period at 2^53 - 1 steps', () => {
    const plain = ((2 ** 53 - 1) * (1 / 3e5) * 50) % 1;
    expect(phaseError(plain, 2 ** 53 - 1, 50, 1 / 3e5)).toBeGreaterThan(1e-4);
  });
});

test('jumps that fall on the grid do not jitter: every one of 100 000 periods has the same points', () => {
  fc.assert(fc.property(fc.integer({ min: 2, max: 60 }), fc.integer({ min: 1, max: 100_000 }), fc.nat(57),
    (period, frequency_Hz, on) => {
      const high = 1 + (on % (period - 1));
      const spec: CurrentSpec =
        { shape: 'pwm', low_A: 0, high_A: 1, frequency_Hz, duty_percent: (100 * high) / period, edge_us: 0,
          swing_V: 0 };
      const source = openCurrent(spec, 1 / (frequency_Hz * period), '.');
      const block = new Float64Array(period * 1000);
      const expected = Float64Array.from({ length: period * 1000 }, (_, n) => (n % period < high ? 1 : 0));
      const same = Buffer.from(expected.buffer);
      for (let thousand = 0; thousand < 100; thousand++) {
        source.next(block, block.length);
        expect(Buffer.from(block.buffer).equals(same)).toBe(true);
      }
    }), { numRuns: 10 });
});

describe('how the calls cut the grid changes no value', () => {
  folder.write('record.csv', 'ms,A\n' + Array.from({ length: 60 }, (_, i) =>
    `${(i * 0.37 + (i % 3) * 0.11).toFixed(3)},${((i * 37) % 11) - 5.3}`).join('\n'));
  const level = fc.double({ min: -1e6, max: 1e6, noNaN: true });
  const hertz = fc.double({ min: 0.1, max: 1e6, noNaN: true });
  const ms = fc.double({ min: 0, max: 15, noNaN: true });
  const longMs = fc.double({ min: 0.01, max: 25, noNaN: true });
  const shape = <const K extends CurrentSpec['shape']>(name: K): fc.Arbitrary<K> => fc.constant(name);
  type Simple = Exclude<CurrentSpec, { shape: 'sum' }>;
  const simple: fc.Arbitrary<Simple> = fc.oneof(
    fc.record({ shape: shape('dc'), level_A: level }),
    fc.record({ shape: shape('sine'), peak_A: level, offset_A: level, frequency_Hz: hertz,
      phase_deg: fc.integer({ min: -360, max: 360 }) }),
    fc.record({ shape: shape('pwm'), low_A: level, high_A: level, edge_us: fc.constantFrom(0, 1, 40),
      frequency_Hz: fc.integer({ min: 1, max: 5000 }), duty_percent: fc.integer({ min: 20, max: 80 }),
      swing_V: fc.constantFrom(0, 48, -600) }),
    fc.record({ shape: shape('step'), from_A: level, to_A: level, at_ms: ms, edge_us: fc.constantFrom(0, 1, 3333) }),
    fc.record({ shape: shape('staircase'), levels_A: fc.array(level, { minLength: 1, maxLength: 30 }),
      hold_ms: fc.double({ min: 0.4, max: 2, noNaN: true }), edge_us: fc.constantFrom(0, 1, 400) }),
    fc.constant<Simple>({ shape: 'file', path: 'record.csv', timeColumn: '', currentColumn: '', timeUnit: 's',
      currentUnit: 'A' }),
    fc.record({ shape: shape('harmonics'), peak_A: level, offset_A: level, frequency_Hz: hertz,
      percents: fc.array(fc.double({ min: -1000, max: 1000, noNaN: true }), { minLength: 2, maxLength: 9 }),
      phases_deg: fc.array(fc.integer({ min: -360, max: 360 }), { maxLength: 2 }) }),
    fc.record({ shape: shape('ripple'), mean_A: level, peakToPeak_A: fc.nat(1e6), frequency_Hz: hertz,
      duty_percent: fc.constantFrom(1, 37, 50, 99) }),
    fc.record({ shape: shape('inrush'), peak_A: level, steady_A: level, timeConstant_ms: longMs, at_ms: ms,
      frequency_Hz: fc.constantFrom(0, 50, 16.7) }),
    fc.record({ shape: shape('motor'), stall_A: level, run_A: level, runUp_ms: longMs, at_ms: ms,
      electrical_ms: fc.constantFrom(0, 0.3, 2), stallAt_ms: fc.constantFrom(null, 15, 17.123) }),
    fc.record({ shape: shape('pulse'), base_A: level, peak_A: level, at_ms: ms,
      width_us: fc.constantFrom(40, 2000, 1e6), edge_us: fc.constantFrom(0, 1, 40) }),
    fc.record({ shape: shape('ramp'), from_A: level, to_A: level, at_ms: ms, rise_ms: longMs }),
    fc.record({ shape: shape('sweep'), peak_A: level, from_Hz: hertz, to_Hz: hertz, over_ms: longMs, offset_A: level }),
    fc.record({ shape: shape('phaseCut'), peak_A: level, frequency_Hz: fc.constantFrom(50, 60, 400),
      firing_deg: fc.integer({ min: 0, max: 170 }), edge_us: fc.constantFrom(0, 1, 60) }),
  );
  const sums = fc.record({ shape: shape('sum'), parts: fc.array(simple, { minLength: 1, maxLength: 4 }),
    times: fc.constantFrom(1, -2.5, 0) });
  const specs: fc.Arbitrary<CurrentSpec> =
    fc.oneof({ weight: 3, arbitrary: simple }, { weight: 1, arbitrary: sums });
  const cuts = fc.array(fc.oneof(fc.constantFrom(0, 1, 2), fc.nat(700)), { maxLength: 40 });

  test('any cutting of 2000 points, for the current and for the slew of the conductor', () => {
    fc.assert(fc.property(specs, cuts, (spec, sizes) => {
      const whole = { amperes: new Float64Array(2000), slew: new Float64Array(2000) };
      const first = openCurrent(spec, 1e-5, folder.path);
      first.next(whole.amperes, 2000);
      first.slew(whole.slew, 2000);
      first.close();
      const source = openCurrent(spec, 1e-5, folder.path);
      const block = { amperes: new Float64Array(2000), slew: new Float64Array(2000) };
      const joined = { amperes: [] as number[], slew: [] as number[] };
      for (const size of [...sizes, 2000]) {
        const count = Math.min(size, 2000 - joined.amperes.length);
        block.amperes.fill(NaN);
        block.slew.fill(NaN);
        source.next(block.amperes, count);
        source.slew(block.slew, count);
        for (const part of ['amperes', 'slew'] as const) {
          // nothing written beyond what was asked
          expect(block[part].subarray(count).every(Number.isNaN)).toBe(true);
          joined[part].push(...block[part].subarray(0, count));
        }
      }
      source.close();
      expect(whole.amperes.every(Number.isFinite)).toBe(true);
      expect(whole.slew.some((value) => value !== 0) && !source.swings).toBe(false);
      expect(Float64Array.from(joined.amperes)).toEqual(whole.amperes);
      expect(Float64Array.from(joined.slew)).toEqual(whole.slew);
    }), { numRuns: 250 });
  });
});
