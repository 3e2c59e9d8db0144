/**
 * Despike by sorting the last `window` samples of the record. Ahead of the record stands its first sample (primed) or
 * zero (from zero, which is settling while it is in the window).
 */
import { SETTLING, type DespikeConstants } from '../../../lib/index.ts';
import type { Oracle } from './record.ts';
import { lingerOracle } from './stays.ts';

export const despikeOracle: Oracle<DespikeConstants> = (constants, _unit, input) => {
  const { window, primed } = constants;
  const before = primed === 1 && input.length > 0 ? input[0].value : 0n;
  const history = [...new Array<bigint>(window - 1).fill(before), ...input.map((sample) => sample.value)];
  return lingerOracle(input, window - 1).map((sample, n) => {
    const sorted = history.slice(n, n + window).sort((a, b) => (a < b ? -1 : a > b ? 1 : 0));
    const filling = primed === 0 && n + 1 < window;
    return { ...sample, value: sorted[(window - 1) / 2], status: sample.status | (filling ? SETTLING : 0) };
  });
};
