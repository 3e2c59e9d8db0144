/**
 * A piecewise-linear table over rising integer knots: exact at the knots, rounded between, held beyond both ends.
 * Bound: (|y difference| + 1) * x difference < 2^53, proved by checkTable.
 */
import { add, divideRound, multiply, subtract } from './arithmetic.ts';
import type { Problems } from './problems.ts';

export function interpolate(xs: readonly number[], ys: readonly number[], x: number): number {
  const last = xs.length - 1;
  if (x <= xs[0]) return ys[0];
  if (x >= xs[last]) return ys[last];
  let i = 0;
  while (x >= xs[i + 1]) i++;
  const rise = multiply(subtract(ys[i + 1], ys[i]), subtract(x, xs[i]));
  return add(ys[i], divideRound(rise, subtract(xs[i + 1], xs[i])));
}

/** Knots rising, as many x as y, every y within low..high, and the law of width. */
export function checkTable(
  problems: Problems, name: string, xs: readonly number[], ys: readonly number[], most: number, low: number, high: number,
): void {
  if (xs.length < 1 || xs.length > most || xs.length !== ys.length) {
    problems.add(name, xs.length, '1 to ' + most + ' knots, as many x as y', 'give both lists the same length');
    return;
  }
  for (let i = 0; i < xs.length; i++) {
    problems.integer(name + '.x', xs[i], -2147483648, 2147483647, 'keep it in 32 bits');
    problems.integer(name + '.y', ys[i], low, high, 'keep it in range');
    if (i > 0 && xs[i] <= xs[i - 1]) problems.add(name + '.x', xs[i], 'above ' + xs[i - 1], 'sort the knots');
    if (i > 0) {
      // the division that rounds needs one divisor more
      problems.width(name, (xs[i] - xs[i - 1]) * (1 + (ys[i] > ys[i - 1] ? ys[i] - ys[i - 1] : ys[i - 1] - ys[i])), 'set knots closer');
    }
  }
}
