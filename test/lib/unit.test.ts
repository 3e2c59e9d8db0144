/**
 * The unit record: its words and back, its CRC against the catalogue of parametrised CRC algorithms (G. Cook,
 * CRC-32/ISO-HDLC) and against polynomial division, and refusal of records that are damaged, swapped or old.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  checkUnit, crcOfWords, Problems, UNIT_KNOTS, UNIT_VERSION, UNIT_WORDS, UNITY_Q24, unitCrc, unitFromWords, unitWords,
  type UnitConstants,
} from '../../lib/index.ts';
import { edgy, unitOf } from './records.ts';

/** CRC-32/ISO-HDLC by its definition: the remainder of the message over GF(2), bits reflected in and out. */
function crcByDivision(bytes: readonly number[]): number {
  const polynomial = 0x104c11db7n;
  const bits = bytes.flatMap((byte) => Array.from({ length: 8 }, (_, i) => (byte >> i) & 1));
  // 32 zero bits behind the message, and its first 32 bits (of both together) inverted
  const message = [...bits, ...new Array<number>(32).fill(0)].map((bit, i) => (i < 32 ? bit ^ 1 : bit));
  let rest = 0n;
  for (const bit of message) {
    rest = rest * 2n + BigInt(bit);
    if (rest >= 0x100000000n) rest ^= polynomial;
  }
  const reflected = [...rest.toString(2).padStart(32, '0')].reverse().join('');
  return Number(BigInt.asIntN(32, BigInt(`0b${reflected}`) ^ 0xffffffffn));
}

const bytesOf = (words: readonly number[]) => words.flatMap((word) => [0, 8, 16, 24].map((at) => (word >> at) & 255));
const wordsOf = (bytes: readonly number[]) => Array.from({ length: bytes.length / 4 }, (_, i) =>
  bytes[4 * i] | bytes[4 * i + 1] << 8 | bytes[4 * i + 2] << 16 | bytes[4 * i + 3] << 24);
const signed = (crc: number) => crc | 0;

describe('CRC-32 of words, least significant byte first', () => {
  // check values of the catalogue and of its other published test strings
  test.each<[string, number[], number]>([
    ['nothing', [], 0x00000000],
    ['32 bytes 0x00', new Array(32).fill(0), 0x190a55ad],
    ['32 bytes 0xFF', new Array(32).fill(255), 0xff6cab0b],
    ['bytes 0 to 255', Array.from({ length: 256 }, (_, i) => i), 0x29058c73],
  ])('of %s', (_name, bytes, crc) => {
    const words = wordsOf(bytes);
    expect(crcOfWords(words, words.length)).toBe(signed(crc));
    expect(crcByDivision(bytes)).toBe(signed(crc));
  });

  test('the division it is compared with gives the catalogue check value of "123456789"', () => {
    expect(crcByDivision([...'123456789'].map((letter) => letter.charCodeAt(0)))).toBe(signed(0xcbf43926));
  });

  test('equals polynomial division for any words', () => {
    const word = fc.oneof(fc.integer(), fc.constantFrom(0, -1, 1, -2147483648, 2147483647));
    fc.assert(fc.property(fc.array(word, { maxLength: 75 }), (words) => {
      expect(crcOfWords(words, words.length)).toBe(crcByDivision(bytesOf(words)));
    }), { numRuns: 300 });
  });

  test('is over the first `count` words only', () => {
    expect(crcOfWords([5, 6, 7], 2)).toBe(crcOfWords([5, 6], 2));
  });
});

const knots = (low: number, high: number) => fc.uniqueArray(edgy(-2147483648, 2147483647), {
  minLength: 1, maxLength: UNIT_KNOTS,
}).chain((xs) => fc.tuple(
  fc.constant([...xs].sort((a, b) => a - b)), fc.array(edgy(low, high), { minLength: xs.length, maxLength: xs.length }),
));

