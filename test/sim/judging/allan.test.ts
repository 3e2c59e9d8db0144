import { describe, expect, test } from 'vitest';
import fc from 'fast-check';
import { RandomStream } from '../../../sim/hardware/random.ts';
import {
  AllanStream, allanDeviation, modifiedAllanDeviation, overlappingAllanDeviation, slopeWords,
} from '../../../sim/judging/allan.ts';

/** The 1000 points of W. J. Riley, Handbook of Frequency Stability Analysis, NIST SP 1065 (2008), section 12. */
function testSuite(): Float64Array {
  const values = new Float64Array(1000);
  let n = 1234567890;
  for (let i = 0; i < 1000; i++) {
    values[i] = n / 2147483647;
    n = (n * 16807) % 2147483647; // below 2^46: exact
  }
  return values;
}

function streamOf(values: Iterable<number>, m: number): AllanStream {
  const stream = new AllanStream(m);
  for (const value of values) stream.hear(value);
  return stream;
}

describe('the 1000-point test suite of NIST SP 1065, table 31', () => {
  const values = testSuite();
  /** averaging factor: ADEV, OADEV, MDEV, TDEV as printed, seven digits */
  const published: [number, number, number, number, number][] = [
    [1, 2.922319e-1, 2.922319e-1, 2.922319e-1, 1.687202e-1],
    [10, 9.965736e-2, 9.159953e-2, 6.172376e-2, 3.563623e-1],
    [100, 3.897804e-2, 3.241343e-2, 2.170921e-2, 1.253382],
  ];

  test('the points are those of the suite', () => {
    // mean, largest and smallest as printed in the same table
    expect(values.reduce((a, b) => a + b) / 1000).toBeCloseTo(4.897745e-1, 7);
    expect(Math.max(...values)).toBeCloseTo(9.957453e-1, 7);
    expect(Math.min(...values)).toBeCloseTo(1.371760e-3, 9);
  });

  test.each(published)('averaging factor %i: all to half a unit of the last printed digit', (m, ...printed) => {
    const [adev, oadev, mdev, tdev] = printed;
    const near = (value: number, printed: number): void => {
      const unit = 10 ** (Math.floor(Math.log10(printed)) - 6);
      expect(Math.abs(value - printed)).toBeLessThanOrEqual(0.5 * unit * 1.0001);
    };
    near(allanDeviation(values, m), adev);
    near(overlappingAllanDeviation(values, m), oadev);
    near(modifiedAllanDeviation(values, m), mdev);
    near((m * modifiedAllanDeviation(values, m)) / Math.sqrt(3), tdev);
    near(streamOf(values, m).deviation(), oadev);
  });
});

