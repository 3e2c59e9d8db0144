/** Two-word arithmetic against BigInt, over the whole range that each operation states, ends included. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  divide, square, squareRoot, subtractNumber, subtractSquares,
} from '../../lib/index.ts';

const WORD = 2n ** 32n;
const MOST = 2147483648; // 2^31
const pair = (value: bigint): Float64Array => Float64Array.of(Number(value / WORD), Number(value % WORD));
const whole = (words: Float64Array): bigint => BigInt(words[0]) * WORD + BigInt(words[1]);

const magnitudes = fc.oneof(
  fc.constantFrom(0, 1, 2, 65535, 65536, 65537, 46340, 46341, MOST - 65536, MOST - 1, MOST),
  fc.integer({ min: 0, max: MOST - 1 }),
  fc.nat(200000),
);
const counts = fc.oneof(fc.constantFrom(0, 1, 2, 1048575, 1048576), fc.integer({ min: 0, max: 1048576 }));
const divisors = counts.filter((count) => count > 0);
const big = (most: bigint) => fc.oneof(
  fc.bigInt({ min: 0n, max: most }),
  fc.constantFrom(0n, 1n, WORD - 1n, WORD, WORD + 1n, most - 1n, most),
);

function expectWords(words: Float64Array, value: bigint): void {
  expect(whole(words)).toBe(value);
  expect(words[1] >= 0 && words[1] < 4294967296 && Number.isSafeInteger(words[0])).toBe(true);
}

describe('two words', () => {
  test('square is exact for 0 .. 2^31', () => {
    fc.assert(fc.property(magnitudes, (value) => {
      const words = new Float64Array(2);
      square(words, value);
      expectWords(words, BigInt(value) ** 2n);
    }), { numRuns: 1000 });
  });

  test('subtracting count squares is exact up to 2^20 squares of 2^31', () => {
    fc.assert(fc.property(magnitudes, counts, big(2n ** 82n), (value, count, rest) => {
      const taken = BigInt(value) ** 2n * BigInt(count);
      const words = pair(taken + rest);
      subtractSquares(words, value, count, new Float64Array(2));
      expectWords(words, rest);
    }), { numRuns: 1000 });
  });

  test('subtracting a number below 2^53 is exact, with a borrow from the upper word', () => {
    fc.assert(fc.property(fc.maxSafeNat(), big(2n ** 84n), (value, rest) => {
      const words = pair(BigInt(value) + rest);
      subtractNumber(words, value);
      expectWords(words, rest);
    }), { numRuns: 1000 });
    const words = pair(WORD);
    subtractNumber(words, 1);
    expect([...words]).toEqual([0, 4294967295]);
  });

  test('dividing gives floor and remainder for divisors up to 2^20, dividends up to 2^85 - 1', () => {
    fc.assert(fc.property(big(2n ** 85n - 1n), divisors, (value, divisor) => {
      const words = pair(value);
      const rest = divide(words, divisor);
      expectWords(words, value / BigInt(divisor));
      expect(BigInt(rest)).toBe(value % BigInt(divisor));
    }), { numRuns: 1000 });
  });

  test('the root r of n holds r^2 <= n < (r + 1)^2 for n up to 2^62, at and beside every square', () => {
    fc.assert(fc.property(magnitudes, fc.constantFrom(-1n, 0n, 1n), (value, beside) => {
      const n = BigInt(value) ** 2n + beside;
      if (n < 0n || n > 2n ** 62n) return;
      const root = BigInt(squareRoot(pair(n), new Float64Array(2)));
      expect(root * root <= n && n < (root + 1n) ** 2n).toBe(true);
    }), { numRuns: 1000 });
    fc.assert(fc.property(big(2n ** 62n), (n) => {
      const root = BigInt(squareRoot(pair(n), new Float64Array(2)));
      expect(root * root <= n && n < (root + 1n) ** 2n).toBe(true);
    }), { numRuns: 1000 });
  });

  // Roots by definition (r^2 <= n < (r + 1)^2), the usual list of border cases of integer roots; also Python
  // math.isqrt.
  test.each([
    [0n, 0], [1n, 1], [2n, 1], [3n, 1], [4n, 2], [8n, 2], [9n, 3], [15n, 3], [16n, 4], [17n, 4], [24n, 4], [25n, 5],
    [26n, 5], [65535n, 255], [65536n, 256], [1073741823n, 32767], [1073741824n, 32768], [2147483647n, 46340],
    [2147483648n, 46340], [4294836224n, 65534], [4294836225n, 65535], [4294836226n, 65535], [4294901760n, 65535],
    [4294967295n, 65535], [2n ** 62n - 1n, 2147483647], [2n ** 62n, 2147483648],
  ])('root of %s is %s', (n, root) => {
    expect(squareRoot(pair(n), new Float64Array(2))).toBe(root);
  });
});
