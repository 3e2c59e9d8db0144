import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  checkThermometer, Thermometer, THERMOMETER_BROKEN, type ThermometerConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { targets, thermometerOracle } from './oracle/thermometer.ts';

const temperature = fc.oneof(edgy(-131072, 131072), fc.integer({ min: -20000, max: 30000 }));
const cases = fc.record({
  codes: fc.oneof(
    fc.uniqueArray(edgy(-1, 5000), { minLength: 1, maxLength: 33 }),
    fc.uniqueArray(edgy(-2147483648, 2147483647), { minLength: 1, maxLength: 6 }),
  ).map((list) => [...list].sort((a, b) => a - b)),
  temperatures: fc.array(temperature, { minLength: 33, maxLength: 33 }),
  low: fc.oneof(
    { arbitrary: fc.constantFrom(-1, 0, 1, 2), weight: 3 }, { arbitrary: edgy(-2147483648, 5000), weight: 1 },
  ),
  width: fc.oneof(fc.nat(4000), edgy(0, 2147478000)),
  shift: fc.oneof(fc.nat(6), edgy(0, 30)), holdSamples: fc.oneof(fc.nat(40), edgy(0, 2147483647)),
  fallback: temperature,
}).map((d) => ({
  constants: {
    kind: 'thermometer' as const, codes: d.codes, temperatures: d.temperatures.slice(0, d.codes.length),
    lowCode: d.low, highCode: d.low + d.width, shift: d.shift, holdSamples: d.holdSamples, fallback: d.fallback,
  },
  unit: unitOf(),
  limit: 1000,
})).filter((c) => problemsOf(checkThermometer, c.constants, c.unit, c.limit).length === 0);

describeStageLaws<ThermometerConstants>({
  name: 'thermometer',
  make: (c, unit) => new Thermometer(c, unit),
  cases,
  oracle: thermometerOracle,
  runs: 400,
  branches: ['good', 'too low', 'too high', 'held', 'hold over', 'none was good yet', 'good again', 'no low-pass',
    'still following', 'followed', 'at lowCode', 'at highCode'],
  observe(tally, c, input, output) {
    const { lowCode, highCode, holdSamples, shift } = c.constants;
    const followed = targets(c.constants, input);
    const broken = output.map(({ temperatureCode: code }) => code < lowCode || code > highCode);
    let lastGood = -1;
    output.forEach((sample, n) => {
      const code = sample.temperatureCode;
      if (!broken[n]) lastGood = n;
      tally.count('good', !broken[n]);
      tally.count('too low', code < lowCode);
      tally.count('too high', code > highCode);
      tally.count('held', broken[n] && lastGood >= 0 && n - lastGood <= holdSamples);
      tally.count('hold over', broken[n] && lastGood >= 0 && n - lastGood > holdSamples);
      tally.count('none was good yet', broken[n] && lastGood < 0);
      tally.count('good again', n > 0 && !broken[n] && broken[n - 1]);
      tally.count('no low-pass', shift === 0);
      tally.count('still following', sample.temperature !== followed[n]);
      tally.count('followed', shift > 0 && n > 0 && sample.temperature === followed[n] && followed[n] !== followed[0]);
      tally.count('at lowCode', code === lowCode);
      tally.count('at highCode', code === highCode);
    });
  },
});

const PLAIN: ThermometerConstants = {
  kind: 'thermometer', codes: [100, 200], temperatures: [0, 25600], lowCode: 50, highCode: 250, shift: 0,
  holdSamples: 0, fallback: 6400,
};

/** [temperature, broken?] of a sample for each code. */
const read = (part: Partial<ThermometerConstants>, codes: number[], lengths = [2]) =>
  feed(new Thermometer({ ...PLAIN, ...part }, unitOf()),
    codes.map((temperatureCode) => sampleOf(0, { temperatureCode })), lengths)
    .map((s) => [Number(s.temperature), s.status]);
const BROKEN = THERMOMETER_BROKEN;

