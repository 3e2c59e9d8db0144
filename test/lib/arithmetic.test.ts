/**
 * The operators against the published results of the fixed-point operators of Recommendation ITU-T G.191 (Software
 * Tool Library, manual chapter BASOP: results of its reference software), against the definitions of the five rounding
 * modes, and against BigInt up to the last integers below 2^53.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  add, addWrapping, clamp, divideFloor, divideRound, lowBits, magnitude, multiply, multiplyAdd, shiftFloor, shiftLeft,
  shiftRound, subtract, subtractWrapping,
} from '../../lib/index.ts';
import { floorDivide, roundDivide } from './oracle/record.ts';

const held16 = (value: number) => clamp(value, -32768, 32767);
const held32 = (value: number) => clamp(value, -2147483648, 2147483647);
const longProduct = (a: number, b: number) => held32(shiftLeft(multiply(a, b), 1));
const left = (value: number, bits: number) => (bits < 0 ? shiftFloor(value, -bits) : shiftLeft(value, bits));

/** The standard's operators, spelled with ours. */
const SPELLED: Record<string, (...operands: number[]) => number> = {
  add: (a, b) => held16(add(a, b)),
  sub: (a, b) => held16(subtract(a, b)),
  abs_s: (a) => held16(magnitude(a)),
  mult: (a, b) => held16(shiftFloor(multiply(a, b), 15)),
  mult_r: (a, b) => held16(shiftRound(multiply(a, b), 15)),
  L_mult: longProduct,
  L_add: (a, b) => held32(add(a, b)),
  L_sub: (a, b) => held32(subtract(a, b)),
  L_abs: (a) => held32(magnitude(a)),
  L_mac: (sum, a, b) => held32(add(sum, longProduct(a, b))),
  L_msu: (sum, a, b) => held32(subtract(sum, longProduct(a, b))),
  mac_r: (sum, a, b) => held16(shiftRound(held32(add(sum, longProduct(a, b))), 16)),
  shl: (a, bits) => held16(left(a, bits)),
  shr: (a, bits) => held16(left(a, -bits)),
  shr_r: (a, bits) => held16(shiftRound(a, bits)),
  L_shl: (a, bits) => held32(left(a, bits)),
  L_shr: (a, bits) => held32(left(a, -bits)),
  L_shr_r: (a, bits) => held32(shiftRound(a, bits)),
  round_fx: (a) => held16(shiftRound(a, 16)),
  extract_h: (a) => shiftFloor(a, 16),
  L_deposit_h: (a) => shiftLeft(a, 16),
  div_s: (a, b) => held16(divideFloor(shiftLeft(a, 15), b)),
  Mpy_32_16_1: (a, b) => held32(shiftFloor(multiply(a, b), 15)),
  Mpy_32_16_r: (a, b) => held32(shiftRound(multiply(a, b), 15)),
  W_round48_L: (a) => held32(shiftRound(a, 16)),
  W_round64_L: (a) => held32(shiftRound(a, 32)),
  W_sat_l: held32,
  W_sat_m: (a) => held32(shiftFloor(a, 16)),
};

