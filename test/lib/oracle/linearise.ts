/**
 * Linearise as a search among the knots and the line through two of them in its two-point form:
 * y = (y0 (x1 - x) + y1 (x - x0)) / (x1 - x0), rounded once. Beyond the ends the same line, or the end knot.
 */
import { CLAMPED, type LineariseConstants } from '../../../lib/index.ts';
import { roundDivide, type Oracle } from './record.ts';

export const lineariseOracle: Oracle<LineariseConstants> = (constants, _unit, input) => {
  const step = 2n ** BigInt(constants.gridBits);
  const knots = constants.knots.map((y, i) => ({ x: BigInt(constants.origin) + BigInt(i) * step, y: BigInt(y) }));
  const lowest = knots[0];
  const highest = knots[knots.length - 1];
  const limit = BigInt(constants.limit);
  return input.map((sample) => {
    const x = sample.value;
    const outside = x < lowest.x || x > highest.x;
    let y: bigint;
    let clamped = false;
    if (outside && constants.beyond === 0) {
      y = x < lowest.x ? lowest.y : highest.y;
      clamped = true;
    } else {
      const found = knots.findIndex((knot) => knot.x >= x);
      const right = found === -1 ? knots.length - 1 : Math.max(found, 1);
      const from = knots[right - 1];
      const to = knots[right];
      y = roundDivide(from.y * (to.x - x) + to.y * (x - from.x), step);
    }
    const held = y > limit ? limit : y < -limit ? -limit : y;
    return { ...sample, value: held, status: sample.status | (clamped || held !== y ? CLAMPED : 0) };
  });
};
