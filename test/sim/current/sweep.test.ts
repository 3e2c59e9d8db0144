/** The sweep against its phase in exact arithmetic: ln and exp by their series in whole numbers of 2^-200. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';
import { expectNear, points, pointsFrom } from './statistics.ts';

const BITS = 200n;
const ONE = 1n << BITS;

function fixed(value: number): bigint {
  let shift = 0n;
  while (!Number.isInteger(value)) {
    value *= 2;
    shift++;
  }
  return (BigInt(value) << BITS) >> shift;
}

const times = (a: bigint, b: bigint): bigint => (a * b) >> BITS;
const over = (a: bigint, b: bigint): bigint => (a << BITS) / b;

function exponential(x: bigint): bigint {
  const part = x >> 32n; // halved 32 times, then squared as often
  let term = ONE;
  let sum = ONE;
  for (let k = 1n; k < 12n; k++) {
    term = times(term, part) / k;
    sum += term;
  }
  for (let k = 0; k < 32; k++) sum = times(sum, sum);
  return sum;
}

/** By Newton from the float64 logarithm: each pass doubles the digits. */
function logarithm(y: bigint, start: number): bigint {
  let x = fixed(start);
  for (let pass = 0; pass < 3; pass++) x += over(y, exponential(x)) - ONE;
  return x;
}

interface Sweep {
  from: number;
  to: number;
  seconds: number;
}

/** Cycles that have passed after n steps, at most `seconds` in all. */
function exactCycles({ from, to, seconds }: Sweep, n: number, step: number): bigint {
  const ratio = over(fixed(to), fixed(from));
  const growth = logarithm(ratio, Math.log(to / from));
  const passed = times(BigInt(n) * fixed(step), over(growth, fixed(seconds)));
  return times(over(times(fixed(from), fixed(seconds)), growth), exponential(passed) - ONE);
}

const spec = ({ from, to, seconds }: Sweep): CurrentSpec =>
  ({ shape: 'sweep', peak_A: 1, from_Hz: from, to_Hz: to, over_ms: seconds * 1e3, offset_A: 0 });

describe('sweep', () => {
  const hertz = fc.oneof(fc.constantFrom(1, 20, 20_000), fc.integer({ min: 1, max: 1_000_000 }));
  const places = fc.record({ from: hertz, to: hertz, eighths: fc.integer({ min: 1, max: 800 }), n: fc.nat(100_000) });

  test('its phase is the exact one up to roundings of the cycles passed', () => {
    fc.assert(fc.property(places, ({ from, to, eighths, n }) => {
      fc.pre(from !== to);
      const sweep = { from, to, seconds: eighths / 8 };
      const step = sweep.seconds / 100_000;
      const [found] = pointsFrom(spec(sweep), step, n, 1);
      const cycles = exactCycles(sweep, n, step);
      const passed = Number(cycles >> 100n) / 2 ** 100;
      const phase = Number((cycles - ((cycles >> BITS) << BITS)) >> 100n) / 2 ** 100;
      const frequency = from * (to / from) ** (n / 100_000);
      const off = 2 ** -49 * (passed + frequency * n * step) + 2 ** -51;
      expect(Math.abs(found - Math.sin(2 * Math.PI * phase))).toBeLessThan(2 * Math.PI * off);
    }), { numRuns: 60 });
  });

  // T (2^k - 1) / ln of the ratio cycles have passed after k of its octaves: zero crossings tell
  test('evenly in octaves: 3 octaves in 3 s from 100 Hz pass 100 / ln 2, 200 / ln 2 and 400 / ln 2 cycles', () => {
    const found = points(spec({ from: 100, to: 800, seconds: 3 }), 1e-5, 300_001);
    const crossings = [0, 1, 2].map((octave) => {
      let count = 0;
      for (let n = octave * 100_000 + 1; n <= (octave + 1) * 100_000; n++) {
        if (found[n - 1] < 0 !== found[n] < 0) count++;
      }
      return count;
    });
    // half a cycle apart; one more or less by where the octave begins
    crossings.forEach((count, octave) => {
      expect(Math.abs(count - (200 * 2 ** octave) / Math.LN2)).toBeLessThanOrEqual(1);
    });
  });

  test.each([[10, 1000], [1000, 10]])('from %d Hz to %d Hz, and on with the last frequency, in phase', (from, to) => {
    const step = 1e-5;
    const found = points(spec({ from, to, seconds: 1 }), step, 200_000);
    // at the end (to - from) / ln(to / from) cycles have passed
    const cycles = (to - from) / Math.log(to / from);
    for (const n of [99_999, 100_000, 100_001, 150_000, 199_999]) {
      const expected = Math.sin(2 * Math.PI * (cycles + to * (n - 100_000) * step));
      // the point before the end: its frequency is lower or higher by |ln(to / from)| * 1e-5 of it, for one step
      const sweeping = n < 100_000 ? to * step * Math.log(100) * step : 0;
      expect(Math.abs(found[n] - expected)).toBeLessThan(2 * Math.PI * (sweeping + 4000 * 2 ** -52));
    }
  });

  test('without a change of frequency it is a sine', () => {
    const sine: CurrentSpec = { shape: 'sine', peak_A: 1, frequency_Hz: 440, offset_A: 0, phase_deg: 0 };
    expect(points(spec({ from: 440, to: 440, seconds: 1 }), 1e-5, 2000)).toEqual(points(sine, 1e-5, 2000));
  });

  test('frequencies a last bit apart are as good as one', () => {
    const to = 440 * (1 + 2 ** -52);
    const found = points(spec({ from: 440, to, seconds: 1 }), 1e-5, 2000);
    // growth of 2^-52 has one last bit in every product; 8.8 cycles pass
    points(spec({ from: 440, to: 440, seconds: 1 }), 1e-5, 2000)
      .forEach((value, n) => expectNear(found[n], value, 2 * Math.PI * 20 * 2 ** -49));
  });
});