const PUBLISHED = `
add(32767,1)=32767 add(32000,1000)=32767 add(-32768,-1)=-32768 add(-32768,-32768)=-32768 add(32767,32767)=32767
add(32767,-32768)=-1 add(12345,-23456)=-11111
sub(-32768,1)=-32768 sub(0,-32768)=32767 sub(32767,-1)=32767 sub(32767,-32768)=32767 sub(-32768,32767)=-32768
sub(-1,-32768)=32767 sub(-32768,-32768)=0 sub(100,200)=-100
abs_s(-32768)=32767 abs_s(-1)=1 L_abs(-2147483648)=2147483647
mult(-32768,-32768)=32767 mult(-32768,32767)=-32767 mult(32767,32767)=32766 mult(16384,16384)=8192 mult(-1,1)=-1
mult(1,1)=0 mult(-1,-1)=0 mult(3,16384)=1 mult(-3,16384)=-2 mult(1,32767)=0 mult(-1,32767)=-1
mult(12345,-23456)=-8837
mult_r(-32768,-32768)=32767 mult_r(-32768,32767)=-32767 mult_r(32767,32767)=32766 mult_r(16384,16384)=8192
mult_r(-1,1)=0 mult_r(1,1)=0 mult_r(3,16384)=2 mult_r(-3,16384)=-1 mult_r(1,16384)=1 mult_r(-1,16384)=0
mult_r(1,16383)=0 mult_r(-1,16385)=-1 mult_r(12345,-23456)=-8837
L_mult(-32768,-32768)=2147483647 L_mult(-32768,32767)=-2147418112 L_mult(32767,32767)=2147352578 L_mult(1,1)=2
L_mult(-1,1)=-2 L_mult(16384,16384)=536870912 L_mult(12345,-23456)=-579128640
L_add(2147483647,1)=2147483647 L_add(-2147483648,-1)=-2147483648 L_add(2147483647,-2147483648)=-1
L_add(1500000000,1000000000)=2147483647 L_sub(-2147483648,1)=-2147483648 L_sub(0,-2147483648)=2147483647
L_sub(2147483647,-1)=2147483647 L_sub(-1,-2147483648)=2147483647
L_mac(2147483647,1,1)=2147483647 L_mac(0,-32768,-32768)=2147483647 L_mac(-2147483648,-32768,-32768)=-1
L_mac(1000,100,-200)=-39000 L_msu(-2147483648,1,1)=-2147483648 L_msu(0,-32768,-32768)=-2147483647
L_msu(1000,100,-200)=41000 mac_r(2147483647,1,1)=32767 mac_r(0,32767,32767)=32766 mac_r(0,-32768,-32768)=32767
shl(1,14)=16384 shl(1,15)=32767 shl(1,16)=32767 shl(-1,15)=-32768 shl(-1,16)=-32768 shl(-2,15)=-32768 shl(0,20)=0
shl(16384,1)=32767 shl(-16384,1)=-32768 shl(-16385,1)=-32768 shl(-5,-1)=-3 shl(100,-20)=0 shl(-100,-20)=-1
shr(-32768,15)=-1 shr(-32768,16)=-1 shr(32767,15)=0 shr(32767,14)=1 shr(-5,1)=-3 shr(5,1)=2 shr(-1,1)=-1
shr(1,-15)=32767 shr(-1,-16)=-32768
shr_r(5,1)=3 shr_r(-5,1)=-2 shr_r(3,2)=1 shr_r(-3,2)=-1 shr_r(2,2)=1 shr_r(-2,2)=0 shr_r(-6,2)=-1
shr_r(32767,1)=16384 shr_r(-32768,1)=-16384 shr_r(32767,15)=1 shr_r(-32768,15)=-1 shr_r(-32768,16)=0
shr_r(16384,15)=1 shr_r(-16384,15)=0 shr_r(-16385,15)=-1
L_shl(1,30)=1073741824 L_shl(1,31)=2147483647 L_shl(-1,31)=-2147483648 L_shl(-1,32)=-2147483648 L_shl(0,40)=0
L_shl(1073741824,1)=2147483647 L_shl(-1073741824,1)=-2147483648 L_shl(-1073741825,1)=-2147483648 L_shl(-5,-1)=-3
L_shl(12345678,5)=395061696 L_shl(12345678,8)=2147483647 L_shl(-12345678,8)=-2147483648 L_shl(-7,-40)=-1
L_shr(-2147483648,31)=-1 L_shr(-2147483648,32)=-1 L_shr(2147483647,30)=1 L_shr(2147483647,31)=0 L_shr(-5,1)=-3
L_shr(-1,5)=-1 L_shr(12345678,-8)=2147483647
L_shr_r(5,1)=3 L_shr_r(-5,1)=-2 L_shr_r(2,2)=1 L_shr_r(-2,2)=0 L_shr_r(-6,2)=-1 L_shr_r(-3,2)=-1
L_shr_r(2147483647,1)=1073741824 L_shr_r(2147483647,31)=1 L_shr_r(-2147483648,31)=-1 L_shr_r(-2147483648,32)=0
L_shr_r(1073741824,31)=1 L_shr_r(1073741823,31)=0 L_shr_r(-1073741824,31)=0 L_shr_r(-1073741825,31)=-1
L_shr_r(12345678,8)=48225
round_fx(0)=0 round_fx(32767)=0 round_fx(32768)=1 round_fx(65535)=1 round_fx(98304)=2 round_fx(-32768)=0
round_fx(-32769)=-1 round_fx(-98304)=-1 round_fx(2147483647)=32767 round_fx(2147450879)=32767
round_fx(2147450880)=32767 round_fx(-2147483648)=-32768 round_fx(305419896)=4660
extract_h(305419896)=4660 extract_h(-1)=-1 L_deposit_h(-1)=-65536
div_s(0,5)=0 div_s(1,3)=10922 div_s(1,2)=16384 div_s(5,5)=32767 div_s(16384,32767)=16384 div_s(32766,32767)=32766
Mpy_32_16_1(2147483647,32767)=2147418111 Mpy_32_16_1(-2147483648,-32768)=2147483647 Mpy_32_16_1(-1,1)=-1
Mpy_32_16_1(123456789,-12345)=-46511050 Mpy_32_16_r(2147483647,32767)=2147418111
Mpy_32_16_r(-2147483648,-32768)=2147483647 Mpy_32_16_r(-1,1)=0 Mpy_32_16_r(1,16384)=1 Mpy_32_16_r(-1,16384)=0
Mpy_32_16_r(123456789,-12345)=-46511049
W_round48_L(32767)=0 W_round48_L(32768)=1 W_round48_L(-32768)=0 W_round48_L(-32769)=-1
W_round48_L(140737488355327)=2147483647 W_round48_L(-140737488355328)=-2147483648
W_round48_L(-140737488388097)=-2147483648 W_round64_L(2147483647)=0 W_round64_L(2147483648)=1
W_round64_L(-2147483648)=0 W_round64_L(-2147483649)=-1 W_sat_l(2147483648)=2147483647
W_sat_l(-2147483649)=-2147483648 W_sat_l(-5)=-5 W_sat_m(140737488355328)=2147483647 W_sat_m(-65537)=-2
`.trim().split(/\s+/).map((line) => /^(\w+)\((.*)\)=(-?\d+)$/.exec(line)!.slice(1));

