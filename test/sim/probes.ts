/** Valid probes that tests bend to their needs: the demo probe without noise or tolerances, as plain data. */
import { DOOR_STAND } from '../../sim/demo/doorstand.ts';
import type { Probe } from '../../sim/probe/fields.ts';
import { validate } from '../../sim/probe/validate.ts';

export type Given = { [name: string]: unknown };

/** Hardware without noise, tolerance or drift; chain, scenarios and requirements as given. */
export function quietProbe(change: Given): Given {
  return {
    name: 'quiet', range_A: 30,
    core: { gap_mm: 2, path_mm: 80, permeability: 2200 },
    sensor: { sensitivity_mV_per_mT: 50, rest_V: 2.5, bandwidth_kHz: 2000 },
    amplifier: { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 2000 },
    converter: { bits: 16, rate_kHz: 40, reference_V: 5 },
    gridFactor: 8,
    chain: [{ stage: 'intake', guardBits: 4 }, { stage: 'scale' }],
    scenarios: [{ name: 'steady', current: { shape: 'dc', level_A: 10 }, duration_ms: 10 }],
    requirements: [{ measure: 'reading', scenario: 'steady', amperes: 1 }],
    ...change,
  };
}

export function probeOf(given: unknown): Probe {
  return validate(given).probe;
}

export function demoData(): typeof DOOR_STAND {
  return structuredClone(DOOR_STAND);
}

/** One code of the quiet probe, in amperes. */
export const QUIET_CODE_AMPERES = 5 / 65536 / (2 * 50 * 4e-4 * Math.PI / (2 + 80 / 2200));
