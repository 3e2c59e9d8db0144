/**
 * The operators of arithmetic.ts, each adding up how often it is used; multiplies by the width of their operands (16
 * bits, 32 bits, wider), because that is what they cost on a small processor. Takes the place of arithmetic.ts in a
 * bundle; gives the same results. Loop counters and comparisons are not counted.
 */
export const OPERATORS = [
  'add', 'subtract', 'multiply16', 'multiply32', 'multiplyWide', 'multiplyAdd16', 'multiplyAdd32', 'multiplyAddWide',
  'shiftLeft', 'shiftFloor', 'shiftRound', 'lowBits', 'divideFloor', 'divideRound', 'magnitude', 'clamp',
  'addWrapping', 'subtractWrapping',
];

/** How often each of OPERATORS has been used. */
export const OPERATION_COUNTS = new Float64Array(18);

export function clearOperationCounts(): void {
  for (let i = 0; i < OPERATION_COUNTS.length; i++) OPERATION_COUNTS[i] = 0;
}

function powerOfTwo(bits: number): number {
  let power = 1;
  for (let n = 0; n < bits; n++) power *= 2;
  return power;
}

/** 0: both fit 16 bits with sign, 1: 32 bits, 2: wider. */
function widthClass(a: number, b: number): number {
  if (a >= -32768 && a <= 32767 && b >= -32768 && b <= 32767) return 0;
  return (a | 0) === a && (b | 0) === b ? 1 : 2;
}

export function add(a: number, b: number): number {
  OPERATION_COUNTS[0]++;
  return a + b;
}

export function subtract(a: number, b: number): number {
  OPERATION_COUNTS[1]++;
  return a - b;
}

export function multiply(a: number, b: number): number {
  OPERATION_COUNTS[2 + widthClass(a, b)]++;
  return a * b;
}

export function multiplyAdd(sum: number, a: number, b: number): number {
  OPERATION_COUNTS[5 + widthClass(a, b)]++;
  return sum + a * b;
}

export function shiftLeft(value: number, bits: number): number {
  OPERATION_COUNTS[8]++;
  return value * powerOfTwo(bits);
}

export function shiftFloor(value: number, bits: number): number {
  OPERATION_COUNTS[9]++;
  return Math.floor(value / powerOfTwo(bits));
}

export function shiftRound(value: number, bits: number): number {
  OPERATION_COUNTS[10]++;
  const power = powerOfTwo(bits);
  return Math.floor((value + Math.floor(power / 2)) / power);
}

export function lowBits(value: number, bits: number): number {
  OPERATION_COUNTS[11]++;
  const power = powerOfTwo(bits);
  return value - Math.floor(value / power) * power;
}

export function divideFloor(value: number, divisor: number): number {
  OPERATION_COUNTS[12]++;
  return Math.floor(value / divisor);
}

export function divideRound(value: number, divisor: number): number {
  OPERATION_COUNTS[13]++;
  const quotient = Math.floor(value / divisor);
  return 2 * (value - quotient * divisor) >= divisor ? quotient + 1 : quotient;
}

export function magnitude(value: number): number {
  OPERATION_COUNTS[14]++;
  return value < 0 ? -value : value;
}

export function clamp(value: number, low: number, high: number): number {
  OPERATION_COUNTS[15]++;
  return value < low ? low : value > high ? high : value;
}

export function addWrapping(a: number, b: number): number {
  OPERATION_COUNTS[16]++;
  return (a + b) | 0;
}

export function subtractWrapping(a: number, b: number): number {
  OPERATION_COUNTS[17]++;
  return (a - b) | 0;
}
