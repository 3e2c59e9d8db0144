/** Scale as one exact rational number, rounded once, then held within the limit. */
import { CLAMPED, type ScaleConstants } from '../../../lib/index.ts';
import { roundDivide, type Oracle } from './record.ts';

export const scaleOracle: Oracle<ScaleConstants> = (constants, _unit, input) => {
  const limit = BigInt(constants.limit);
  return input.map((sample) => {
    const exact = roundDivide(sample.value * BigInt(constants.gain), 2n ** BigInt(constants.shift));
    if (exact > limit) return { ...sample, value: limit, status: sample.status | CLAMPED };
    if (exact < -limit) return { ...sample, value: -limit, status: sample.status | CLAMPED };
    return { ...sample, value: exact };
  });
};
