import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { checkIntake, Intake, type IntakeConstants } from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, evenly, sampleOf, unitOf } from './records.ts';
import { intakeOracle } from './oracle/intake.ts';

const cases = fc.record({
  bits: edgy(1, 24), signed: fc.constantFrom(0, 1), middle: fc.oneof(evenly(0, 1), fc.constantFrom(0, 0.5, 1)),
  justify: fc.oneof(fc.constantFrom(0, 32), edgy(0, 31)), guardBits: edgy(0, 20), sign: fc.constantFrom(1, -1),
}).map((d) => {
  const lowest = d.signed === 1 ? -(2 ** (d.bits - 1)) : 0;
  const justifyShift = Math.min(d.justify, 32 - d.bits);
  const midCode = lowest + Math.round(d.middle * (2 ** d.bits - 1));
  return {
    constants: {
      kind: 'intake' as const, bits: d.bits, signed: d.signed, justifyShift, midCode, guardBits: d.guardBits,
    },
    unit: unitOf({ sign: d.sign }),
    limit: 2147483647,
    around: Math.max(-2147483647, (midCode * 2 ** justifyShift) | 0),
  };
}).filter((c) => problemsOf(checkIntake, c.constants, c.unit, 2147483648, 'codes').length === 0);

describeStageLaws<IntakeConstants>({
  name: 'intake',
  make: (c, unit) => new Intake(c, unit),
  cases,
  oracle: intakeOracle,
  branches: ['offset binary', 'negative code', 'justified left', 'direction reversed', 'bits above the code',
    'mid code',
    'lowest code', 'highest code', 'full 32 bits'],
  observe(tally, c, input, output) {
    const { bits, signed, justifyShift, midCode, guardBits } = c.constants;
    const low = signed === 1 ? -(2n ** BigInt(bits - 1)) : 0n;
    input.forEach((sample, n) => {
      const code = BigInt(c.unit.sign) * output[n].value / 2n ** BigInt(guardBits) + BigInt(midCode);
      tally.count('offset binary', signed === 0);
      tally.count('negative code', code < 0n);
      tally.count('justified left', justifyShift === 32 - bits);
      tally.count('direction reversed', c.unit.sign === -1);
      tally.count('bits above the code', BigInt.asUintN(32, sample.value) >> BigInt(justifyShift + bits) !== 0n);
      tally.count('mid code', output[n].value === 0n);
      tally.count('lowest code', code === low);
      tally.count('highest code', code === low + 2n ** BigInt(bits) - 1n);
      tally.count('full 32 bits', justifyShift + bits === 32);
    });
  },
});

const GOOD: IntakeConstants = { kind: 'intake', bits: 12, signed: 0, justifyShift: 0, midCode: 2048, guardBits: 8 };
const taken = (part: Partial<IntakeConstants>, words: number[], sign = 1) =>
  feed(new Intake({ ...GOOD, ...part }, unitOf({ sign })), words.map((v) => sampleOf(v)), [2])
    .map((s) => Number(s.value));

describe('intake, by hand', () => {
  test('offset binary: counts from the mid code, 2^guardBits to a code', () => {
    expect(taken({}, [2048, 2049, 0, 4095])).toEqual([0, 256, -524288, 524032]);
  });
  test('two\'s complement: from 2^(bits-1) on a code is negative', () => {
    expect(taken({ signed: 1, midCode: 0, guardBits: 0 }, [2047, 2048, 4095, -1, -2048]))
      .toEqual([2047, -2048, -1, -1, -2048]);
  });
  test('a left-justified word is shifted down, whatever lies below the code or in its sign', () => {
    const left = { justifyShift: 20, guardBits: 0 };
    expect(taken(left, [2047 * 2 ** 20, 2047 * 2 ** 20 + 1048575, -2147483648, -1])).toEqual([-1, -1, 0, 2047]);
    expect(taken({ ...left, signed: 1, midCode: 0 }, [-2147483648, -1, 2147483647])).toEqual([-2048, -1, 2047]);
  });
  test('bits above the code are left out', () => {
    expect(taken({ guardBits: 0 }, [2048 + 4096, 2048 - 4096])).toEqual([0, 0]);
  });
  test('direction turns the counts round, not the code', () => {
    expect(taken({}, [2049, 0], -1)).toEqual([-256, 524288]);
  });
  test('a converter of 24 bits and 7 guard bits reaches 2^30 and no further', () => {
    const wide = { bits: 24, midCode: 8388608, guardBits: 7 };
    expect(taken(wide, [0, 16777215])).toEqual([-1073741824, 1073741696]);
  });
});

describe('intake refuses', () => {
  test('nothing in order', () => {
    expect(problemsOf(checkIntake, GOOD, unitOf(), 2147483648, 'codes')).toEqual([]);
  });
  test.each<[keyof IntakeConstants, number]>([
    ['bits', 0], ['bits', 25], ['bits', 11.5], ['signed', 2], ['signed', -1], ['justifyShift', -1],
    ['justifyShift', 21],
    ['guardBits', -1], ['guardBits', 21], ['midCode', -1], ['midCode', 4096], ['midCode', 0.5], ['bits', NaN],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkIntake, { ...GOOD, [field]: value }, unitOf(), 1, 'codes'), field);
  });
  test('a mid code outside two\'s complement, and takes its ends', () => {
    const signed = { ...GOOD, signed: 1 };
    expectRefusal(problemsOf(checkIntake, { ...signed, midCode: 2048 }, unitOf(), 1, 'codes'), 'midCode');
    expectRefusal(problemsOf(checkIntake, { ...signed, midCode: -2049 }, unitOf(), 1, 'codes'), 'midCode');
    expect(problemsOf(checkIntake, { ...signed, midCode: 2047 }, unitOf(), 1, 'codes')).toEqual([]);
    expect(problemsOf(checkIntake, { ...signed, midCode: -2048 }, unitOf(), 1, 'codes')).toEqual([]);
  });
  test('counts that reach 2^31, and takes one code less', () => {
    // farthest code 2048 away: 2^11 * 2^20 = 2^31; with mid code 2047 the farthest is 2048 away on the other side
    expectRefusal(problemsOf(checkIntake, { ...GOOD, guardBits: 20 }, unitOf(), 1, 'codes'), 'output');
    expectRefusal(problemsOf(checkIntake, { ...GOOD, guardBits: 20, midCode: 2047 }, unitOf(), 1, 'codes'), 'output');
    // two's complement with mid code -1: 2048 above, 2047 below
    expectRefusal(problemsOf(checkIntake, { ...GOOD, signed: 1, guardBits: 20, midCode: -1 }, unitOf(), 1, 'codes'),
      'output');
    expect(problemsOf(checkIntake, { ...GOOD, bits: 11, midCode: 1024, guardBits: 20 }, unitOf(), 1, 'codes'))
      .toEqual([]);
  });
  test.each(['samples', 'counts', 'reading'] as const)('what is no raw word: %s', (domain) => {
    expectRefusal(problemsOf(checkIntake, GOOD, unitOf(), 1, domain), 'order');
  });
});
