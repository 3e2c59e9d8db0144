/**
 * The record that calibration writes into one unit: direction, factory zero, gain, and the tables over temperature.
 * A fixed record of UNIT_WORDS 32-bit words with version and CRC; nothing in it depends on the chain's layout.
 *
 * words: version, sign, factoryZero, gainQ24, offset knots (count, 16 temperatures, 16 offsets),
 *        gain knots (count, 16 temperatures, 16 gains Q24), CRC-32 of all words before, least significant byte first.
 * Temperatures are in 1/256 °C. CRC-32/ISO-HDLC (catalogue name; reflected polynomial 0xEDB88320).
 */
import { checkTable } from './table.ts';
import type { Problems } from './problems.ts';

export const UNIT_VERSION = 1;
export const UNIT_KNOTS = 16;
export const UNIT_WORDS = 71;
export const UNITY_Q24 = 16777216;

export interface UnitConstants {
  version: number;
  /** +1 or -1: direction of positive current. */
  sign: number;
  /** Counts, at the scale of intake, that stand for zero current. */
  factoryZero: number;
  gainQ24: number;
  offsetTemperatures: number[];
  offsets: number[];
  gainTemperatures: number[];
  gainsQ24: number[];
  crc: number;
}

/** The record as its words, CRC last. */
export function unitWords(unit: UnitConstants): number[] {
  const words = [unit.version, unit.sign, unit.factoryZero, unit.gainQ24];
  pushTable(words, unit.offsetTemperatures, unit.offsets);
  pushTable(words, unit.gainTemperatures, unit.gainsQ24);
  words.push(unit.crc);
  return words;
}

function pushTable(words: number[], xs: readonly number[], ys: readonly number[]): void {
  words.push(xs.length);
  for (let i = 0; i < UNIT_KNOTS; i++) words.push(i < xs.length ? xs[i] : 0);
  for (let i = 0; i < UNIT_KNOTS; i++) words.push(i < ys.length ? ys[i] : 0);
}

/** Reads what unitWords wrote; RangeError when length, version, counts or CRC are wrong. */
export function unitFromWords(words: readonly number[]): UnitConstants {
  if (words.length !== UNIT_WORDS) throw new RangeError('unit record: expected ' + UNIT_WORDS + ' words, got ' + words.length);
  if (words[0] !== UNIT_VERSION) throw new RangeError('unit record: expected version ' + UNIT_VERSION + ', got ' + words[0]);
  const gainStart = 5 + 2 * UNIT_KNOTS;
  const offsetCount = words[4];
  const gainCount = words[gainStart];
  if (offsetCount < 1 || offsetCount > UNIT_KNOTS || gainCount < 1 || gainCount > UNIT_KNOTS) {
    throw new RangeError('unit record: expected 1 to ' + UNIT_KNOTS + ' knots, got ' + offsetCount + ' and ' + gainCount);
  }
  const unit: UnitConstants = {
    version: words[0], sign: words[1], factoryZero: words[2], gainQ24: words[3],
    offsetTemperatures: copyOf(words, 5, offsetCount), offsets: copyOf(words, 5 + UNIT_KNOTS, offsetCount),
    gainTemperatures: copyOf(words, gainStart + 1, gainCount),
    gainsQ24: copyOf(words, gainStart + 1 + UNIT_KNOTS, gainCount),
    crc: words[UNIT_WORDS - 1],
  };
  if (crcOfWords(words, UNIT_WORDS - 1) !== unit.crc) {
    throw new RangeError('unit record: CRC ' + unit.crc + ' does not match its words');
  }
  if (unitCrc(unit) !== unit.crc) throw new RangeError('unit record: expected 0 in the words of unused knots');
  return unit;
}

function copyOf(words: readonly number[], first: number, count: number): number[] {
  const copy: number[] = [];
  for (let i = 0; i < count; i++) copy.push(words[first + i]);
  return copy;
}

/** CRC-32 over 32-bit words, least significant byte first, as a signed 32-bit number. */
export function crcOfWords(words: readonly number[], count: number): number {
  let crc = -1;
  for (let i = 0; i < count; i++) {
    for (let byte = 0; byte < 4; byte++) {
      crc ^= (words[i] >> (8 * byte)) & 255;
      for (let bit = 0; bit < 8; bit++) crc = crc & 1 ? (crc >>> 1) ^ -306674912 : crc >>> 1;
    }
  }
  return crc ^ -1;
}

export function unitCrc(unit: UnitConstants): number {
  return crcOfWords(unitWords(unit), UNIT_WORDS - 1);
}

export function checkUnit(unit: UnitConstants, problems: Problems): void {
  if (unit.version !== UNIT_VERSION) problems.add('version', unit.version, '' + UNIT_VERSION, 'write the record anew');
  if (unit.sign !== 1 && unit.sign !== -1) problems.add('sign', unit.sign, '1 or -1', 'set the direction');
  problems.integer('factoryZero', unit.factoryZero, -2147483647, 2147483647, 'calibrate the zero anew');
  // 2^22 .. 2^26: a gain of 1/4 to 4
  problems.integer('gainQ24', unit.gainQ24, 4194304, 67108864, 'a gain from 1/4 to 4');
  checkTable(problems, 'offsets', unit.offsetTemperatures, unit.offsets, UNIT_KNOTS, -2147483647, 2147483647);
  checkTable(problems, 'gainsQ24', unit.gainTemperatures, unit.gainsQ24, UNIT_KNOTS, 4194304, 67108864);
  if (unit.crc !== unitCrc(unit)) problems.add('crc', unit.crc, '' + unitCrc(unit), 'write the record with its CRC');
}
