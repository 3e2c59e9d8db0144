/** A made-up probe (test stand for tram door drives, +-30 A) that the hardware tests bend to their needs. */
import type { Toleranced } from '../../../sim/probe/describe.ts';
import type { CurrentSpec, Probe, Scenario } from '../../../sim/probe/fields.ts';

export function exact(nominal: number): Toleranced {
  return { nominal, tolerance: 0 };
}

export function standScenario(current: CurrentSpec, change: Partial<Scenario> = {}): Scenario {
  return {
    name: 'run', about: '', current, duration_ms: 10, judgeFrom_ms: 0, settle_ms: 0, temperature_C: 25, supply_V: null, events: [],
    ...change,
  };
}

export function standProbe(): Probe {
  return {
    name: 'door drive', about: '', range_A: 30, direction: 1, supply_V: exact(5),
    core: { gap_mm: exact(2), path_mm: exact(80), permeability: exact(2200), turns: 1 },
    sensor: {
      sensitivity_mV_per_mT: exact(50), sensitivityDrift_ppm_per_K: exact(0), rest_V: exact(2.5),
      restDrift_mV_per_K: exact(0), ratiometric: false, swingLow_V: exact(0.2), swingHigh_V: exact(4.8), bandwidth_kHz: exact(50),
      noise_uT_per_rtHz: exact(0), bias: 'steady', biasPhase_samples: 32, plateOffset_mT: exact(0),
    },
    amplifier: {
      gain: exact(1.5), virtualGround_V: exact(2.5), offset_mV: exact(0), railLow_V: exact(0), railHigh_V: exact(5),
      bandwidth_kHz: exact(20),
    },
    converter: {
      bits: 12, rate_kHz: 50, reference: 'fixed', reference_V: exact(5), format: 'offset binary', justified: 'right',
      word_bits: 16, noise_codes: exact(0),
    },
    thermometer: null, calibration: null, gridFactor: null, chain: [],
    scenarios: [], requirements: [],
  };
}
