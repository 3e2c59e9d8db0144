/**
 * What the rules on several fields share: how a conflict is noted, and the comparisons that return in many of them.
 * A conflict names the other field and its value, because either of the two may be the mistaken one.
 */
import { withUnit } from './allowed.ts';
import { pathTo } from './problem.ts';

export type Note = (path: string, found: string, allowed: string, hint?: string) => void;

export interface Quantity {
  path: string;
  value: number;
  unit: string;
}

export function quantityText(quantity: Quantity): string {
  return `${quantity.path} (${withUnit(quantity.value, quantity.unit)})`;
}

export function mustBeBelow(note: Note, low: Quantity, high: Quantity): void {
  if (low.value >= high.value) note(low.path, withUnit(low.value, low.unit), `below ${quantityText(high)}`);
}

export function mustNotExceed(note: Note, low: Quantity, high: Quantity): void {
  if (low.value > high.value) note(low.path, withUnit(low.value, low.unit), `at most ${quantityText(high)}`);
}

export function mustLieWithin(note: Note, inner: Quantity, low: Quantity, high: Quantity): void {
  if (inner.value < low.value || inner.value > high.value) {
    note(inner.path, withUnit(inner.value, inner.unit), `${quantityText(low)} to ${quantityText(high)}`);
  }
}

/** Two things of one name: the later one is the problem. */
export function mustDiffer(note: Note, named: { path: string; name: string }[]): void {
  const first = new Map<string, string>();
  for (const { path, name } of named) {
    if (name === '') continue;
    const earlier = first.get(name);
    if (earlier === undefined) first.set(name, path);
    else note(path, JSON.stringify(name), `a name that nothing else has (${earlier} has this one)`);
  }
}

/** Values of one column of a table, each above the one before. */
export function mustAscend(note: Note, tablePath: string, column: string, unit: string, values: number[]): void {
  for (let row = 1; row < values.length; row++) {
    if (values[row] <= values[row - 1]) {
      const before: Quantity = { path: pathTo(pathTo(tablePath, row - 1), column), value: values[row - 1], unit };
      note(pathTo(pathTo(tablePath, row), column), withUnit(values[row], unit), `above ${quantityText(before)}`);
    }
  }
}
