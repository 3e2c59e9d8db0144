/** What is wrong with a probe; an empty list for a valid one. */
import { ProbeError, type Problem } from '../../../sim/probe/problem.ts';
import { validate } from '../../../sim/probe/validate.ts';

export function problemsOf(given: unknown): Problem[] {
  try {
    validate(given);
  } catch (error) {
    if (error instanceof ProbeError) return error.problems;
    throw error;
  }
  return [];
}
