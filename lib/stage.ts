/**
 * What every stage is. `state` holds its scalars in the order of `fields` (the order of the C struct), `ring` its
 * history; together they are the whole state, so saving and loading is copying. Fields named in `kept` survive a
 * power cycle. Construction ends with reset(); after reset() a stage cannot be told from a new one.
 */
import type { Block } from './block.ts';

export interface Stage {
  kind: string;
  fields: readonly string[];
  kept: readonly string[];
  state: Float64Array;
  ring: Int32Array;
  reset(): void;
  /** Works through the block in place; never throws, never allocates. */
  process(block: Block): void;
  /** The stage in one line: what it is set to, delay, gain, memory. */
  describe(): string;
}

/** The state as a plain table of integers: scalars in the order of `fields`, then the ring. */
export function saveState(stage: Stage): number[] {
  const table: number[] = [];
  for (let i = 0; i < stage.state.length; i++) table.push(stage.state[i] + 0); // + 0: no negative zero
  for (let i = 0; i < stage.ring.length; i++) table.push(stage.ring[i]);
  return table;
}

/** Loads what saveState gave; RangeError when the length does not fit this stage. */
export function loadState(stage: Stage, table: readonly number[]): void {
  const scalars = stage.state.length;
  if (table.length !== scalars + stage.ring.length) {
    throw new RangeError('state of ' + stage.kind + ': expected ' + (scalars + stage.ring.length) + ' words, got ' + table.length);
  }
  for (let i = 0; i < scalars; i++) stage.state[i] = table[i];
  for (let i = 0; i < stage.ring.length; i++) stage.ring[i] = table[scalars + i];
}

/** Power off and on: reset, but the kept fields come back as they were. */
export function powerCycle(stage: Stage): void {
  const before = saveState(stage);
  stage.reset();
  for (let k = 0; k < stage.kept.length; k++) {
    for (let i = 0; i < stage.fields.length; i++) {
      if (stage.fields[i] === stage.kept[k]) stage.state[i] = before[i];
    }
  }
}

export function clearState(stage: Stage): void {
  for (let i = 0; i < stage.state.length; i++) stage.state[i] = 0;
  for (let i = 0; i < stage.ring.length; i++) stage.ring[i] = 0;
}
