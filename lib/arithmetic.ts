/**
 * The arithmetic of the chain. Every value is an integer of magnitude below 2^53, so a sum of products is exact in
 * one double here and in one int64_t in C. Nothing else in this folder shifts, clamps or divides by hand.
 *
 * The one rounding rule: add half, then floor; a tie goes up (-0.5 becomes 0).
 * Registers that wrap on purpose (integrator-comb) use the *Wrapping pair, modulo 2^32.
 * Callers prove the bound beside each use; shifts are 0..52, divisors 1..2^52.
 */

const SPAN = 53;
const POWER = powersOf(2);
const INVERSE = powersOf(0.5);
const HALF = halves();

function powersOf(base: number): Float64Array {
  const powers = new Float64Array(SPAN);
  let power = 1;
  for (let n = 0; n < SPAN; n++) {
    powers[n] = power;
    power *= base;
  }
  return powers;
}

function halves(): Float64Array {
  const half = new Float64Array(SPAN);
  for (let n = 1; n < SPAN; n++) half[n] = POWER[n - 1];
  return half;
}

export function add(a: number, b: number): number {
  return a + b;
}

export function subtract(a: number, b: number): number {
  return a - b;
}

export function multiply(a: number, b: number): number {
  return a * b;
}

/** sum + a * b */
export function multiplyAdd(sum: number, a: number, b: number): number {
  return sum + a * b;
}

/** value * 2^bits */
export function shiftLeft(value: number, bits: number): number {
  return value * POWER[bits];
}

/** floor(value / 2^bits) */
export function shiftFloor(value: number, bits: number): number {
  return Math.floor(value * INVERSE[bits]);
}

/** floor(value / 2^bits + 1/2); the value itself when bits is 0 */
export function shiftRound(value: number, bits: number): number {
  return Math.floor((value + HALF[bits]) * INVERSE[bits]);
}

/** value modulo 2^bits, 0 .. 2^bits - 1 */
export function lowBits(value: number, bits: number): number {
  return value - Math.floor(value * INVERSE[bits]) * POWER[bits];
}

/** floor(value / divisor), divisor > 0; exact because the quotient's nearest double never passes an integer below 2^53 */
export function divideFloor(value: number, divisor: number): number {
  return Math.floor(value / divisor);
}

/** floor(value / divisor + 1/2), divisor > 0; |value| + divisor below 2^53, so that the multiple beyond it is exact too */
export function divideRound(value: number, divisor: number): number {
  const quotient = Math.floor(value / divisor);
  return 2 * (value - quotient * divisor) >= divisor ? quotient + 1 : quotient;
}

export function magnitude(value: number): number {
  return value < 0 ? -value : value;
}

export function clamp(value: number, low: number, high: number): number {
  return value < low ? low : value > high ? high : value;
}

/** (a + b) modulo 2^32, as a signed 32-bit number */
export function addWrapping(a: number, b: number): number {
  return (a + b) | 0;
}

/** (a - b) modulo 2^32, as a signed 32-bit number */
export function subtractWrapping(a: number, b: number): number {
  return (a - b) | 0;
}
