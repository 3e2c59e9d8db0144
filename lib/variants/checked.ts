/**
 * The operators of arithmetic.ts, each proving its bound at every use: RangeError with operator and operands when a
 * result is not an integer or reaches 2^53, when a shift is not 0..52, a divisor not 1..2^52, or a wrapping operand is
 * beyond 32 bits. Takes the place of arithmetic.ts in a bundle; gives the same results.
 */
const WALL = 9007199254740992; // 2^53
const MOST_SHIFT = 52;
const MOST_DIVISOR = 4503599627370496; // 2^52

function refuse(operator: string, operands: string, why: string): never {
  throw new RangeError(operator + '(' + operands + '): ' + why);
}

function exact(result: number, operator: string, operands: string): number {
  if (Math.floor(result) !== result) refuse(operator, operands, 'gives ' + result + ', not an integer');
  if (result >= WALL || result <= -WALL) refuse(operator, operands, 'gives ' + result + ', allowed: below 2^53');
  return result;
}

function powerOfTwo(bits: number, operator: string, operands: string): number {
  if (!(bits >= 0 && bits <= MOST_SHIFT) || Math.floor(bits) !== bits) {
    refuse(operator, operands, 'shift ' + bits + ', allowed: 0 to 52');
  }
  let power = 1;
  for (let n = 0; n < bits; n++) power *= 2;
  return power;
}

function divisible(divisor: number, operator: string, operands: string): void {
  if (!(divisor >= 1 && divisor <= MOST_DIVISOR) || Math.floor(divisor) !== divisor) {
    refuse(operator, operands, 'divisor ' + divisor + ', allowed: 1 to 2^52');
  }
}

/** floor by the remainder, so that no rounded quotient is trusted */
function floored(value: number, divisor: number): number {
  const rest = value % divisor;
  return (value - rest) / divisor - (rest < 0 ? 1 : 0);
}

export function add(a: number, b: number): number {
  return exact(a + b, 'add', a + ', ' + b);
}

export function subtract(a: number, b: number): number {
  return exact(a - b, 'subtract', a + ', ' + b);
}

export function multiply(a: number, b: number): number {
  return exact(a * b, 'multiply', a + ', ' + b);
}

export function multiplyAdd(sum: number, a: number, b: number): number {
  const operands = sum + ', ' + a + ', ' + b;
  return exact(sum + exact(a * b, 'multiplyAdd', operands), 'multiplyAdd', operands);
}

export function shiftLeft(value: number, bits: number): number {
  const operands = value + ', ' + bits;
  return exact(value * powerOfTwo(bits, 'shiftLeft', operands), 'shiftLeft', operands);
}

export function shiftFloor(value: number, bits: number): number {
  const operands = value + ', ' + bits;
  return floored(exact(value, 'shiftFloor', operands), powerOfTwo(bits, 'shiftFloor', operands));
}

export function shiftRound(value: number, bits: number): number {
  const operands = value + ', ' + bits;
  const power = powerOfTwo(bits, 'shiftRound', operands);
  const half = bits === 0 ? 0 : power / 2;
  return floored(exact(exact(value, 'shiftRound', operands) + half, 'shiftRound', operands), power);
}

export function lowBits(value: number, bits: number): number {
  const operands = value + ', ' + bits;
  const power = powerOfTwo(bits, 'lowBits', operands);
  const rest = exact(value, 'lowBits', operands) % power;
  return rest < 0 ? rest + power : rest;
}

export function divideFloor(value: number, divisor: number): number {
  const operands = value + ', ' + divisor;
  divisible(divisor, 'divideFloor', operands);
  return floored(exact(value, 'divideFloor', operands), divisor);
}

export function divideRound(value: number, divisor: number): number {
  const operands = value + ', ' + divisor;
  divisible(divisor, 'divideRound', operands);
  const quotient = floored(exact(value, 'divideRound', operands), divisor);
  const rest = exact(value - exact(quotient * divisor, 'divideRound', operands), 'divideRound', operands);
  return exact(2 * rest, 'divideRound', operands) >= divisor ? quotient + 1 : quotient;
}

export function magnitude(value: number): number {
  return exact(value < 0 ? -value : value, 'magnitude', '' + value);
}

export function clamp(value: number, low: number, high: number): number {
  const operands = value + ', ' + low + ', ' + high;
  if (!(low <= high)) refuse('clamp', operands, 'low end above high end');
  return exact(value < low ? low : value > high ? high : exact(value, 'clamp', operands), 'clamp', operands);
}

function narrow(value: number, operator: string, operands: string): number {
  if ((value | 0) !== value) refuse(operator, operands, value + ', allowed: 32 bits with sign');
  return value;
}

export function addWrapping(a: number, b: number): number {
  const operands = a + ', ' + b;
  return (narrow(a, 'addWrapping', operands) + narrow(b, 'addWrapping', operands)) | 0;
}

export function subtractWrapping(a: number, b: number): number {
  const operands = a + ', ' + b;
  return (narrow(a, 'subtractWrapping', operands) - narrow(b, 'subtractWrapping', operands)) | 0;
}
