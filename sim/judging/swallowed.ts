/**
 * The largest direct current that each zero of a chain may remove, in amperes, from the constants. A start-up zero is
 * taken wherever the mean lies within its window of the factory zero, so it may take a current as large as that
 * window; tracking follows a steady current up to its authority, as far as its own window lets it see one. A zero that
 * has drifted by d away from the factory zero lets a current of the other sign be larger by d: the nominal drift over
 * the temperatures of the scenarios is added, unless an offset trim takes it out ahead.
 */
import type { StageConstants } from '../../lib/index.ts';
import { nominalOffsetCodes, nominalTransfer } from '../hardware/transfer.ts';
import type { Probe } from '../probe/fields.ts';

export interface Swallowed {
  stage: number;
  /** 'button' is a zero that somebody asked for; the others are automatic. */
  by: 'start-up' | 'tracking' | 'button';
  amperes: number;
}

/** `driftAmperes`: see driftOf. */
export function swallowedOf(design: readonly StageConstants[], countsPerAmpere: number, driftAmperes: number): Swallowed[] {
  const list: Swallowed[] = [];
  design.forEach((stage, index) => {
    if (stage.kind !== 'zero') return;
    const window = stage.windowLimit / countsPerAmpere + driftAmperes;
    if (stage.startMode === 1) list.push({ stage: index, by: 'start-up', amperes: window });
    if (stage.trackMode === 1) {
      list.push({ stage: index, by: 'tracking', amperes: Math.min(stage.authority / countsPerAmpere, stage.trackWindow / countsPerAmpere + driftAmperes) });
    }
    if (stage.buttonMode === 1) list.push({ stage: index, by: 'button', amperes: window });
  });
  return list;
}

/** Largest nominal drift of the zero from the calibration temperature over the temperatures of the scenarios. */
export function driftOf(probe: Probe): number {
  if (probe.chain.some((spec) => spec.stage === 'offsetTrim')) return 0;
  const at = (celsius: number): number => nominalOffsetCodes(probe, celsius);
  const calibrated = at(probe.calibration?.at_C ?? 25);
  const temperatures = probe.scenarios.flatMap(({ temperature_C, ambient }) => [temperature_C, ...ambient.map((point) => point.temperature_C)]);
  const codes = Math.max(...temperatures.map((celsius) => Math.abs(at(celsius) - calibrated)));
  return codes / Math.abs(nominalTransfer(probe).codesPerAmpere);
}

/** What all automatic zeroing together may remove. */
export function swallowedAutomatically(list: readonly Swallowed[]): number {
  return list.filter((entry) => entry.by !== 'button').reduce((sum, entry) => sum + entry.amperes, 0);
}
