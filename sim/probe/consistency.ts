/**
 * What no single field can tell: rules that join fields of the hardware, the chain, the scenarios and the
 * requirements. They run on a file in which single fields may be broken; a broken number is NaN, a broken name or
 * choice is '', a broken list is empty (reading.ts). So every rule compares in the sense in which NaN is false, and
 * steps back where a list that it looks through is incomplete.
 */
import { chainConflicts } from './conflicts-chain.ts';
import { hardwareConflicts } from './conflicts-hardware.ts';
import { requirementConflicts } from './conflicts-requirements.ts';
import { scenarioConflicts } from './conflicts-scenarios.ts';
import type { Probe } from './fields.ts';
import type { Problem } from './problem.ts';

export function inconsistencies(probe: Probe): Problem[] {
  const problems: Problem[] = [];
  const note = (path: string, found: string, allowed: string, hint = ''): void => {
    problems.push({ path, found, allowed, hint });
  };
  hardwareConflicts(probe, note);
  chainConflicts(probe, note);
  scenarioConflicts(probe, note);
  requirementConflicts(probe, note);
  return problems;
}
