/**
 * The straight line from current to code that nominal parts have: what tuning may know of the hardware.
 *   code = restCode + codesPerAmpere * current   at 25 °C and nominal supply, in the numbers of the converter's format
 * It is the tangent at zero current: magnetic memory, the sensor's third order and the bow of the converter bend the
 * real curve away from it, and the slope of the bow at rest is in it. Sensor, amplifier and converter have one
 * temperature here.
 * codesPerAmpere is negative when the amplifier inverts. A switched bias that is demodulated removes what lies behind
 * the Hall plate: an offset over temperature is then what demodulation leaves of it.
 */
import type { Probe } from '../probe/fields.ts';
import { amplifierVolts } from './amplifier.ts';
import { bowCodes, converterLine, formatOffset } from './converter.ts';
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
  const surroundings = { sensorCelsius: celsius, converterCelsius: celsius, supplyRatio: 1 };
  const fieldTeslaPerAmpere = teslaPerAmpere(unit.core);
  const line = sensorLine(unit.sensor, surroundings);
  const amplifierRestVolts = amplifierVolts(unit.amplifier, line.restVolts, celsius);
  const { codesPerVolt: straight, offsetCodes } = converterLine(unit.converter, surroundings);
  const restOnLine = amplifierRestVolts * straight + offsetCodes;
  const codesPerVolt = straight * (1 + bowSlope(unit, restOnLine));
  const codesPerTesla = line.voltsPerTesla * unit.amplifier.gain * codesPerVolt;
  return {
    fieldTeslaPerAmpere,
    sensorVoltsPerTesla: line.voltsPerTesla,
    sensorVoltsPerAmpere: line.voltsPerTesla * fieldTeslaPerAmpere,
    sensorRestVolts: line.restVolts,
    amplifierRestVolts,
    codesPerVolt,
    codesPerAmpere: codesPerTesla * fieldTeslaPerAmpere,
    restCode: restOnLine + bowCodes(unit.converter, restOnLine) - formatOffset(unit.converter),
    plateCodes: unit.sensor.bias === 'reversal' ? codesPerTesla * unit.sensor.plateOffset_mT * 1e-3 : 0,
  };
}

/** Exact for the parabola of the bow wherever both points are between its ends. */
function bowSlope({ converter }: Unit, codes: number): number {
  return (bowCodes(converter, codes + 1) - bowCodes(converter, codes - 1)) / 2;
}
