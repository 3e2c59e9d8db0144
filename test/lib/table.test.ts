/** Tables against the two-point form, the law of width, and two published thermometers. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { checkTable, interpolate, Problems } from '../../lib/index.ts';
import { edgy } from './records.ts';
import { Tally } from './tally.ts';
import { tableOracle } from './oracle/table.ts';

function problemsOfTable(xs: number[], ys: number[], most = 33, low = -131072, high = 131072): Problems['list'] {
  const problems = new Problems();
  problems.at(2, 'tested');
  checkTable(problems, 'temperatures', xs, ys, most, low, high);
  return problems.list;
}

const WORD = 2147483648;
const tables = fc.oneof(edgy(-1000, 1000), edgy(-WORD, WORD - 1)).chain((start) => fc.tuple(
  fc.array(fc.oneof(fc.constantFrom(2, 4, 6), fc.integer({ min: 1, max: 20 }), edgy(1, 100000)),
    { minLength: 0, maxLength: 32 })
    .map((steps) => steps.reduce((xs, step) => [...xs, xs[xs.length - 1] + step], [start])),
  fc.constantFrom(50, 131072, WORD - 1),
)).chain(([xs, most]) => fc.tuple(
  fc.constant(xs),
  fc.array(edgy(-most, most), { minLength: xs.length, maxLength: xs.length }),
)).filter(([xs, ys]) => problemsOfTable(xs, ys, 33, -WORD, WORD - 1).length === 0);

describe('a table', () => {
  const tally = new Tally(['below', 'above', 'at a knot', 'between', 'tie', 'one knot', 'at the last knot', 'falling']);

  test('equals the two-point form of the line through the knots around x, rounded once', () => {
    const given = tables.chain(([xs, ys]) => fc.tuple(fc.constant(xs), fc.constant(ys), fc.oneof(
      fc.constantFrom(...xs), fc.constantFrom(...xs).map((x) => x + 1), edgy(-WORD, WORD - 1),
      fc.integer({ min: xs[0], max: xs[xs.length - 1] }),
    )));
    fc.assert(fc.property(given, ([xs, ys, x]) => {
      expect(BigInt(interpolate(xs, ys, x))).toBe(tableOracle(xs, ys, BigInt(x)));
      const last = xs[xs.length - 1];
      const inner = x > xs[0] && x < last;
      tally.count('below', x < xs[0]);
      tally.count('above', x > last);
      tally.count('at a knot', xs.includes(x));
      tally.count('between', inner && !xs.includes(x));
      tally.count('one knot', xs.length === 1);
      tally.count('at the last knot', x === last);
      const i = xs.findLastIndex((knot) => knot <= x);
      if (!inner) return;
      const step = BigInt(xs[i + 1] - xs[i]);
      const rise = BigInt(ys[i + 1] - ys[i]) * BigInt(x - xs[i]);
      tally.count('tie', (2n * rise) % step === 0n && rise % step !== 0n);
      tally.count('falling', ys[i + 1] < ys[i]);
    }), { numRuns: 10000 });
    expect(tally.missing()).toEqual([]);
  });

  test('is exact at the knots, held beyond both ends, and a tie between goes up', () => {
    const at = (...xs: number[]) => xs.map((x) => interpolate([-4, 0, 2], [8, 0, -3], x));
    expect(at(-4, 0, 2)).toEqual([8, 0, -3]);
    expect(at(-5, -2147483648, 3, 2147483647)).toEqual([8, 8, -3, -3]);
    expect(at(-3)).toEqual([6]);
    expect(at(1).map((y) => y + 0)).toEqual([-1]); // -3/2
    expect(interpolate([7], [5], -100)).toBe(5);
    expect(interpolate([0, 2], [0, 3], 1)).toBe(2); // 3/2
  });
});

describe('a table is refused', () => {
  test.each<[string, number[], number[], string]>([
    ['without knots', [], [], 'temperatures'],
    ['with more knots than it may have', Array.from({ length: 34 }, (_, i) => i), new Array(34).fill(0),
    'temperatures'],
    ['with x and y of different number', [0, 1], [0], 'temperatures'],
    ['with two knots at one x', [0, 0], [0, 1], 'temperatures.x'],
    ['with falling x', [1, 0], [0, 1], 'temperatures.x'],
    ['with x beyond 32 bits', [0, 2147483648], [0, 1], 'temperatures.x'],
    ['with x below 32 bits', [-2147483649, 0], [0, 1], 'temperatures.x'],
    ['with half an x', [0, 0.5], [0, 1], 'temperatures.x'],
    ['with y above its range', [0, 1], [0, 131073], 'temperatures.y'],
    ['with y below its range', [0, 1], [-131073, 0], 'temperatures.y'],
    ['with half a y', [0, 1], [0, 0.5], 'temperatures.y'],
  ])('%s', (_name, xs, ys, field) => {
    const list = problemsOfTable(xs, ys);
    expect(list).toMatchObject([{ stage: 2, kind: 'tested', field }]);
    expect(list[0].allowed.length > 0 && list[0].remedy.length > 0).toBe(true);
  });

  test('when a rise times its step, plus that step for the rounding, reaches 2^53, and not one below', () => {
    // 2^31 * (2^22 - 1) + 2^31 = 2^53
    expect(problemsOfTable([-1073741824, 1073741824], [0, 4194303], 33, 0, 4194304))
      .toMatchObject([{ field: 'temperatures', remedy: 'set knots closer' }]);
    expect(problemsOfTable([-1073741824, 1073741824], [4194303, 0], 33, 0, 4194304)).toHaveLength(1);
    expect(problemsOfTable([-1073741824, 1073741824], [0, 4194302], 33, 0, 4194304)).toEqual([]);
    expect(problemsOfTable(Array.from({ length: 33 }, (_, i) => i), new Array(33).fill(0))).toEqual([]);
  });
});

/** Largest error in °C of a table of 1/256 °C over codes: a chord's h^2/8 |T''|, and the rounding on the way. */
function tableError(step: number, curvature: number, slope: number): number {
  // half a step each for the knot and the point between, and half a code at the slope
  return step * step / 8 * curvature + 2 * (0.5 / 256) + 0.5 * slope;
}

