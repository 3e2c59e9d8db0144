import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { normalQuantile } from '../../../sim/hardware/quantile.ts';
import { RandomStream, seedWords, SplitMix64, Xoshiro128 } from '../../../sim/hardware/random.ts';

/** Relative distance; the quantile must hold to 1e-14 (PPND16 states about 1e-16, doubles add a few 1e-16). */
function relative(found: number, expected: number): number {
  return Math.abs(found / expected - 1);
}

describe('known answers', () => {
  // rust-random/rngs, rand_xoshiro/src/splitmix64.rs, from the authors' reference C; seed 1234567: a public task page
  test.each([
    [1477776061723855037n, [1985237415132408290n, 2979275885539914483n, 13511426838097143398n, 8488337342461049707n,
      15141737807933549159n]],
    [1234567n, [6457827717110365317n, 3203168211198807973n, 9817491932198370423n, 4593380528125082431n,
      16408922859458223821n]],
    [0n, [0xe220a8397b1dcdafn, 0x6e789e6aa1b965f4n, 0x06c45d188009454fn, 0xf88bb8a8724c81ecn]],
  ])('SplitMix64 from %s', (seed, expected) => {
    const mixer = new SplitMix64(seed);
    expect(expected.map(() => mixer.next())).toEqual(expected);
  });

  test('xoshiro128** 1.1 from (1, 2, 3, 4)', () => {
    // rust-random/rngs, rand_xoshiro/src/xoshiro128starstar.rs, from the authors' reference C
    const expected = [11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849, 3729100597,
      4258142804];
    const generator = new Xoshiro128([1, 2, 3, 4]);
    expect(expected.map(() => generator.word() >>> 0)).toEqual(expected);
  });

  test('xoshiro128** seeded from SplitMix64(0), low word first', () => {
    // derived with independent Python code, not published
    expect([...seedWords(0n)].map((word) => (word >>> 0).toString(16)))
      .toEqual(['7b1dcdaf', 'e220a839', 'a1b965f4', '6e789e6a']);
    const generator = new Xoshiro128(seedWords(0n));
    const expected = [3737715805, 2584255861, 2876756834, 3286328325];
    expect(expected.map(() => generator.word() >>> 0)).toEqual(expected);
  });

  test.each([
    // test values of AS 241, as in the R project's regression tests
    [0.25, -0.6744897501960817], [0.001, -3.090232306167814], [1e-20, -9.262340089798408],
  ])('normal quantile of %s to 1e-14', (probability, expected) => {
    expect(relative(normalQuantile(probability), expected)).toBeLessThan(1e-14);
  });

  test.each([[1, 0.8413447460685429], [2, 0.9772498680518208], [3, 0.9986501019683699]])(
    'quantile inverts the tabulated distribution at %s', (x, probability) => {
      // a probability near 1 is known to 1.2e-16; over the density that is the resolution in x, twice for the quotient
      const density = Math.exp(-x * x / 2) / Math.sqrt(2 * Math.PI);
      expect(Math.abs(normalQuantile(probability) - x)).toBeLessThan(2 * 1.2e-16 / density + 1e-15 * x);
    });
});

describe('normal quantile', () => {
  test('its slope is one over the density, in all three regions and across their borders', () => {
    // central difference with d = 1e-4 p: relative error (d x'''/x')/6 <= 1e-8/6 * 3(1 + x^2)..., rounding 1e-15/1e-4
    for (const p of [1e-30, 1e-15, 1.3e-11, 1.4e-11, 1e-6, 0.01, 0.0749, 0.0751, 0.2, 0.5]) {
      const d = 1e-4 * p;
      const slope = (normalQuantile(p + d) - normalQuantile(p - d)) / (2 * d);
      const x = normalQuantile(p);
      const density = Math.exp(-x * x / 2) / Math.sqrt(2 * Math.PI);
      expect(relative(slope * density, 1)).toBeLessThan(1e-7);
    }
  });

  test('is odd about one half', () => {
    fc.assert(fc.property(fc.integer({ min: 1, max: 2 ** 31 }), (k) => {
      const p = k / 2 ** 32; // 1 - p is exact
      expect(normalQuantile(1 - p)).toBe(-normalQuantile(p) + 0);
    }), { examples: [[1], [2 ** 31]] });
  });
});

