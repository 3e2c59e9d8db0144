/** The verdict for machines: everything the terminal shows, with the cautions. */
import type { Verdict } from '../judging/prove.ts';
import { CAUTIONS, reachOfVerdict } from './caution.ts';

export function verdictJson(verdict: Verdict): string {
  const { seed, trial } = verdict;
  return JSON.stringify({ ...verdict, reach: reachOfVerdict(seed, trial), cautions: CAUTIONS }, null, 2);
}
