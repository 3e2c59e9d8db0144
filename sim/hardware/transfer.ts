/**
 * The straight line from current to code that nominal parts have: what tuning may know of the hardware.
 *   code = restCode + codesPerAmpere * current   at 25 °C and nominal supply, in the numbers of the converter's format
 * codesPerAmpere is negative when the amplifier inverts. A switched bias that is demodulated removes what lies behind
 * the Hall plate: an offset over temperature is then what demodulation leaves of it.
 */
import type { Probe } from '../probe/fields.ts';
import { amplifierVolts } from './amplifier.ts';
import { formatOffset, lsbVolts } from './converter.ts';
import { teslaPerAmpere } from './core.ts';
import { nominalUnit, type Unit } from './draw.ts';
import { REFERENCE_CELSIUS, sensorLine } from './sensor.ts';

export interface Transfer {
  fieldTeslaPerAmpere: number;
  sensorVoltsPerTesla: number;
  sensorVoltsPerAmpere: number;
  sensorRestVolts: number;
  amplifierRestVolts: number;
  codesPerVolt: number;
  codesPerAmpere: number;
  /** Not rounded; behind a switched bias the mean of its phases. */
  restCode: number;
  /** What a demodulated reading shows at zero current; 0 with a steady bias, where restCode holds everything. */
  plateCodes: number;
}

export function nominalTransfer(probe: Probe): Transfer {
  return transferOf(nominalUnit(probe), REFERENCE_CELSIUS);
}

/** Change of the code at zero current from 25 °C to `celsius`, as it arrives behind a demodulation if there is one. */
export function nominalOffsetCodes(probe: Probe, celsius: number): number {
  const here = nominalOffset(probe, celsius);
  return here - nominalOffset(probe, REFERENCE_CELSIUS);
}

/** Codes per ampere at `celsius` over those at 25 °C. */
export function nominalGain(probe: Probe, celsius: number): number {
  return transferOf(nominalUnit(probe), celsius).codesPerAmpere / nominalTransfer(probe).codesPerAmpere;
}

function nominalOffset(probe: Probe, celsius: number): number {
  const transfer = transferOf(nominalUnit(probe), celsius);
  return probe.sensor.bias === 'steady' ? transfer.restCode : transfer.plateCodes;
}

function transferOf(unit: Unit, celsius: number): Transfer {
  const fieldTeslaPerAmpere = teslaPerAmpere(unit.core);
  const line = sensorLine(unit.sensor, { celsius, supplyRatio: 1 });
  const amplifierRestVolts = amplifierVolts(unit.amplifier, line.restVolts);
  const codesPerVolt = 1 / lsbVolts(unit.converter, 1);
  const codesPerTesla = line.voltsPerTesla * unit.amplifier.gain * codesPerVolt;
  return {
    fieldTeslaPerAmpere,
    sensorVoltsPerTesla: line.voltsPerTesla,
    sensorVoltsPerAmpere: line.voltsPerTesla * fieldTeslaPerAmpere,
    sensorRestVolts: line.restVolts,
    amplifierRestVolts,
    codesPerVolt,
    codesPerAmpere: codesPerTesla * fieldTeslaPerAmpere,
    restCode: amplifierRestVolts * codesPerVolt - formatOffset(unit.converter),
    plateCodes: unit.sensor.bias === 'reversal' ? codesPerTesla * unit.sensor.plateOffset_mT * 1e-3 : 0,
  };
}
