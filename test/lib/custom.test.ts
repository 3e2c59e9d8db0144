import { describe, expect, test } from 'vitest';
import { Block, Chain, checkConstants, type ChainConstants, type CustomConstants, type CustomMaker, type Stage } from '../../lib/index.ts';
import { unitOf } from './records.ts';

/** A stage that adds a constant. */
function adding(value: number): Stage {
  return {
    kind: 'custom', fields: [], kept: [], state: new Float64Array(0), ring: new Int32Array(0), reset() {}, describe: () => `adds ${value}`,
    process(block: Block) {
      for (let i = 0; i < block.count; i++) block.value[i] += value;
    },
  };
}

const maker = (name: string, version: number, value: number): CustomMaker => ({ name, version, make: ([word]) => adding(value + (word ?? 0)) });

const INTAKE = { kind: 'intake' as const, bits: 12, signed: 0, justifyShift: 0, midCode: 2048, guardBits: 0 };

function chainOf(...custom: Partial<CustomConstants>[]): ChainConstants {
  return { design: [INTAKE, ...custom.map((one) => ({ kind: 'custom' as const, name: 'a', version: 1, words: [], limit: 10000, ...one }))], unit: unitOf() };
}

function outOf(constants: ChainConstants, makers: CustomMaker[]): number {
  const block = new Block(1);
  block.count = 1;
  block.value[0] = 2048;
  new Chain(constants, makers).process(block);
  return block.value[0];
}

describe('a stage of the engineer\'s own', () => {
  test('is made by the maker of its name and version, with its words', () => {
    const makers = [maker('a', 1, 100), maker('a', 2, 200), maker('b', 1, 300)];
    expect(outOf(chainOf({ name: 'a', version: 2, words: [7] }), makers)).toBe(207);
    expect(outOf(chainOf({ name: 'b' }, { name: 'a' }), makers)).toBe(400);
  });

  test('without a maker of its name and version is refused', () => {
    expect(() => new Chain(chainOf({ version: 3 }), [maker('a', 1, 0)])).toThrow(/custom stage a version 3/);
    expect(() => new Chain(chainOf({}))).toThrow(RangeError);
  });

  test('is believed to give no more than its limit: the stages behind prove their bounds with it', () => {
    expect(checkConstants(chainOf({ limit: 777 })).limits).toEqual([2048, 777]);
  });

  test.each([['name', { name: '' }], ['version', { version: 0 }], ['limit', { limit: 0 }], ['words', { words: [2 ** 31] }]])(
    'with a wrong %s is refused with field and remedy', (field, change) => {
      const [problem] = checkConstants(chainOf(change)).problems;
      expect(problem).toMatchObject({ stage: 1, kind: 'custom', field });
      expect(problem.remedy).not.toBe('');
    });
});
