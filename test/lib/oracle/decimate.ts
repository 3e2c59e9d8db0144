/**
 * Decimate as a convolution: `order` boxcars of `ratio` ones convolved with each other, laid over the whole record at
 * every ratio-th sample, divided once by the sum of the weights. Ahead of the record stands its first sample (primed)
 * or zero.
 */
import { LINGERING, SETTLING, type DecimateConstants } from '../../../lib/index.ts';
import { roundDivide, type Oracle } from './record.ts';

/** Impulse response: newest sample first (it is symmetric). */
export function boxcars(order: number, ratio: number): bigint[] {
  let weights = [1n];
  for (let n = 0; n < order; n++) {
    const wider = new Array<bigint>(weights.length + ratio - 1).fill(0n);
    weights.forEach((weight, i) => {
      for (let k = 0; k < ratio; k++) wider[i + k] += weight;
    });
    weights = wider;
  }
  return weights;
}

export const decimateOracle: Oracle<DecimateConstants> = (constants, _unit, input) => {
  const { order, ratio, primed } = constants;
  if (input.length < ratio) return [];
  const weights = boxcars(order, ratio);
  const before = primed === 1 ? input[0].value : 0n;
  const total = BigInt(ratio) ** BigInt(order);
  const ends = input.map((_, n) => n).filter((n) => (n + 1) % ratio === 0);
  return ends.map((n) => {
    const sum = weights.reduce((all, weight, k) => all + weight * (n >= k ? input[n - k].value : before), 0n);
    const states = input.slice(n + 1 - ratio, n + 1).reduce((all, past) => all | (past.status & ~LINGERING), 0);
    const within = input.slice(Math.max(0, n + 1 - weights.length), n + 1);
    const lingering = within.reduce((all, past) => all | (past.status & LINGERING), 0);
    const filling = primed === 0 && n + 1 < weights.length;
    return { ...input[n], value: roundDivide(sum, total), status: states | lingering | (filling ? SETTLING : 0) };
  });
};
