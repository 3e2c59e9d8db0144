/** Lingering bits against a search over the samples ahead. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  CLAMPED, linger, LINGER_FIELDS, LINGERING, OVER_RANGE, RAILED, SETTLING, STATUS_BITS, STUCK,
  type Block,
} from '../../lib/index.ts';
import { expectSamples, feed } from './feed.ts';
import { blockLengths, edgy, records, sampleOf } from './records.ts';
import { Tally } from './tally.ts';
import { lingerOracle } from './oracle/stays.ts';

const BITS = [OVER_RANGE, RAILED, CLAMPED, STUCK, SETTLING];

function lingering(memory: number, first = 0) {
  const state = new Float64Array(first + BITS.length);
  return { state, process: (block: Block) => linger(block, state, first, memory) };
}

const statuses = (memory: number, list: number[]) =>
  feed(lingering(memory), list.map((status) => sampleOf(0, { status })), [2]).map((s) => s.status);

describe('lingering', () => {
  const memories = fc.oneof(fc.nat(12), fc.integer({ min: 13, max: 100 }), edgy(0, 2147483647));

  test('equals a search over the last `memory` samples, however the record is cut', () => {
    const tally = new Tally(BITS.flatMap((bit) => [`${bit} stays`, `${bit} is over`]));
    fc.assert(fc.property(memories, records(10, 0, BITS), blockLengths, (memory, input, lengths) => {
      const target = lingering(memory, 3);
      const expected = lingerOracle(input, memory);
      expectSamples(feed(target, input, lengths, () => {
        for (const word of target.state) expect(Number.isSafeInteger(word)).toBe(true);
      }), expected);
      expect([...target.state.slice(0, 3)]).toEqual([0, 0, 0]);
      expected.forEach((sample, n) => {
        for (const bit of BITS) {
          tally.count(`${bit} stays`, (sample.status & ~input[n].status & bit) !== 0);
          tally.count(`${bit} is over`, n > 0 && (expected[n - 1].status & bit) !== 0 && (sample.status & bit) === 0);
        }
      });
    }), { numRuns: 400 });
    expect(tally.missing()).toEqual([]);
  });

  test('the lingering bits are the five that have a counter', () => {
    expect(BITS.reduce((all, bit) => all | bit, 0)).toBe(LINGERING);
    expect(LINGER_FIELDS).toHaveLength(BITS.length);
  });

  test.each(BITS)('bit %d stays for exactly `memory` samples', (bit) => {
    expect(statuses(3, [0, bit, 0, 0, 0, 0])).toEqual([0, bit, bit, bit, bit, 0]);
    expect(statuses(0, [bit, 0])).toEqual([bit, 0]);
    expect(statuses(1, [bit, 0, 0])).toEqual([bit, bit, 0]);
  });

  test('bits of different age do not lengthen each other', () => {
    expect(statuses(2, [OVER_RANGE, SETTLING, 0, 0, 0]))
      .toEqual([OVER_RANGE, OVER_RANGE | SETTLING, OVER_RANGE | SETTLING, SETTLING, 0]);
  });

  test('a bit seen again starts anew', () => {
    expect(statuses(2, [STUCK, 0, STUCK, 0, 0, 0])).toEqual([STUCK, STUCK, STUCK, STUCK, STUCK, 0]);
  });

  test('no other bit stays', () => {
    for (const bit of STATUS_BITS.filter((b) => (b & LINGERING) === 0)) expect(statuses(5, [bit, 0])).toEqual([bit, 0]);
  });
});