describe('streams', () => {
  test('never give 0 or 1, nor an infinite normal, at either end of the words', () => {
    // a state whose word 1 is 0 gives the word 0; five * 9 of the inverse of 45 times -1 gives the word -1
    const lowest = new Xoshiro128([1, 0, 0, 0]);
    expect(lowest.uniform()).toBe(0.5 / 2 ** 32);
    const before = stateForWord(-1);
    const highest = new Xoshiro128([1, before, 0, 0]);
    expect(highest.uniform()).toBe(1 - 0.5 / 2 ** 32);
    expect(Math.abs(new Xoshiro128([1, before, 0, 0]).normal())).toBeLessThan(6.4);
  });

  test('normals in bulk are the normals one by one, however cut', () => {
    fc.assert(fc.property(fc.integer(), fc.nat(1000), fc.string(), fc.array(fc.nat(20), { maxLength: 8 }),
      (seed, trial, source, cuts) => {
        const single = new RandomStream(seed, trial, source);
        const bulk = new RandomStream(seed, trial, source);
        const block = new Float64Array(20);
        for (const count of cuts) {
          bulk.fillNormals(block, count);
          for (let i = 0; i < count; i++) expect(block[i]).toBe(single.normal());
        }
        expect(bulk.word()).toBe(single.word());
      }));
  });

  test('differ in seed, trial and source', () => {
    const start = (seed: number, trial: number, source: string) => {
      const stream = new RandomStream(seed, trial, source);
      return [stream.word(), stream.word(), stream.word(), stream.word()].join();
    };
    const starts = new Set<string>();
    for (let seed = -5; seed < 5; seed++) {
      for (let trial = 0; trial < 10; trial++) {
        for (const source of ['', 'a', 'b', 'ab', 'ba', 'core.gap_mm']) starts.add(start(seed, trial, source));
      }
    }
    expect(starts.size).toBe(600);
  });

  test('of neighbouring trials and sources are uncorrelated, each with mean 0 and variance 1', () => {
    // standard errors of n draws: mean 1/sqrt n, variance sqrt(2/n), correlation 1/sqrt n; five of them, fixed seed
    const n = 100_000;
    const draw = (trial: number, source: string) => {
      const block = new Float64Array(n);
      new RandomStream(7, trial, source).fillNormals(block, n);
      return block;
    };
    const blocks = [draw(0, 'a'), draw(1, 'a'), draw(2, 'a'), draw(0, 'b')];
    blocks.forEach((one, i) => {
      expect(Math.abs(one.reduce((sum, x) => sum + x, 0) / n)).toBeLessThan(5 / Math.sqrt(n));
      expect(Math.abs(one.reduce((sum, x) => sum + x * x, 0) / n - 1)).toBeLessThan(5 * Math.sqrt(2 / n));
      for (const other of blocks.slice(i + 1)) {
        expect(Math.abs(one.reduce((sum, x, k) => sum + x * other[k], 0) / n)).toBeLessThan(5 / Math.sqrt(n));
      }
    });
  });

  test('refuse a seed or trial that cannot be counted', () => {
    expect(() => new RandomStream(0.5, 0, 'a')).toThrow(/seed/);
    expect(() => new RandomStream(2 ** 53, 0, 'a')).toThrow(/seed/);
    expect(() => new RandomStream(1, -1, 'a')).toThrow(/trial/);
    expect(() => new Xoshiro128([0, 0, 0, 0])).toThrow(RangeError);
  });
});

/** The state word 1 that makes the next output `word`: undoes "times 9, rotate by 7, times 5" modulo 2^32. */
function stateForWord(word: number): number {
  const over9 = Math.imul(word, 954437177); // 9 * 954437177 = 1 modulo 2^32
  const turned = (over9 >>> 7) | (over9 << 25);
  return Math.imul(turned, -858993459); // 5 * 3435973837 = 1 modulo 2^32
}
