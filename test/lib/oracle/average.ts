/**
 * Average by its definition: the mean of the last `length` samples of the record, summed anew for every sample. Ahead
 * of the record stands its first sample (primed) or zero (from zero, which is settling while it is in the mean).
 */
import { SETTLING, type AverageConstants } from '../../../lib/index.ts';
import { roundDivide, type Oracle } from './record.ts';
import { lingerOracle } from './stays.ts';

export const averageOracle: Oracle<AverageConstants> = (constants, _unit, input) => {
  const { length, primed } = constants;
  const before = primed === 1 && input.length > 0 ? input[0].value : 0n;
  const history = [...new Array<bigint>(length).fill(before), ...input.map((sample) => sample.value)];
  return lingerOracle(input, length - 1).map((sample, n) => {
    const window = history.slice(n + 1, n + 1 + length);
    const sum = window.reduce((total, value) => total + value, 0n);
    const filling = primed === 0 && n + 1 < length;
    return { ...sample, value: roundDivide(sum, BigInt(length)), status: sample.status | (filling ? SETTLING : 0) };
  });
};
