import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  checkDecimate, Decimate, EVENT_ZERO, Flow, growthBits, OVER_RANGE, Problems, RAILED, SETTLING, signedBits, STUCK,
  TRACKING, type DecimateConstants,
} from '../../lib/index.ts';
import { expectSamples, feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { boxcars, decimateOracle } from './oracle/decimate.ts';

/** Largest magnitude that 32 bits of register leave room for, at most `wanted`. */
function widest(order: number, ratio: number, primed: number): number {
  const bits = 32 - growthBits(order, ratio) - (primed === 1 ? 1 : 0);
  return 2 ** (bits - 1) - 1;
}

const cases = fc.record({
  kind: fc.constant<'decimate'>('decimate'), order: fc.integer({ min: 1, max: 5 }),
  ratio: fc.oneof(fc.integer({ min: 2, max: 5 }), fc.integer({ min: 6, max: 40 }), edgy(2, 65536),
    fc.integer({ min: 41, max: 1000 })),
  primed: fc.constantFrom(0, 1),
}).filter((c) => widest(c.order, c.ratio, c.primed) >= 1).chain((constants) => {
  const most = widest(constants.order, constants.ratio, constants.primed);
  return fc.record({
    constants: fc.constant(constants), unit: fc.constant(unitOf()), limit: fc.oneof(fc.constant(most), edgy(1, most)),
  });
}).filter((c) => problemsOf(checkDecimate, c.constants, c.unit, c.limit).length === 0);

/** true when the first integrator, were it not to wrap, would have left 32 bits by sample n. */
function wraps(values: bigint[], reference: bigint): boolean[] {
  let sum = 0n;
  return values.map((value) => {
    sum += value - reference;
    return BigInt.asIntN(32, sum) !== sum;
  });
}

describeStageLaws<DecimateConstants>({
  name: 'decimate',
  make: (c, unit) => new Decimate(c, unit),
  cases,
  oracle: decimateOracle,
  runs: 300,
  branches: ['primed', 'settling of its own', 'settled from zero', 'event of an earlier input', 'over range stays',
    'rail is over', 'first integrator wrapped', 'nothing out',
    ...[1, 2, 3, 4, 5].map((order) => `order ${order}`)],
  observe(tally, c, input, output) {
    const { order, ratio, primed } = c.constants;
    const memory = order * (ratio - 1) + 1;
    const wrapped = wraps(input.map((sample) => sample.value), primed === 1 ? input[0].value : 0n);
    tally.count('nothing out', output.length === 0);
    output.forEach(({ status }, k) => {
      const n = (k + 1) * ratio - 1;
      tally.count(`order ${order}`);
      tally.count('primed', primed === 1);
      tally.count('settling of its own', primed === 0 && n + 1 < memory);
      tally.count('settled from zero', primed === 0 && n + 1 >= memory);
      tally.count('event of an earlier input', (status & ~input[n].status & EVENT_ZERO) !== 0);
      tally.count('over range stays', (status & ~input[n].status & OVER_RANGE) !== 0);
      tally.count('rail is over', k > 0 && (output[k - 1].status & RAILED) !== 0 && (status & RAILED) === 0);
      tally.count('first integrator wrapped', wrapped[n]);
    });
  },
});

const PLAIN: DecimateConstants = { kind: 'decimate', order: 2, ratio: 4, primed: 1 };
const decimated = (part: Partial<DecimateConstants>, values: number[], status: number[] = [], lengths = [3]) =>
  feed(new Decimate({ ...PLAIN, ...part }, unitOf()), values.map((v, n) => sampleOf(v, { status: status[n] ?? 0 })),
    lengths);

/** The impulse response, from impulses at every phase of the output; an impulse of ratio^order comes out exact. */
function impulseResponse(order: number, ratio: number): number[] {
  const response: number[] = [];
  for (let phase = 0; phase < ratio; phase++) {
    const values = new Array<number>((order + 1) * ratio).fill(0);
    values[phase] = ratio ** order;
    decimated({ order, ratio, primed: 0 }, values).forEach((sample, k) => {
      response[(k + 1) * ratio - 1 - phase] = Number(sample.value);
    });
  }
  return response.slice(0, order * (ratio - 1) + 1);
}

describe('decimate, by hand', () => {
  test('impulse responses of published orders: 1 2 3 4 3 2 1 and 1 3 6 10 12 12 10 6 3 1', () => {
    expect(impulseResponse(2, 4)).toEqual([1, 2, 3, 4, 3, 2, 1]);
    expect(impulseResponse(3, 4)).toEqual([1, 3, 6, 10, 12, 12, 10, 6, 3, 1]);
    expect(boxcars(3, 4).map(Number)).toEqual([1, 3, 6, 10, 12, 12, 10, 6, 3, 1]);
  });

  // droop in dB against frequency over the output rate: 20 log10 |sin(pi f) / (R sin(pi f / R))|^N, from the formula of
  // E. B. Hogenauer, IEEE Trans. ASSP-29 no. 2, 1981, computed apart from this project
  test.each([
    [3, 8, 0.05, -0.105571777181], [3, 8, 0.125, -0.662748030937], [3, 8, 0.25, -2.694420753217],
    [3, 8, 0.5, -11.599542754], [3, 8, 0.875, -50.864295438], [3, 64, 0.1, -0.429945870046],
    [3, 64, 0.25, -2.735638708883], [3, 64, 0.5, -11.76457641], [3, 64, 0.875, -51.371083429],
    [2, 16, 0.05, -0.071218369081], [2, 16, 0.5, -7.816880415], [2, 16, 0.875, -34.167185171],
  ])('order %d, one of %d: at %d of the output rate %d dB', (order, ratio, frequency, decibels) => {
    const response = impulseResponse(order, ratio);
    const turn = 2 * Math.PI * frequency / ratio;
    const sum = (wave: (x: number) => number) => response.reduce((all, h, k) => all + h * wave(turn * k), 0);
    const gain = Math.hypot(sum(Math.cos), sum(Math.sin)) / ratio ** order;
    // printed to 1e-9 dB, so half of that; the sum of 190 doubles of size 1 adds 1e-13 / 10^(-51/20) * 8.7 = 3e-10 dB
    expect(Math.abs(20 * Math.log10(gain) - decibels)).toBeLessThan(1e-9);
  });

  test('an output falls on every ratio-th input after reset, wherever blocks are cut', () => {
    for (const lengths of [[1], [2], [3], [0, 5], [100]]) {
      const output = decimated({ order: 1, primed: 0 }, [4, 4, 4, 4, 8, 8, 8, 8, 99, 99, 99], [], lengths);
      expect(output.map((s) => Number(s.value))).toEqual([4, 8]);
    }
  });

  test('a tie goes up: 2/4 to 1, -2/4 to 0, -6/4 to -1', () => {
    const mean = (last: number) => Number(decimated({ order: 1, primed: 0 }, [0, 0, 0, last])[0].value);
    expect([mean(2), mean(-2), mean(-6), mean(1), mean(-3)]).toEqual([1, 0, -1, 0, -1]);
  });

  test('primed: the first sample has been there always, and nothing settles', () => {
    const output = decimated({ order: 3 }, [7, 7, 7, 7, 7, 7, 7, 7]);
    expect(output.map((s) => [Number(s.value), s.status])).toEqual([[7, 0], [7, 0]]);
  });

  test('from zero: settling until order * (ratio - 1) + 1 inputs are in', () => {
    // order 2, ratio 4: 7 inputs, so the first output settles and the second does not; 160 * (1 + 2 + 3 + 4) / 16
    expect(decimated({ primed: 0 }, new Array(8).fill(160)).map((s) => [Number(s.value), s.status]))
      .toEqual([[100, SETTLING], [160, 0]]);
    // order 1: the first output is whole
    expect(decimated({ order: 1, primed: 0 }, [1, 1, 1, 1])[0].status).toBe(0);
  });

  test('events and states are ORed over the inputs of one output', () => {
    const output = decimated({ order: 1 }, new Array(8).fill(0), [EVENT_ZERO, TRACKING, 0, 0, 0, 0, 0, 64]);
    expect(output.map((s) => s.status)).toEqual([EVENT_ZERO | TRACKING, 64]);
  });

  test('a lingering bit stays while its sample is within the inputs that make up an output', () => {
    // order 2, ratio 4: outputs at inputs 3, 7, 11 use inputs (-3)..3, 1..7, 5..11
    const flagged = (at: number) => decimated({}, new Array(12).fill(0), new Array(12).fill(0).with(at, STUCK))
      .map((s) => s.status);
    expect(flagged(0)).toEqual([STUCK, 0, 0]);
    expect(flagged(1)).toEqual([STUCK, STUCK, 0]);
    expect(flagged(4)).toEqual([0, STUCK, 0]);
    expect(flagged(5)).toEqual([0, STUCK, STUCK]);
  });

  test('temperature and zero are those of the last input', () => {
    const input = [1, 2, 3, 4].map((n) => sampleOf(0, { temperature: BigInt(n), zero: BigInt(-n) }));
    const [output] = feed(new Decimate(PLAIN, unitOf()), input, [2]);
    expect([output.temperature, output.zero]).toEqual([4n, -4n]);
  });

  test('a constant comes out as that constant however often the registers have wrapped', () => {
    // 5 integrators at 2^26 - 1: the first leaves 32 bits after 32 samples, the last after a handful
    for (const value of [67108863, -67108863]) {
      const output = decimated({ order: 5, ratio: 2, primed: 0 }, new Array(20000).fill(value), [], [4096]);
      expect(output.slice(3).every((s) => s.value === BigInt(value))).toBe(true);
    }
  });

  test('full scale of changing sign is exact although the registers wrap', () => {
    const input = Array.from({ length: 600 }, (_, n) => sampleOf((n * n) % 7 < 3 ? 67108863 : -67108863));
    const constants: DecimateConstants = { kind: 'decimate', order: 5, ratio: 2, primed: 0 };
    expectSamples(feed(new Decimate(constants, unitOf()), input, [100]), decimateOracle(constants, unitOf(), input));
  });
});

describe('width of the registers', () => {
  // register width = input bits + ceil(order * log2 ratio): E. B. Hogenauer, "An economical class of digital filters
  // for decimation and interpolation", IEEE Trans. ASSP-29 no. 2, 1981, pp. 155-162; 3, 8, 12 -> 21 was published
  const PUBLISHED = [
    [1, 16, 12, 4, 16], [2, 64, 12, 12, 24], [3, 8, 12, 9, 21], [3, 10, 16, 10, 26], [3, 16, 16, 12, 28],
    [3, 64, 8, 18, 26], [3, 64, 12, 18, 30], [4, 25, 16, 19, 35], [4, 128, 16, 28, 44], [5, 1024, 16, 50, 66],
  ];

  test.each(PUBLISHED)('order %d, one of %d, %d bits in: %d bits of growth, %d bits wide',
    (order, ratio, bits, growth, width) => {
    expect(growthBits(order, ratio)).toBe(growth);
    const limit = 2 ** (bits - 1) - 1;
    expect(signedBits(limit) + growthBits(order, ratio)).toBe(width);
    const problems = problemsOf(checkDecimate, { kind: 'decimate', order, ratio, primed: 0 }, unitOf(), limit);
    if (width <= 32) expect(problems).toEqual([]);
    else expectRefusal(problems, 'ratio');
  });

  test('growth is the smallest g with 2^g >= ratio^order', () => {
    fc.assert(fc.property(fc.integer({ min: 1, max: 5 }), edgy(2, 1024), (order, ratio) => {
      const g = BigInt(growthBits(order, ratio));
      const gain = BigInt(ratio) ** BigInt(order);
      expect(2n ** g >= gain && (g === 0n || 2n ** (g - 1n) < gain)).toBe(true);
    }));
  });

  test('signedBits holds the limit, and one bit less does not', () => {
    for (const [limit, bits] of [[1, 2], [2, 3], [3, 3], [4, 4], [127, 8], [128, 9], [2147483647, 32],
      [2147483648, 33]]) {
      expect(signedBits(limit)).toBe(bits);
    }
  });

  test('primed takes one bit more, because it works on differences', () => {
    // 24 bits and 8 of growth fill 32 from zero
    expect(problemsOf(checkDecimate, { ...PLAIN, order: 4, primed: 0 }, unitOf(), 8388607)).toEqual([]);
    expectRefusal(problemsOf(checkDecimate, { ...PLAIN, order: 4, primed: 0 }, unitOf(), 8388608), 'ratio');
    expectRefusal(problemsOf(checkDecimate, { ...PLAIN, order: 4 }, unitOf(), 8388607), 'ratio');
    expect(problemsOf(checkDecimate, { ...PLAIN, order: 4 }, unitOf(), 4194303)).toEqual([]);
  });
});

describe('decimate refuses', () => {
  test('nothing in order, and multiplies the ratio that flows on', () => {
    const flow = Object.assign(new Flow(), { domain: 'counts', limit: 1000, ratio: 3 });
    const problems = new Problems();
    checkDecimate(PLAIN, unitOf(), flow, problems);
    expect([problems.list, flow.ratio, flow.limit, flow.domain]).toEqual([[], 12, 1000, 'counts']);
    expect(problemsOf(checkDecimate, PLAIN, unitOf(), 1000, 'reading')).toEqual([]);
  });
  test.each<[keyof DecimateConstants, number]>([
    ['order', 0], ['order', 6], ['order', 1.5], ['ratio', 1], ['ratio', 65537], ['ratio', 2.5], ['primed', 2],
    ['primed', -1],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkDecimate, { ...PLAIN, [field]: value }, unitOf(), 1), field);
  });
  test('codes', () => expectRefusal(problemsOf(checkDecimate, PLAIN, unitOf(), 1, 'codes'), 'order'));
});
