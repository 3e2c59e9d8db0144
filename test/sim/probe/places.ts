/**
 * Places inside a probe object: all of them, reading one, changing one. Paths are written as in an error message.
 */
export type Step = string | number;

/** Every place of a tree of objects and lists, the root (an empty list of steps) first. */
export function placesIn(tree: unknown, steps: Step[] = []): Step[][] {
  if (typeof tree !== 'object' || tree === null) return [steps];
  const names: Step[] = Array.isArray(tree) ? [...tree.keys()] : Object.keys(tree);
  return [steps, ...names.flatMap((name) => placesIn((tree as never)[name], [...steps, name]))];
}

/** `chain[3].table[0].at_C` to its steps. */
export function stepsOf(path: string): Step[] {
  return [...path.matchAll(/([A-Za-z_$][\w$]*)|\[(\d+)\]/g)].map((match) => match[1] ?? Number(match[2]));
}

export function pathOf(steps: Step[]): string {
  return steps.map((step) => (typeof step === 'number' ? `[${step}]` : `.${step}`)).join('').replace(/^\./, '');
}

export function at(tree: unknown, path: string): unknown {
  return stepsOf(path).reduce<unknown>((part, step) => (part as never)[step], tree);
}

/** The tree itself, changed in one place; undefined takes the field away. */
export function put<T>(tree: T, place: string | Step[], value: unknown): T {
  const steps = typeof place === 'string' ? stepsOf(place) : place;
  if (steps.length === 0) return value as T;
  const parent = steps.slice(0, -1).reduce<any>((part, step) => part[step], tree);
  const last = steps[steps.length - 1];
  if (value === undefined && typeof last === 'string') delete parent[last];
  else parent[last] = value;
  return tree;
}
