/**
 * What the chain of a probe makes of steady codes: raw code -> reading and status, by running the integer chain of
 * nominal parts until nothing settles any more. The one place to look when offset, gain, sign or order are in doubt.
 * The stuck-code watch and the zero at start-up are off: steady codes trip the one and are refused by the other.
 */
import { Block, Chain, SETTLING } from '../../lib/index.ts';
import { nominalUnit } from '../hardware/draw.ts';
import { thermometerCode } from '../hardware/thermometer.ts';
import type { Probe, StageSpec } from '../probe/fields.ts';
import { codeSpan } from '../tuning/stages.ts';
import { tune } from '../tuning/tune.ts';

export interface CodeRow {
  code: number;
  amperes: number;
  status: number;
}

const BLOCK = 256;
const MOST_BLOCKS = 4096;

/** Ten codes: both ends, round shares between, and the three around the mid code. */
export function codeTable(probe: Probe): CodeRow[] {
  const tuned = tune({ ...probe, chain: probe.chain.map(forSteadyCodes) });
  const intake = tuned.constants.design[0];
  if (intake.kind !== 'intake') return [];
  const { lowest, highest } = codeSpan(probe);
  const eighth = (highest + 1 - lowest) / 8;
  const codes = [
    lowest, lowest + eighth, lowest + 2 * eighth, lowest + 3 * eighth, intake.midCode - 1, intake.midCode, intake.midCode + 1,
    lowest + 6 * eighth, lowest + 7 * eighth, highest,
  ];
  const temperatureCode = probe.thermometer === null ? 0 : thermometerCode(nominalUnit(probe).thermometer!, 25);
  return codes.map((code) => {
    const chain = new Chain(tuned.constants, tuned.makers);
    const block = new Block(BLOCK);
    const row = { code, amperes: NaN, status: 0 };
    for (let blocks = 0; blocks < MOST_BLOCKS; blocks++) {
      block.count = BLOCK;
      block.temperatureCode = temperatureCode;
      block.value.fill(code * 2 ** intake.justifyShift);
      block.status.fill(0);
      chain.process(block);
      if (block.count === 0) continue;
      const last = block.value[block.count - 1] / tuned.readingsPerAmpere;
      const status = block.status[block.count - 1];
      const steady = last === row.amperes && (status & SETTLING) === 0;
      row.amperes = last;
      row.status = status;
      if (steady && blocks > 16) break;
    }
    return row;
  });
}

function forSteadyCodes(spec: StageSpec): StageSpec {
  if (spec.stage === 'overRange') return { ...spec, stuckAfter_samples: 0 };
  if (spec.stage === 'zero') return { ...spec, atStart: false, tracking: false };
  return spec;
}
