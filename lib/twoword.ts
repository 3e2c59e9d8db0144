/**
 * Non-negative integers beyond 2^53, as two words: value = high * 2^32 + low, 0 <= low < 2^32, high < 2^53.
 * Squares of 32-bit numbers and their sums live here; in C the pair is one or two uint64_t.
 * A result is left in `words`, [0] high and [1] low.
 */
import { add, divideFloor, lowBits, multiply, multiplyAdd, shiftFloor, shiftLeft, subtract } from './arithmetic.ts';

/** words = value^2 for 0 <= value <= 2^31. */
export function square(words: Float64Array, value: number): void {
  const upper = shiftFloor(value, 16); // <= 2^15
  const lower = lowBits(value, 16); // < 2^16
  const cross = multiply(2 * upper, lower); // < 2^32
  const low = add(multiply(lower, lower), shiftLeft(lowBits(cross, 16), 16)); // < 2^33
  words[1] = lowBits(low, 32);
  words[0] = add(multiplyAdd(shiftFloor(cross, 16), upper, upper), shiftFloor(low, 32)); // <= 2^30
}

/** words -= value^2 * count for 0 <= value <= 2^31, 0 <= count <= 2^20; the result must not be negative. */
export function subtractSquares(words: Float64Array, value: number, count: number, scratch: Float64Array): void {
  square(scratch, value);
  const low = subtract(words[1], multiply(scratch[1], count)); // > -2^52
  words[1] = lowBits(low, 32);
  words[0] = add(subtract(words[0], multiply(scratch[0], count)), shiftFloor(low, 32)); // count * 2^30 <= 2^50
}

/** words -= value for 0 <= value < 2^53; the result must not be negative. */
export function subtractNumber(words: Float64Array, value: number): void {
  const low = subtract(words[1], lowBits(value, 32));
  words[1] = lowBits(low, 32);
  words[0] = add(subtract(words[0], shiftFloor(value, 32)), shiftFloor(low, 32));
}

/** words = floor(words / divisor) for 1 <= divisor <= 2^20; gives the remainder. */
export function divide(words: Float64Array, divisor: number): number {
  const upper = divideFloor(words[0], divisor);
  const carried = subtract(words[0], multiply(upper, divisor)); // < 2^20
  const rest = add(shiftLeft(carried, 32), words[1]); // < 2^52
  const lower = divideFloor(rest, divisor); // < 2^32
  words[0] = upper;
  words[1] = lower;
  return subtract(rest, multiply(lower, divisor));
}

/** floor(sqrt(words)) for words <= 2^62, by setting bits from the top while the square still fits. */
export function squareRoot(words: Float64Array, scratch: Float64Array): number {
  let root = 0;
  for (let bit = 31; bit >= 0; bit--) {
    const candidate = add(root, shiftLeft(1, bit));
    if (candidate > 2147483648) continue;
    square(scratch, candidate);
    if (scratch[0] < words[0] || (scratch[0] === words[0] && scratch[1] <= words[1])) root = candidate;
  }
  return root;
}