const units = fc.record({
  sign: fc.constantFrom(1, -1), factoryZero: edgy(-2147483647, 2147483647), gainQ24: edgy(4194304, 67108864),
  offsets: knots(-2147483647, 2147483647), gains: knots(4194304, 67108864),
}).map((d) => unitOf({
  sign: d.sign, factoryZero: d.factoryZero, gainQ24: d.gainQ24, offsetTemperatures: d.offsets[0], offsets: d.offsets[1],
  gainTemperatures: d.gains[0], gainsQ24: d.gains[1],
}));

describe('unit record', () => {
  test('is 71 words in the stated order, unused knots 0, and its CRC last', () => {
    const unit = unitOf({
      sign: -1, factoryZero: 17, gainQ24: 5000000, offsetTemperatures: [-256, 512], offsets: [3, -4],
      gainTemperatures: [1], gainsQ24: [16777216],
    });
    const zeros = (count: number) => new Array<number>(count).fill(0);
    const body = [
      1, -1, 17, 5000000, 2, -256, 512, ...zeros(14), 3, -4, ...zeros(14), 1, 1, ...zeros(15), 16777216, ...zeros(15),
    ];
    expect(body).toHaveLength(70);
    expect(unitWords(unit)).toEqual([...body, crcByDivision(bytesOf(body))]);
  });

  test('written and read again is the same record, in words of 32 bits', () => {
    fc.assert(fc.property(units, (unit) => {
      const words = unitWords(unit);
      expect(words).toHaveLength(UNIT_WORDS);
      expect(words.every((word) => (word | 0) === word)).toBe(true);
      expect(unitFromWords([...Int32Array.from(words)])).toEqual(unit);
    }), { numRuns: 300 });
  });

  test('with any one bit damaged is refused', () => {
    fc.assert(fc.property(units, fc.nat(UNIT_WORDS - 1), fc.nat(31), (unit, at, bit) => {
      const words = unitWords(unit);
      words[at] ^= 1 << bit;
      expect(() => unitFromWords(words)).toThrow(RangeError);
    }), { numRuns: 1000 });
  });

  test('with a bit of each word damaged in turn is refused, those of unused knots included', () => {
    const words = unitWords(unitOf());
    for (let at = 0; at < UNIT_WORDS; at++) {
      const damaged = words.map((word, i) => (i === at ? word ^ 4 : word));
      expect(() => unitFromWords(damaged), `word ${at}`).toThrow(RangeError);
    }
  });

  test('with two different words swapped is refused', () => {
    fc.assert(fc.property(units, fc.nat(UNIT_WORDS - 1), fc.nat(UNIT_WORDS - 1), (unit, a, b) => {
      const words = unitWords(unit);
      fc.pre(words[a] !== words[b]);
      [words[a], words[b]] = [words[b], words[a]];
      expect(() => unitFromWords(words)).toThrow(RangeError);
    }), { numRuns: 1000 });
  });

  test.each<[string, (words: number[]) => number[], string]>([
    ['a word short', (words) => words.slice(1), 'expected 71 words, got 70'],
    ['a word long', (words) => [...words, 0], 'expected 71 words, got 72'],
    ['of version 0', (words) => [0, ...words.slice(1)], 'expected version 1, got 0'],
    ['of version 2', (words) => [2, ...words.slice(1)], 'expected version 1, got 2'],
    ['without offset knots', (words) => words.with(4, 0), 'expected 1 to 16 knots, got 0 and 1'],
    ['with 17 offset knots', (words) => words.with(4, 17), 'expected 1 to 16 knots, got 17 and 1'],
    ['without gain knots', (words) => words.with(37, 0), 'expected 1 to 16 knots, got 1 and 0'],
    ['with 17 gain knots', (words) => words.with(37, 17), 'expected 1 to 16 knots, got 1 and 17'],
    ['with the CRC of another', (words) => words.with(2, 9), 'does not match its words'],
  ])('%s is refused', (_name, spoil, message) => {
    expect(() => unitFromWords(spoil(unitWords(unitOf())))).toThrow(RangeError);
    expect(() => unitFromWords(spoil(unitWords(unitOf())))).toThrow(message);
  });

  test('with something in an unused knot is refused even with the CRC of its words', () => {
    const words = unitWords(unitOf()).with(6, 1);
    expect(() => unitFromWords(words.with(70, crcOfWords(words, 70))))
      .toThrow('expected 0 in the words of unused knots');
  });

  test('of an old version is refused even with the CRC of its words', () => {
    const words = unitWords(unitOf({ version: 0 }));
    expect(words[70]).toBe(crcOfWords(words, 70));
    expect(() => unitFromWords(words)).toThrow('expected version 1, got 0');
  });
});

