/**
 * Keeps the lingering status bits of a sample until that sample has left a stage's memory: a bit seen at one sample
 * is set on the `memory` samples behind it as well. One counter a bit, at state[first .. first + 4], so that an
 * over-range and a settling of different age do not lengthen each other.
 */
import { CLAMPED, LINGERING, OVER_RANGE, RAILED, SETTLING, STUCK } from './status.ts';
import type { Block } from './block.ts';

export const LINGER_FIELDS = ['overRangeLeft', 'railedLeft', 'clampedLeft', 'stuckLeft', 'settlingLeft'];

export function linger(block: Block, state: Float64Array, first: number, memory: number): void {
  const status = block.status;
  const count = block.count;
  let overRangeLeft = state[first];
  let railedLeft = state[first + 1];
  let clampedLeft = state[first + 2];
  let stuckLeft = state[first + 3];
  let settlingLeft = state[first + 4];
  let left = overRangeLeft + railedLeft + clampedLeft + stuckLeft + settlingLeft;
  for (let i = 0; i < count; i++) {
    const s = status[i];
    if ((s & LINGERING) === 0 && left === 0) continue;
    overRangeLeft = s & OVER_RANGE ? memory + 1 : overRangeLeft;
    railedLeft = s & RAILED ? memory + 1 : railedLeft;
    clampedLeft = s & CLAMPED ? memory + 1 : clampedLeft;
    stuckLeft = s & STUCK ? memory + 1 : stuckLeft;
    settlingLeft = s & SETTLING ? memory + 1 : settlingLeft;
    let bits = s;
    if (overRangeLeft > 0) { bits |= OVER_RANGE; overRangeLeft--; }
    if (railedLeft > 0) { bits |= RAILED; railedLeft--; }
    if (clampedLeft > 0) { bits |= CLAMPED; clampedLeft--; }
    if (stuckLeft > 0) { bits |= STUCK; stuckLeft--; }
    if (settlingLeft > 0) { bits |= SETTLING; settlingLeft--; }
    left = overRangeLeft + railedLeft + clampedLeft + stuckLeft + settlingLeft;
    status[i] = bits;
  }
  state[first] = overRangeLeft;
  state[first + 1] = railedLeft;
  state[first + 2] = clampedLeft;
  state[first + 3] = stuckLeft;
  state[first + 4] = settlingLeft;
}
