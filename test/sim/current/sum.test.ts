/** Sums and scalings, and the slew of the conductor's voltage. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { openCurrent } from '../../../sim/current/source.ts';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';
import { Folder } from '../recorded/folder.ts';
import { expectNear, points, statistics, SUMMED } from './statistics.ts';

type Part = Exclude<CurrentSpec, { shape: 'sum' }>;

const sum = (parts: Part[], times = 1): CurrentSpec => ({ shape: 'sum', parts, times });
const sine = (peak_A: number, frequency_Hz: number): Part =>
  ({ shape: 'sine', peak_A, frequency_Hz, offset_A: 0, phase_deg: 0 });
const dc = (level_A: number): Part => ({ shape: 'dc', level_A });
const pwm = (high_A: number, edge_us: number, swing_V: number, low_A = 0, frequency_Hz = 1000): Part =>
  ({ shape: 'pwm', low_A, high_A, frequency_Hz, duty_percent: 25, edge_us, swing_V });

function slews(spec: CurrentSpec, stepSeconds: number, count: number): Float64Array {
  const source = openCurrent(spec, stepSeconds, '.');
  const values = new Float64Array(count);
  source.next(values, count);
  source.slew(values, count);
  source.close();
  return values;
}

describe('sum', () => {
  // sqrt(10^2 / 2 + 4^2 / 2) and sqrt(3^2 + 10^2 / 2), over whole periods of both
  test('RMS of two sines, and of a sine on a direct current', () => {
    expectNear(statistics(points(sum([sine(10, 50), sine(4, 150)]), 2e-5, 4000)).rms, 7.615773105863909, 14 * SUMMED);
    expectNear(statistics(points(sum([dc(3), sine(10, 50)]), 2e-5, 4000)).rms, 7.681145747868608, 14 * SUMMED);
  });

  test('is its parts added, times its factor', () => {
    const level = fc.integer({ min: -1000, max: 1000 });
    const part = fc.oneof(level.map(dc), fc.tuple(level, fc.integer({ min: 1, max: 5000 })).map(([a, f]) => sine(a, f)),
      level.map((high) => pwm(high, 1, 0)));
    fc.assert(fc.property(fc.array(part, { minLength: 1, maxLength: 20 }), level, (parts, times) => {
      const found = points(sum(parts, times), 1e-5, 300);
      const each = parts.map((one) => points(one, 1e-5, 300));
      // in the order of the parts every rounding is the same
      found.forEach((value, n) => expect(value).toBe(each.reduce((total, values) => total + values[n], 0) * times));
    }));
  });

  test('a recorded current can be scaled and added to, and ends the sum', () => {
    const folder = new Folder();
    folder.write('record.csv', 't,I\n0,1\n1,3\n2,-1\n');
    const record: Part = { shape: 'file', path: 'record.csv', timeColumn: '', currentColumn: '', timeUnit: 's',
      currentUnit: 'A' };
    const source = openCurrent(sum([dc(10), record], -2), 0.5, folder.path);
    const amperes = new Float64Array(6);
    source.next(amperes, 5);
    expect([...amperes.subarray(0, 5)]).toEqual([-22, -24, -26, -22, -18]);
    expect(() => source.next(amperes, 1)).toThrow('the record lasts 2 s');
    expect(source.endSeconds).toBe(2);
    source.close();
  });

  test('a part that is refused is refused in a sum', () => {
    expect(() => openCurrent(sum([dc(1), pwm(1, 251, 0)]), 1e-6, '.')).toThrow(/^edge_us/);
  });
});

describe('slew of the conductor', () => {
  const step = 1e-6;

  test('inside an edge it is swing / edge, outside it is zero', () => {
    const found = slews(pwm(10, 100, 48), step, 1000);
    const expected = (n: number): number => (n <= 49 || n >= 951 ? 48 / 1e-4 : n > 200 && n < 300 ? -48 / 1e-4 : 0);
    for (let n = 0; n < 1000; n++) {
      if ([50, 950, 200, 300].includes(n)) continue; // half of the step around a corner
      // a share of 2^-51 / 0.1 over a step of 1e-6 s
      expect(Math.abs(found[n] - expected(n))).toBeLessThan((48 * 20 * 2 ** -51) / step);
    }
  });

  test('every edge has the area of one swing, however short, wherever it lies on the grid', () => {
    const edges = fc.oneof(fc.constantFrom(0, 1e-6, 0.5, 1, 2.5), fc.double({ min: 0, max: 40, noNaN: true }));
    fc.assert(fc.property(edges, fc.integer({ min: 900, max: 5000 }), fc.integer({ min: -600, max: 600 }),
      (edge, frequency, swing) => {
        const found = slews(pwm(10, edge, swing, 0, frequency), step, 3000);
        // the first edge begins ahead of the start; from the middle of an on time the voltage is known
        let volts = 0;
        let seen = 0;
        const period = 1e6 / frequency;
        const on = Math.round(0.125 * period);
        for (let n = on; n < 3000; n++) {
          volts += found[n] * step;
          // from on to the middle of the next off time one swing down, to the next on time back up
          const place = (n - on) / period;
          const share = place - Math.floor(place);
          if (Math.abs(share - 0.5) < 0.6 / period) {
            expectNear(volts, -swing, 1e-9);
            seen |= 1;
          } else if (n > on + 1 && Math.min(share, 1 - share) < 0.6 / period) {
            expectNear(volts, 0, 1e-9);
            seen |= 2;
          }
        }
        expect(seen).toBe(3);
      }), { numRuns: 200 });
  });

  test('the voltage goes up where the current goes up', () => {
    const up = slews(pwm(10, 100, 48), step, 400);
    const down = slews(pwm(-10, 100, 48), step, 400);
    expect(up[10]).toBeGreaterThan(0);
    const turned = slews(sum([pwm(10, 100, 48)], -3), step, 400); // as a pwm of -30 A would have it
    up.forEach((value, n) => {
      expect(down[n] + value).toBe(0);
      expect(turned[n] + value).toBe(0);
    });
  });

  test('voltages of parts add up; no other shape has any', () => {
    const both = slews(sum([pwm(10, 100, 48), dc(3), pwm(2, 50, 12)]), step, 1000);
    const one = slews(pwm(10, 100, 48), step, 1000);
    const other = slews(pwm(2, 50, 12), step, 1000);
    both.forEach((value, n) => expect(value).toBe(one[n] + other[n]));
    for (const still of [dc(1), sine(1, 50), pwm(1, 1, 0), sum([dc(1), sine(1, 50)]), sum([pwm(1, 1, 5)], 0)]) {
      expect(openCurrent(still, step, '.').swings).toBe(false);
      expect(slews(still, step, 100)).toEqual(new Float64Array(100));
    }
  });
});
