/**
 * Scenarios that a study makes for itself: one current at one temperature, nothing else around. They are judged from
 * the time on at which a chain that has just been switched on gives readings to be relied on.
 */
import type { CurrentSpec, Probe, Scenario } from '../probe/fields.ts';
import { tune, type Tuned } from '../tuning/tune.ts';
import { chainMemory } from './memory.ts';

/** Settled to e^-14, less than a part in a million. */
const TIME_CONSTANTS = 14;

export interface Start {
  /** A zero at start-up has been taken or refused. */
  zeroSeconds: number;
  /** From then on until nothing of the start is left in the reading. */
  memorySeconds: number;
  /** Between two readings. */
  readingSeconds: number;
}

export function startOf(probe: Probe, tuned: Tuned = tune(probe)): Start {
  const rateHz = probe.converter.rate_kHz * 1e3;
  const { design } = tuned.constants;
  const firstZero = design.findIndex((stage) => stage.kind === 'zero' && stage.startMode === 1);
  const slowestHz = Math.min(...[probe.sensor.bandwidth_kHz, probe.amplifier.bandwidth_kHz].map(({ nominal }) => nominal * 1e3));
  const analogSeconds = TIME_CONSTANTS / (2 * Math.PI * slowestHz);
  const memorySeconds = analogSeconds + chainMemory(design, tuned.ratios) / rateHz;
  const zero = design[firstZero];
  // what is ahead of the zero has to fill before it begins to wait
  const zeroSeconds = zero?.kind !== 'zero' ? 0
    : memorySeconds + ((zero.settleSamples + zero.meanSamples) * (tuned.ratios[firstZero - 1] ?? 1)) / rateHz;
  return { zeroSeconds, memorySeconds, readingSeconds: tuned.ratios.at(-1)! / rateHz };
}

export function madeScenario(name: string, current: CurrentSpec, celsius: number, judgeFromSeconds: number, seconds: number): Scenario {
  return {
    name, about: '', current, duration_ms: seconds * 1e3, judgeFrom_ms: judgeFromSeconds * 1e3, settle_ms: 0, temperature_C: celsius,
    ambient: [], supply_V: null, supplySag_mV_per_s: 0, outerField_uT: 0, neighbour_A: 0, coil: null, events: [], long: false,
  };
}
