/**
 * The oracle of a whole chain: the composition of the oracles of its stages, found in the files beside this one by the
 * name of the kind (despike: `despikeOracle`). Gives the record behind every stage, so that the records of a meter
 * anywhere in the chain can be told from what it stood in.
 */
import { readdirSync } from 'node:fs';
import type { ChainConstants, StageConstants } from '../../../lib/index.ts';
import type { Oracle, Sample } from './record.ts';

type Kind = StageConstants['kind'];

export const KINDS: readonly Kind[] = [
  'intake', 'overRange', 'despike', 'demodulate', 'decimate', 'thermometer', 'offsetTrim', 'zero', 'gainTrim',
  'linearise',
  'sections', 'average', 'scale', 'meter',
];

const oracles = new Map<Kind, Oracle<never>>();
for (const file of readdirSync(import.meta.dirname).filter((name) => name !== 'chain.ts' && name !== 'record.ts')) {
  const exported = await import(new URL(file, import.meta.url).href) as Record<string, Oracle<never>>;
  for (const kind of KINDS) {
    const name = Object.keys(exported).find((word) => word.toLowerCase() === `${kind}oracle`.toLowerCase());
    if (name !== undefined) oracles.set(kind, exported[name]);
  }
}

export const kindsWithOracle: ReadonlySet<Kind> = new Set(oracles.keys());

/** The record behind each stage, in order. */
export function chainOracle({ design, unit }: ChainConstants, input: Sample[]): Sample[][] {
  const behind: Sample[][] = [];
  let record = input;
  for (const stage of design) {
    const oracle = oracles.get(stage.kind);
    if (oracle === undefined) throw new RangeError(`no oracle for ${stage.kind}`);
    record = oracle(stage as never, unit, record);
    behind.push(record);
  }
  return behind;
}
