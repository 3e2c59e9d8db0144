/** Lingering bits by search: a sample carries every lingering bit of itself and of the `memory` samples ahead of it. */
import { LINGERING } from '../../../lib/index.ts';
import type { Sample } from './record.ts';

export function lingerOracle(input: Sample[], memory: number): Sample[] {
  return input.map((sample, n) => {
    const within = input.slice(Math.max(0, n - memory), n);
    return { ...sample, status: within.reduce((bits, past) => bits | (past.status & LINGERING), sample.status) };
  });
}