test.each(PUBLISHED)('published result of G.191: %s(%s) = %s', (operator, operands, result) => {
  // + 0: 0 and -0 are the same integer
  expect(SPELLED[operator](...operands.split(',').map(Number)) + 0).toBe(Number(result));
});

test('every spelled operator has published results', () => {
  expect(Object.keys(SPELLED).filter((name) => !PUBLISHED.some(([operator]) => operator === name))).toEqual([]);
});

// value, floor(value / 4), value / 4 with a tie up: from the definitions of the rounding modes
const QUARTERS = [
  [-12, -3, -3], [-11, -3, -3], [-10, -3, -2], [-9, -3, -2], [-8, -2, -2], [-7, -2, -2], [-6, -2, -1], [-5, -2, -1],
  [-3, -1, -1], [-2, -1, 0], [-1, -1, 0], [1, 0, 0], [2, 0, 1], [3, 0, 1], [5, 1, 1], [6, 1, 2], [7, 1, 2], [9, 2, 2],
  [10, 2, 3], [11, 2, 3],
];

test.each(QUARTERS)('%d / 4 floors to %d and rounds to %d, by shift and by division', (value, floor, rounded) => {
  expect([shiftFloor(value, 2), divideFloor(value, 4)]).toEqual([floor, floor]);
  expect([shiftRound(value, 2) + 0, divideRound(value, 4) + 0]).toEqual([rounded, rounded]);
});

const MOST = Number.MAX_SAFE_INTEGER; // 2^53 - 1
const inside = (value: number) => Math.abs(value) <= MOST;
const bits = fc.oneof(fc.integer({ min: 0, max: 52 }), fc.constantFrom(0, 1, 51, 52));
const wide = fc.oneof(
  fc.maxSafeInteger(), fc.integer({ min: -100, max: 100 }), fc.nat(1000).map((n) => MOST - n),
  fc.nat(1000).map((n) => n - MOST),
);
const divisors = fc.oneof(
  fc.integer({ min: 1, max: 2 ** 31 - 1 }), fc.integer({ min: 1, max: 20 }), bits.map((n) => 2 ** n),
  fc.nat(1000).map((n) => 2 ** 52 - n), fc.nat(1000).map((n) => 2 ** 51 + n - 500),
);

/** Values at a multiple of the divisor, at half way to the next, and beside both. */
const nearTies = (divisor: number) => fc.tuple(wide, fc.constantFrom(0, 1), fc.integer({ min: -1, max: 1 }))
  .map(([value, half, beside]) => value - value % divisor + half * Math.floor(divisor / 2) + beside).filter(inside);