function problemsOfUnit(unit: UnitConstants): Problems['list'] {
  const problems = new Problems();
  checkUnit(unit, problems);
  return problems.list;
}

describe('a unit is refused', () => {
  test('nothing in order, and any unit drawn within its ranges but for too steep tables', () => {
    expect(problemsOfUnit(unitOf())).toEqual([]);
    fc.assert(fc.property(units, (unit) => {
      expect(problemsOfUnit(unit).filter(({ remedy }) => remedy !== 'set knots closer')).toEqual([]);
    }), { numRuns: 300 });
  });

  test.each<[string, Partial<UnitConstants>, string]>([
    ['version 2', { version: UNIT_VERSION + 1 }, 'version'],
    ['sign 0', { sign: 0 }, 'sign'], ['sign 2', { sign: 2 }, 'sign'],
    ['factory zero -2^31', { factoryZero: -2147483648 }, 'factoryZero'],
    ['factory zero 2^31', { factoryZero: 2147483648 }, 'factoryZero'],
    ['half a count of factory zero', { factoryZero: 0.5 }, 'factoryZero'],
    ['gain below 1/4', { gainQ24: UNITY_Q24 / 4 - 1 }, 'gainQ24'],
    ['gain above 4', { gainQ24: 4 * UNITY_Q24 + 1 }, 'gainQ24'],
    ['no offset', { offsetTemperatures: [], offsets: [] }, 'offsets'],
    ['17 offsets', { offsetTemperatures: Array.from({ length: 17 }, (_, i) => i), offsets: new Array(17).fill(0) },
      'offsets'],
    ['offsets without temperature', { offsets: [0, 0] }, 'offsets'],
    ['falling temperatures', { gainTemperatures: [1, 0], gainsQ24: [UNITY_Q24, UNITY_Q24] }, 'gainsQ24.x'],
    ['an offset of -2^31', { offsets: [-2147483648] }, 'offsets.y'],
    ['a table gain below 1/4', { gainsQ24: [UNITY_Q24 / 4 - 1] }, 'gainsQ24.y'],
    ['a table gain above 4', { gainsQ24: [4 * UNITY_Q24 + 1] }, 'gainsQ24.y'],
  ])('%s', (_name, part, field) => {
    const list = problemsOfUnit(unitOf(part));
    expect(list.map((problem) => [problem.stage, problem.kind, problem.field])).toEqual([[-1, 'unit', field]]);
    expect(list[0].allowed.length > 0 && list[0].remedy.length > 0).toBe(true);
  });

  test('a CRC of other words', () => {
    expect(problemsOfUnit({ ...unitOf(), factoryZero: 1 })).toMatchObject([{ field: 'crc', stage: -1 }]);
    const unit = unitOf();
    expect(problemsOfUnit({ ...unit, crc: unitCrc(unit) ^ 1 })).toMatchObject([{ field: 'crc' }]);
  });

  test('the ends of every range are taken', () => {
    expect(problemsOfUnit(unitOf({ sign: -1, factoryZero: 2147483647, gainQ24: 67108864, gainsQ24: [4194304] })))
      .toEqual([]);
    expect(problemsOfUnit(unitOf({ factoryZero: -2147483647, gainQ24: 4194304, gainsQ24: [67108864] }))).toEqual([]);
  });
});
