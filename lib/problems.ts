/**
 * Collects what is wrong with a table of constants: stage, field, value, what is allowed, and the remedy.
 */
export interface ConstantsProblem {
  /** Index of the stage in the chain; -1 for the unit record. */
  stage: number;
  kind: string;
  field: string;
  value: number | string;
  allowed: string;
  remedy: string;
}

export class Problems {
  list: ConstantsProblem[];
  stage: number;
  kind: string;

  constructor() {
    this.list = [];
    this.stage = -1;
    this.kind = 'unit';
  }

  at(stage: number, kind: string): void {
    this.stage = stage;
    this.kind = kind;
  }

  add(field: string, value: number | string, allowed: string, remedy: string): void {
    this.list.push({ stage: this.stage, kind: this.kind, field: field, value: value, allowed: allowed, remedy: remedy });
  }

  /** true when the value is an integer of low..high; notes it otherwise. */
  integer(field: string, value: number, low: number, high: number, remedy: string): boolean {
    if (value >= low && value <= high && Math.floor(value) === value) return true;
    this.add(field, value, 'an integer from ' + low + ' to ' + high, remedy);
    return false;
  }

  /** The law of width: a magnitude that an intermediate value reaches must stay below 2^53. */
  width(field: string, reach: number, remedy: string): boolean {
    if (reach < 9007199254740992) return true;
    this.add(field, reach, 'a sum below 2^53 = 9007199254740992', remedy);
    return false;
  }
}

export function problemText(problem: ConstantsProblem): string {
  const where = problem.stage < 0 ? 'unit' : 'stage ' + (problem.stage + 1) + ' (' + problem.kind + ')';
  return where + ', ' + problem.field + ': ' + problem.value + ', allowed: ' + problem.allowed + '; ' + problem.remedy;
}