describe('closed forms (IEEE Std 952-1997, annex C)', () => {
  test('a drift of d a value gives d m / sqrt 2, whatever the level', () => {
    const units = fc.integer({ min: -(2 ** 20), max: 2 ** 20 });
    fc.assert(fc.property(fc.integer({ min: 1, max: 2000 }), units, units, (m, drift, level) => {
      const stream = new AllanStream(m);
      const tau = stream.blocks * stream.blockValues;
      for (let i = 0; i < 3 * tau; i++) stream.hear(level + drift * i);
      const expected = (Math.abs(drift) * tau) / Math.SQRT2;
      // whole numbers: sums stay below 2^53 and are exact; squares, their mean and the root round to 2^-53 each, summed
      // over at most 1 + 2 * 256 terms
      expect(Math.abs(stream.deviation() - expected)).toBeLessThanOrEqual(2 ** -53 * 600 * expected);
    }), { numRuns: 50 });
    const values = Float64Array.from({ length: 100 }, (_, i) => 7 + 0.01 * i);
    expect(allanDeviation(values, 10)).toBeCloseTo(0.07071067811865475, 12);
    expect(overlappingAllanDeviation(values, 10)).toBeCloseTo(0.07071067811865475, 12);
  });

  test('white noise of s gives s / sqrt m and a slope of -1/2', () => {
    const random = new RandomStream(5, 0, 'allan test');
    const stream = new AllanStream(500);
    for (let i = 0; i < 1_000_000; i++) stream.hear(3 + 0.2 * random.normal());
    // 2000 groups: 1 / sqrt(2 * 2000) = 1.6 %, five of them
    expect(Math.abs(stream.deviation() / (0.2 / Math.sqrt(500)) - 1)).toBeLessThan(0.08);
    expect(stream.slope()).toBeLessThan(-0.25);
    expect(slopeWords(stream.slope())).toContain('white noise');
  });

  test('a random walk of rate K gives K sqrt(tau / 3) and a slope of +1/2', () => {
    const random = new RandomStream(6, 0, 'allan test');
    const stream = new AllanStream(200);
    let walk = 0;
    for (let i = 0; i < 400_000; i++) stream.hear(walk += 0.01 * random.normal());
    // steps at whole values: tau^2 (2 tau^2 + 1) / (6 tau^3) of the step variance, 1/(2 tau^2) beside tau / 3
    // 2000 groups, neighbours of which are correlated: twice the white figure of 1.6 %, five of them
    expect(Math.abs(stream.deviation() / (0.01 * Math.sqrt(200 / 3)) - 1)).toBeLessThan(0.16);
    expect(slopeWords(stream.slope())).toContain('random walk');
  });

  test('drift and alternation are named by their slopes', () => {
    expect(slopeWords(streamOf(Float64Array.from({ length: 1000 }, (_, i) => i), 100).slope())).toContain('drift');
    expect(slopeWords(0)).toContain('flicker');
    expect(slopeWords(-1)).toContain('quantisation');
  });
});

describe('the stream', () => {
  test('is the overlapping deviation of the whole record as long as its blocks are single values', () => {
    fc.assert(fc.property(
      fc.array(fc.double({ min: -1e3, max: 1e3, noNaN: true }), { minLength: 2, maxLength: 1500 }),
      fc.integer({ min: 1, max: 256 }),
      (values, m) => {
        fc.pre(values.length >= 2 * m);
        const whole = overlappingAllanDeviation(values, m);
        // 1500 sums below 3e6, each rounded to 2^-53 of itself: 5e-7 at the worst
        expect(Math.abs(streamOf(values, m).deviation() - whole)).toBeLessThanOrEqual(5e-7);
      },
    ), { numRuns: 200 });
  });

  test('with longer blocks it is that of the block means', () => {
    const values = Float64Array.from({ length: 20_000 }, (_, i) => Math.sin(i * i));
    const stream = streamOf(values, 2000);
    const means: number[] = [];
    for (let at = 0; at + stream.blockValues <= values.length; at += stream.blockValues) {
      means.push(values.subarray(at, at + stream.blockValues).reduce((a, b) => a + b) / stream.blockValues);
    }
    expect(stream.blockValues).toBe(8);
    expect(stream.deviation()).toBeCloseTo(overlappingAllanDeviation(means, stream.blocks), 12);
  });

  test('an averaging time is met within 1/256 and memory has an end', () => {
    fc.assert(fc.property(fc.integer({ min: 1, max: 50_000_000 }), (values) => {
      const { blockValues, blocks } = new AllanStream(values);
      expect(blocks).toBeLessThanOrEqual(256);
      expect(Math.abs(blockValues * blocks - values) / values).toBeLessThanOrEqual(1 / 256);
    }));
  });

  test('a large steady level costs no digits, also after many turns of its memory', () => {
    const near = streamOf(Float64Array.from({ length: 30_000 }, (_, i) => (i * 7919) % 13), 10).deviation();
    const far = streamOf(Float64Array.from({ length: 30_000 }, (_, i) => 2 ** 30 + ((i * 7919) % 13)), 10).deviation();
    expect(far).toBe(near); // whole numbers: every sum is exact
  });

  test('a record that cannot support it is refused', () => {
    expect(() => allanDeviation([1, 2, 3], 2)).toThrow(RangeError);
    expect(() => modifiedAllanDeviation([1, 2, 3, 4], 2)).toThrow(RangeError);
    expect(() => new AllanStream(0.5)).toThrow(RangeError);
    expect(streamOf([1, 2, 3], 2).deviation()).toBeNaN();
  });
});
