/** Single parts of a made-up probe, without errors or noise; tests bend them to their needs. */
import {
  nominalUnit, type AmplifierUnit, type ConverterUnit, type CouplingUnit, type SensorUnit,
} from '../../../sim/hardware/draw.ts';
import { probeOf, quietProbe } from '../probes.ts';

const UNIT = nominalUnit(probeOf(quietProbe({ coupling: {} })));

export function sensorUnit(change: Partial<SensorUnit> = {}): SensorUnit {
  return { ...UNIT.sensor, bandwidth_kHz: 50, ...change };
}

export function amplifierUnit(change: Partial<AmplifierUnit> = {}): AmplifierUnit {
  return { ...UNIT.amplifier, gain: 1.5, bandwidth_kHz: 20, ...change };
}

export function converterUnit(change: Partial<ConverterUnit> = {}): ConverterUnit {
  return { ...UNIT.converter, bits: 12, ...change };
}

export function couplingUnit(change: Partial<CouplingUnit> = {}): CouplingUnit {
  return { loop_mm2: 0, slew_mV_per_V_per_ns: 0, ...change };
}

export const AT_HOME = {
  sensorCelsius: 25, amplifierCelsius: 25, converterCelsius: 25, thermometerCelsius: 25, supplyRatio: 1,
};
