/**
 * Thermometer: a sample with a broken code looks back for the last good one and how long ago it was. The low-pass is
 * its law run over BigInt from an endless past at the first target.
 */
import { THERMOMETER_BROKEN, type ThermometerConstants } from '../../../lib/index.ts';
import { floorDivide, type Oracle, type Sample } from './record.ts';
import { tableOracle } from './table.ts';

/** What the low-pass is to follow, sample by sample. */
export function targets(c: ThermometerConstants, input: Sample[]): bigint[] {
  const good = (sample: Sample) => sample.temperatureCode >= c.lowCode && sample.temperatureCode <= c.highCode;
  return input.map((_, n) => {
    const last = input.findLastIndex((sample, k) => k <= n && good(sample));
    if (last === -1 || n - last > c.holdSamples) return BigInt(c.fallback);
    return tableOracle(c.codes, c.temperatures, BigInt(input[last].temperatureCode));
  });
}

export const thermometerOracle: Oracle<ThermometerConstants> = (constants, _unit, input) => {
  const span = 2n ** BigInt(constants.shift);
  const followed = targets(constants, input);
  const sums: bigint[] = [];
  return input.map((sample, n) => {
    const before = n === 0 ? followed[0] * span : sums[n - 1];
    sums.push(before - floorDivide(before, span) + followed[n]);
    const { temperatureCode: code } = sample;
    const broken = code < constants.lowCode || code > constants.highCode;
    return {
      ...sample, temperature: floorDivide(sums[n], span),
      status: sample.status | (broken ? THERMOMETER_BROKEN : 0),
    };
  });
};