const divisions = divisors.chain((d) => fc.tuple(fc.oneof(wide, nearTies(d)), fc.constant(d)));
const shifts = bits.chain((n) => fc.tuple(fc.oneof(wide, nearTies(2 ** n)), fc.constant(n)));
const RUNS = { numRuns: 5000 };

describe('exact against BigInt up to 2^53 - 1', () => {
  test('divideFloor floors', () => {
    fc.assert(fc.property(divisions, ([value, d]) => {
      expect(BigInt(divideFloor(value, d))).toBe(floorDivide(BigInt(value), BigInt(d)));
    }), RUNS);
  });

  test('divideRound adds half, then floors, wherever |value| + divisor is below 2^53', () => {
    fc.assert(fc.property(divisions, ([value, d]) => {
      fc.pre(Math.abs(value) + d <= MOST);
      expect(BigInt(divideRound(value, d))).toBe(roundDivide(BigInt(value), BigInt(d)));
    }), RUNS);
  });

  test('shiftFloor and shiftRound', () => {
    fc.assert(fc.property(shifts, ([value, n]) => {
      expect(BigInt(shiftFloor(value, n))).toBe(BigInt(value) >> BigInt(n));
      expect(BigInt(shiftRound(value, n))).toBe(roundDivide(BigInt(value), 2n ** BigInt(n)));
    }), RUNS);
  });

  test('shiftRound by 0 is the value itself', () => {
    fc.assert(fc.property(wide, (value) => { expect(shiftRound(value, 0)).toBe(value); }));
  });

  test('lowBits is the value modulo 2^bits, 0 .. 2^bits - 1', () => {
    fc.assert(fc.property(shifts, ([value, n]) => {
      expect(BigInt(lowBits(value, n))).toBe(BigInt.asUintN(n, BigInt(value)));
    }), RUNS);
  });

  test('shiftLeft', () => {
    fc.assert(fc.property(wide, bits, (value, n) => {
      const small = Math.trunc(value / 2 ** n);
      expect(BigInt(shiftLeft(small, n))).toBe(BigInt(small) << BigInt(n));
    }), RUNS);
  });

  test('sums, differences and products', () => {
    const pairs = fc.tuple(wide, wide, wide).filter(([sum, a, b]) => inside(a + b) && inside(a - b) && inside(sum));
    fc.assert(fc.property(pairs, ([sum, a, b]) => {
      expect([BigInt(add(a, b)), BigInt(subtract(a, b))]).toEqual([BigInt(a) + BigInt(b), BigInt(a) - BigInt(b)]);
      const factor = a === 0 ? 0 : Math.trunc(sum / a);
      expect(BigInt(multiply(factor, a))).toBe(BigInt(factor) * BigInt(a));
      // -(factor * a) is not larger than sum and of its opposite sign
      expect(BigInt(multiplyAdd(sum, -factor, a))).toBe(BigInt(sum) - BigInt(factor) * BigInt(a));
    }), RUNS);
  });

  test('magnitude and clamp', () => {
    fc.assert(fc.property(wide, wide, wide, (value, a, b) => {
      expect(BigInt(magnitude(value))).toBe(value < 0 ? -BigInt(value) : BigInt(value));
      const [low, high] = a < b ? [a, b] : [b, a];
      expect(clamp(value, low, high)).toBe([low, value, high].sort((x, y) => x - y)[1]);
    }), RUNS);
  });
});

describe('wrapping pair', () => {
  const word = fc.oneof(fc.integer(), fc.constantFrom(-2147483648, 2147483647, -1, 0, 1));
  test('is addition and subtraction modulo 2^32, with sign', () => {
    fc.assert(fc.property(word, word, (a, b) => {
      expect(BigInt(addWrapping(a, b))).toBe(BigInt.asIntN(32, BigInt(a) + BigInt(b)));
      expect(BigInt(subtractWrapping(a, b))).toBe(BigInt.asIntN(32, BigInt(a) - BigInt(b)));
    }), RUNS);
  });
  test('one beyond the highest is the lowest, one below the lowest is the highest', () => {
    expect(addWrapping(2147483647, 1)).toBe(-2147483648);
    expect(subtractWrapping(-2147483648, 1)).toBe(2147483647);
    expect(subtractWrapping(0, -2147483648)).toBe(-2147483648);
  });
});
