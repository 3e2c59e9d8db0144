/**
 * Langevin function L(x) = coth x - 1/x and its slope, to a few rounding errors everywhere.
 * Below 1 by its continued fraction x/(3 + x^2/(5 + x^2/(7 + ...))) (Gauss), because coth x - 1/x cancels there; eight
 * levels leave 2e-18. The slope there follows from it, L' = 1 - L^2 - 2 L/x; above 1 that would cancel, and
 * L' = 1/x^2 - 1/sinh^2 x does not.
 */
const LEVELS = 8;

export function langevin(x: number): number {
  const size = Math.abs(x);
  if (size < 1) return x * overX(x * x);
  const decay = Math.exp(-2 * size);
  const value = (1 + decay) / (1 - decay) - 1 / size;
  return x < 0 ? -value : value;
}

/** L'(x); `value` is L(x), which the caller has. */
export function langevinSlope(x: number, value: number): number {
  const size = Math.abs(x);
  if (size < 1) return 1 - value * value - 2 * (x === 0 ? 1 / 3 : value / x);
  const decay = Math.exp(-2 * size);
  return 1 / (x * x) - (4 * decay) / ((1 - decay) * (1 - decay));
}

/** L(x)/x from x^2, as one fraction: a single division. */
function overX(square: number): number {
  let above = 2 * LEVELS + 1;
  let below = 1;
  for (let odd = 2 * LEVELS - 1; odd >= 3; odd -= 2) {
    const next = odd * above + square * below;
    below = above;
    above = next;
  }
  return below / above;
}
