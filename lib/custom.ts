/**
 * A stage of the engineer's own. The constants record its name, version and integers; the code is handed to the chain
 * as a maker of that name and version. It must hold what every stage holds: integers only, cuts into blocks change
 * nothing, reset() equals new, |output| <= limit.
 */
import type { Flow } from './flow.ts';
import type { Problems } from './problems.ts';
import type { Stage } from './stage.ts';
import type { UnitConstants } from './unit.ts';

export interface CustomConstants {
  kind: 'custom';
  name: string;
  version: number;
  words: number[];
  limit: number;
}

export interface CustomMaker {
  name: string;
  version: number;
  make(words: readonly number[], unit: UnitConstants): Stage;
}

export function makeCustom(constants: CustomConstants, unit: UnitConstants, makers: readonly CustomMaker[]): Stage {
  for (let i = 0; i < makers.length; i++) {
    if (makers[i].name === constants.name && makers[i].version === constants.version) {
      return makers[i].make(constants.words, unit);
    }
  }
  throw new RangeError('custom stage ' + constants.name + ' version ' + constants.version + ': no maker was given for it');
}

export function checkCustom(c: CustomConstants, _unit: UnitConstants, flow: Flow, problems: Problems): void {
  flow.takeCounts(problems);
  if (c.name.length === 0) problems.add('name', c.name, 'a name', 'name the stage');
  problems.integer('version', c.version, 1, 65535, 'number its versions from 1');
  problems.integer('limit', c.limit, 1, 2147483647, 'the largest magnitude that it may give');
  for (let i = 0; i < c.words.length; i++) {
    problems.integer('words', c.words[i], -2147483648, 2147483647, 'keep it in 32 bits');
  }
  flow.give(problems, c.limit, 'lower the limit');
}
