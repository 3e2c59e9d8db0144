/** A table as a search for the two knots around x and the two-point form of the line through them, rounded once. */
import { roundDivide } from './record.ts';

export function tableOracle(xs: readonly number[], ys: readonly number[], x: bigint): bigint {
  const below = xs.findLastIndex((knot) => BigInt(knot) <= x);
  const above = xs.findIndex((knot) => BigInt(knot) >= x);
  if (below === -1) return BigInt(ys[0]);
  if (above === -1) return BigInt(ys[ys.length - 1]);
  if (below === above) return BigInt(ys[below]);
  const [x0, x1, y0, y1] = [xs[below], xs[above], ys[below], ys[above]].map(BigInt);
  return roundDivide(y0 * (x1 - x) + y1 * (x - x0), x1 - x0);
}
