/** A made-up probe (test stand for tram door drives, +-30 A) that the hardware tests bend to their needs. */
import type { Toleranced } from '../../../sim/probe/describe.ts';
import type { CurrentSpec, Probe, Scenario } from '../../../sim/probe/fields.ts';
import { probeOf, quietProbe } from '../probes.ts';

export function exact(nominal: number): Toleranced {
  return { nominal, tolerance: 0 };
}

export function standScenario(current: CurrentSpec, change: Partial<Scenario> = {}): Scenario {
  return {
    name: 'run', about: '', current, duration_ms: 10, judgeFrom_ms: 0, settle_ms: 0, temperature_C: 25, ambient: [],
    supply_V: null, supplySag_mV_per_s: 0, outerField_uT: 0, neighbour_A: 0, coil: null, events: [], long: false,
    ...change,
  };
}

const STAND = probeOf(quietProbe({
  name: 'door drive',
  sensor: { sensitivity_mV_per_mT: 50, rest_V: 2.5, bandwidth_kHz: 50 },
  coupling: {},
  amplifier: { gain: 1.5, virtualGround_V: 2.5, bandwidth_kHz: 20 },
  converter: { bits: 12, rate_kHz: 50, reference_V: 5 },
  thermometer: { element: 'linear' },
}));

/** Without chain, scenarios and requirements: the hardware only. Coupling and thermometer are left out. */
export function standProbe(): Probe {
  return {
    ...structuredClone(STAND), coupling: null, thermometer: null, gridFactor: null, chain: [], scenarios: [],
    requirements: [],
  };
}

/** The parts that standProbe leaves out, with default values. */
export function standCoupling(): NonNullable<Probe['coupling']> {
  return structuredClone(STAND.coupling!);
}

export function standThermometer(): NonNullable<Probe['thermometer']> {
  return structuredClone(STAND.thermometer!);
}
