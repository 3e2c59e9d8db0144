/**
 * Non-negative least squares from its normal equations: the x >= 0 that makes x'Ax/2 - b'x least, A symmetric and
 * positive definite. One coordinate after the other is set to its own best value, or to 0; for such an A this
 * converges to the one solution, at which A x - b is 0 where x > 0 and not negative where x = 0 (Karush, Kuhn,
 * Tucker). Source: C. L. Lawson, R. J. Hanson, "Solving Least Squares Problems", ch. 23 states the problem and test.
 */
const MOST_SWEEPS = 4000;

/** Ends when no coordinate moves by more than this share of the largest. */
const STILL = 1e-10;

export function nonNegativeLeastSquares(matrix: readonly Float64Array[], right: Float64Array): Float64Array {
  const n = right.length;
  const x = new Float64Array(n);
  for (let sweep = 0; sweep < MOST_SWEEPS; sweep++) {
    let largest = 0;
    let moved = 0;
    for (let i = 0; i < n; i++) {
      const row = matrix[i];
      if (!(row[i] > 0)) continue;
      let pull = right[i];
      for (let j = 0; j < n; j++) pull -= row[j] * x[j];
      const next = Math.max(0, x[i] + pull / row[i]);
      moved = Math.max(moved, Math.abs(next - x[i]));
      largest = Math.max(largest, next);
      x[i] = next;
    }
    if (moved <= STILL * largest) break;
  }
  return x;
}