function tableOf(from: number, to: number, knots: number, celsius: (code: number) => number): [number[], number[]] {
  const step = (to - from) / (knots - 1);
  const codes = Array.from({ length: knots }, (_, i) => Math.round(from + i * step));
  return [codes, codes.map((code) => Math.round(256 * celsius(code)))];
}

describe('tables of published thermometers', () => {
  // IEC 60751:2008, Pt100 from 0 °C up: R = 100 (1 + A t + B t^2), and its table, ohms to 0.01
  const A = 3.9083e-3;
  const B = -5.775e-7;
  const POINTS = [[0, 100], [1, 100.39], [10, 103.9], [50, 119.4], [100, 138.51], [150, 157.33]];
  const PER_OHM = 256; // codes

  test.each(POINTS)('Pt100 at %d °C, %d ohm', (celsius, ohms) => {
    const inverse = (code: number) => (-A + Math.sqrt(A * A - 4 * B * (1 - code / PER_OHM / 100))) / (2 * B);
    const [codes, temperatures] = tableOf(100 * PER_OHM, 160 * PER_OHM, 17, inverse);
    expect(problemsOfTable(codes, temperatures)).toEqual([]);
    const read = interpolate(codes, temperatures, Math.round(ohms * PER_OHM)) / 256;
    // dT/dR = 1 / (100 (A + 2 B t)), d2T/dR2 = -2 B / (100^2 (A + 2 B t)^3): both largest at the top, below 160 °C
    const bend = A + 2 * B * 160;
    const slope = 1 / (100 * bend) / PER_OHM;
    const curvature = -2 * B / (100 ** 2 * bend ** 3) / PER_OHM ** 2;
    // the published ohms are rounded to 0.01
    const tolerance = tableError(60 * PER_OHM / 16, curvature, slope) + 0.005 * PER_OHM * slope;
    expect(tolerance).toBeLessThan(0.05);
    expect(Math.abs(read - celsius)).toBeLessThanOrEqual(tolerance);
  });

  // measured table of a common 10 kohm thermistor and the Steinhart-Hart coefficients through 0, 25 and 50 °C
  const MEASURED = [[0, 32128], [10, 19549], [20, 12262], [25, 9814], [30, 7908], [50, 3542]];

  test.each(MEASURED)('thermistor at %d °C, %d ohm, in a divider with 10 kohm, in codes of 16 bits', (c, ohms) => {
    const FULL = 65536;
    const celsius = (code: number) => {
      const log = Math.log(10000 * code / (FULL - code));
      return 1 / (1.10415912e-3 + 2.38917947e-4 * log + 6.93162653e-8 * log ** 3) - 273.15;
    };
    const [low, high] = [14000, 52000]; // 2716 to 38404 ohm
    const [codes, temperatures] = tableOf(low, high, 33, celsius);
    // slope and curvature of the formula by central differences over every 50th code; 1 % for what lies between
    let slope = 0;
    let curvature = 0;
    for (let code = low; code <= high; code += 50) {
      slope = Math.max(slope, Math.abs(celsius(code + 25) - celsius(code - 25)) / 50);
      curvature = Math.max(curvature, Math.abs(celsius(code + 25) - 2 * celsius(code) + celsius(code - 25)) / 625);
    }
    const read = interpolate(codes, temperatures, Math.round(FULL * ohms / (ohms + 10000))) / 256;
    // 1: a knot's code is rounded, so steps differ by one; 0.0025 K: the published residual of the fit, rounded
    const tolerance = tableError((high - low) / 32 + 1, 1.01 * curvature, 1.01 * slope) + 0.0025;
    expect(tolerance).toBeLessThan(0.1);
    expect(Math.abs(read - c)).toBeLessThanOrEqual(tolerance);
  });
});
