/** Both trims sample by sample from the tables, with nothing remembered between samples. */
import { CLAMPED, type GainTrimConstants, type OffsetTrimConstants } from '../../../lib/index.ts';
import { roundDivide, type Oracle, type Sample } from './record.ts';
import { tableOracle } from './table.ts';

function within(sample: Sample, exact: bigint, limit: bigint): Sample {
  if (exact > limit) return { ...sample, value: limit, status: sample.status | CLAMPED };
  if (exact < -limit) return { ...sample, value: -limit, status: sample.status | CLAMPED };
  return { ...sample, value: exact };
}

export const offsetTrimOracle: Oracle<OffsetTrimConstants> = (constants, unit, input) => input.map((sample) => {
  const offset = tableOracle(unit.offsetTemperatures, unit.offsets, sample.temperature);
  return within(sample, sample.value - offset, BigInt(constants.limit));
});

export const gainTrimOracle: Oracle<GainTrimConstants> = (constants, unit, input) => input.map((sample) => {
  const table = tableOracle(unit.gainTemperatures, unit.gainsQ24, sample.temperature);
  const gain = roundDivide(BigInt(unit.gainQ24) * table, 2n ** 24n);
  return within(sample, roundDivide(sample.value * gain, 2n ** 24n), BigInt(constants.limit));
});
