/**
 * Feeds a record to a stage or chain in blocks: block lengths come from a list that is gone through again and again
 * (0 is an empty block), and a block also ends where the temperature code changes. Collects what comes out.
 */
import { Block } from '../../lib/index.ts';
import type { Sample } from './oracle/record.ts';

export interface Processor {
  process(block: Block): void;
}

export function feed(target: Processor, input: Sample[], lengths: readonly number[], afterBlock?: () =>
  void): Sample[] {
  const block = new Block(Math.max(1, ...lengths));
  const output: Sample[] = [];
  let turn = 0;
  for (let at = 0; at < input.length;) {
    const asked = lengths[turn++ % lengths.length];
    block.count = 0;
    block.temperatureCode = input[at].temperatureCode;
    while (block.count < asked && at < input.length && input[at].temperatureCode === block.temperatureCode) {
      const sample = input[at++];
      block.value[block.count] = Number(sample.value);
      block.status[block.count] = sample.status;
      block.temperature[block.count] = Number(sample.temperature);
      block.zero[block.count] = Number(sample.zero);
      block.count++;
    }
    target.process(block);
    for (let i = 0; i < block.count; i++) {
      output.push({
        value: BigInt(block.value[i]), status: block.status[i], temperatureCode: block.temperatureCode,
        temperature: BigInt(block.temperature[i]), zero: BigInt(block.zero[i]),
      });
    }
    afterBlock?.();
  }
  return output;
}

/** Throws, naming the first sample and lane that differ. */
export function expectSamples(actual: Sample[], expected: Sample[]): void {
  const shown = (sample: Sample | undefined) => sample === undefined ? 'nothing' :
    `value ${sample.value} status ${sample.status} temperature ${sample.temperature} zero ${sample.zero}`;
  for (let n = 0; n < Math.max(actual.length, expected.length); n++) {
    const a = actual[n];
    const b = expected[n];
    const same = a !== undefined && b !== undefined && a.value === b.value && a.status === b.status &&
      a.temperature === b.temperature && a.zero === b.zero && a.temperatureCode === b.temperatureCode;
    if (!same) throw new Error(`sample ${n}: got ${shown(a)}, expected ${shown(b)}`);
  }
}
