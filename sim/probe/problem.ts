/**
 * What is wrong with a probe file, as a list: one problem has a place, what was found there, what is allowed, and
 * where it helps a hint. An engineer who mends a file wants the whole list at once, so one error carries all of it.
 * Tuning and the bench throw the same error for what only they can see.
 */
export interface Problem {
  /** Place in the file, such as `chain[3].corner_Hz`; empty: the file as a whole. */
  path: string;
  found: string;
  allowed: string;
  /** Empty when there is nothing to add. */
  hint: string;
}

export function problemLine(problem: Problem): string {
  const place = problem.path === '' ? 'the file as a whole' : problem.path;
  const hint = problem.hint === '' ? '' : `; ${problem.hint}`;
  return `  ${place}: found ${problem.found}, allowed ${problem.allowed}${hint}`;
}

export class ProbeError extends Error {
  override name = 'ProbeError';
  problems: Problem[];
  file: string | null;

  constructor(problems: Problem[], file: string | null = null) {
    const count = problems.length === 1 ? '1 problem' : `${problems.length} problems`;
    super([`${file ?? 'probe'}: ${count}`, ...problems.map(problemLine)].join('\n'));
    this.problems = problems;
    this.file = file;
  }
}

/** `sensor` and `gain` to `sensor.gain`; a name that is no plain word is quoted, so that a path stays readable. */
export function pathTo(parent: string, name: string | number): string {
  if (typeof name === 'number') return `${parent}[${name}]`;
  if (!/^[A-Za-z_$][\w$]*$/.test(name)) return `${parent}[${JSON.stringify(name)}]`;
  return parent === '' ? name : `${parent}.${name}`;
}