describe('thermometer, by hand', () => {
  test('table: exact at the knots, rounded between, held beyond its ends', () => {
    expect(read({}, [100, 200, 101, 99, 250])).toEqual([[0, 0], [25600, 0], [256, 0], [0, 0], [25600, 0]]);
    expect(read({ codes: [100, 102], temperatures: [0, 3] }, [101])).toEqual([[2, 0]]);
    expect(read({ codes: [100, 102], temperatures: [0, -3] }, [101])).toEqual([[-1, 0]]);
  });

  test('lowCode and highCode are good, one code beyond is broken', () => {
    expect(read({}, [50, 250, 49, 251])).toEqual([[0, 0], [25600, 0], [6400, BROKEN], [6400, BROKEN]]);
  });

  test('hold: the last good target for exactly holdSamples samples, then fallback', () => {
    for (const lengths of [[1], [2], [100]]) {
      expect(read({ holdSamples: 2 }, [150, 49, 49, 49, 49], lengths))
        .toEqual([[12800, 0], [12800, BROKEN], [12800, BROKEN], [6400, BROKEN], [6400, BROKEN]]);
    }
  });

  test('each good sample starts the hold anew', () => {
    expect(read({ holdSamples: 1 }, [150, 49, 151, 49, 251]).map(([t]) => t))
      .toEqual([12800, 12800, 13056, 13056, 6400]);
  });

  test('fallback at once when none was good yet', () => {
    expect(read({ holdSamples: 100 }, [49, 49, 150])).toEqual([[6400, BROKEN], [6400, BROKEN], [12800, 0]]);
  });

  test('the first sample primes the low-pass', () => {
    expect(read({ shift: 10 }, [150, 150])).toEqual([[12800, 0], [12800, 0]]);
    expect(read({ shift: 30, temperatures: [-131072, 131072], fallback: -131072 }, [49, 49]))
      .toEqual([[-131072, BROKEN], [-131072, BROKEN]]);
  });

  test('low-pass: s = s - floor(s / 2) + target', () => {
    // s: 0, then 0 - 0 + 256 = 256, 256 - 128 + 256 = 384, 384 - 192 + 256 = 448; T = s / 2
    expect(read({ shift: 1 }, [100, 101, 101, 101]).map(([t]) => t)).toEqual([0, 128, 192, 224]);
    // downwards: from 256 * 2 = 512 to 0: 256, 128, 64
    expect(read({ shift: 1 }, [101, 100, 100, 100]).map(([t]) => t)).toEqual([256, 128, 64, 32]);
  });

  test('the low-pass follows any constant exactly, from above and from below, with no dead band', () => {
    fc.assert(fc.property(temperature, temperature, fc.integer({ min: 0, max: 8 }), (from, to, shift) => {
      const constants = { ...PLAIN, codes: [100, 101], temperatures: [from, to], shift };
      // a rest of 2^18 * 2^shift shrinks by (1 - 2^-shift) a sample: e^-n below 2^-26 after 18.1 * 2^shift, and each of
      // the last 2^shift steps moves by one at least
      const samples = Math.ceil(21 * 2 ** shift);
      const output = read(constants, [100, ...new Array<number>(samples).fill(101)], [4096]);
      expect(output[output.length - 1]).toEqual([to, 0]);
    }), { numRuns: 60 });
  });

  test('a step is half way after ln 2 of its time constant', () => {
    // after n samples (1 - 2^-8)^n is left: n = 177 gives 0.5002; floors take less than one step of 1/256 °C
    const output = read({ shift: 8 }, [100, ...new Array<number>(177).fill(200)], [64]);
    expect(Math.abs(output[177][0] - 25600 * (1 - (255 / 256) ** 177))).toBeLessThan(1);
  });

  test('values, zero and other status pass unchanged; an empty block changes nothing', () => {
    const stage = new Thermometer(PLAIN, unitOf());
    const input = [sampleOf(-7, { status: 3, temperatureCode: 150, zero: 5n, temperature: 99n })];
    expect(feed(stage, input, [0, 1])).toEqual([{ ...input[0], temperature: 12800n }]);
  });
});

describe('thermometer refuses', () => {
  test('nothing in order', () => {
    expect(problemsOf(checkThermometer, PLAIN, unitOf(), 1)).toEqual([]);
    expect(problemsOf(checkThermometer, PLAIN, unitOf(), 1, 'samples')).toEqual([]);
    expect(problemsOf(checkThermometer, PLAIN, unitOf(), 1, 'reading')).toEqual([]);
    expect(problemsOf(checkThermometer, { ...PLAIN, lowCode: 50, highCode: 50 }, unitOf(), 1)).toEqual([]);
  });
  test.each<[string, Partial<ThermometerConstants>, string]>([
    ['no knots', { codes: [], temperatures: [] }, 'temperatures'],
    ['34 knots', { codes: Array.from({ length: 34 }, (_, i) => i), temperatures: new Array(34).fill(0) },
    'temperatures'],
    ['a knot without temperature', { temperatures: [0] }, 'temperatures'],
    ['falling codes', { codes: [200, 100] }, 'temperatures.x'],
    ['over 512 °C', { temperatures: [0, 131073] }, 'temperatures.y'],
    ['under -512 °C', { temperatures: [-131073, 0] }, 'temperatures.y'],
    ['a fraction of lowCode', { lowCode: 0.5 }, 'lowCode'],
    ['lowCode below 32 bits', { lowCode: -2147483649 }, 'lowCode'],
    ['highCode below lowCode', { highCode: 49 }, 'highCode'],
    ['highCode beyond 32 bits', { highCode: 2147483648 }, 'highCode'],
    ['shift -1', { shift: -1 }, 'shift'], ['shift 31', { shift: 31 }, 'shift'],
    ['hold -1', { holdSamples: -1 }, 'holdSamples'], ['hold 2^31', { holdSamples: 2147483648 }, 'holdSamples'],
    ['fallback over 512 °C', { fallback: 131073 }, 'fallback'],
    ['fallback under -512 °C', { fallback: -131073 }, 'fallback'],
  ])('%s', (_name, part, field) => {
    expectRefusal(problemsOf(checkThermometer, { ...PLAIN, ...part }, unitOf(), 1), field);
  });
  test('codes', () => expectRefusal(problemsOf(checkThermometer, PLAIN, unitOf(), 1, 'codes'), 'order'));
});
