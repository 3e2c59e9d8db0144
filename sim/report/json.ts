/** The verdict for machines: everything the terminal shows, with the cautions. */
import type { Verdict } from '../judging/prove.ts';
import { CAUTIONS, reachOfVerdict } from './caution.ts';

export function verdictJson(verdict: Verdict): string {
  return JSON.stringify({ ...verdict, reach: reachOfVerdict(verdict), cautions: CAUTIONS }, null, 2);
}
