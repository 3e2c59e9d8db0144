/**
 * The unit record: from nominal parts, or from what the factory measured on one unit at listed points. Tables over
 * temperature have the points of the probe file, or for the nominal drift of the hardware 16 knots between the
 * thermometer's ends; without a thermometer stage they have one knot.
 */
import { UNIT_KNOTS, UNIT_VERSION, UNITY_Q24, unitCrc, type UnitConstants } from '../../lib/index.ts';
import { nominalGain, nominalOffsetCodes, nominalTransfer } from '../hardware/transfer.ts';
import type { Probe, StageSpecOf } from '../probe/fields.ts';

/** What the factory found on one unit, in codes of the converter's format. */
export interface Measured {
  celsius: number;
  zeroCode: number;
  codesPerAmpere: number;
}

/** Nominal parts stand for a unit that nobody measured. */
export function nominalMeasured(probe: Probe): Measured {
  const transfer = nominalTransfer(probe);
  const zeroCode = probe.sensor.bias === 'steady' ? transfer.restCode : transfer.plateCodes;
  return { celsius: 25, zeroCode, codesPerAmpere: transfer.codesPerAmpere };
}

export function tuneUnit(probe: Probe, midCode: number, guardBits: number, measured: Measured): UnitConstants {
  const countsPerCode = 2 ** guardBits;
  const nominal = nominalTransfer(probe).codesPerAmpere;
  const sign = (Math.sign(nominal) || 1) * probe.direction;
  const middle = probe.sensor.bias === 'steady' ? midCode : 0;
  const restCounts = Math.round(sign * (measured.zeroCode - middle) * countsPerCode);
  const offsetCelsius = knotsOf(probe, 'offsetTrim');
  const gainCelsius = knotsOf(probe, 'gainTrim');
  const gainQ24 = Math.round((nominal / measured.codesPerAmpere / gainAt(probe, measured.celsius)) * UNITY_Q24);
  const offsets = offsetCelsius.map((t) => offsetAt(probe, t) - offsetAt(probe, measured.celsius));
  // without a zero stage the offset trim alone has to take out the rest
  const base = probe.chain.some((spec) => spec.stage === 'zero') ? 0 : restCounts;
  const unit: UnitConstants = {
    version: UNIT_VERSION, sign, factoryZero: restCounts, gainQ24,
    offsetTemperatures: offsetCelsius.map(inQ8), offsets: offsets.map((codes) => Math.round(base + sign * codes * countsPerCode)),
    gainTemperatures: gainCelsius.map(inQ8), gainsQ24: gainCelsius.map((t) => Math.round(gainAt(probe, t) * UNITY_Q24)), crc: 0,
  };
  unit.crc = unitCrc(unit);
  return unit;
}

function inQ8(celsius: number): number {
  return Math.round(celsius * 256);
}

/** The points of the trim's own table, or even ones between the ends of the thermometer; one without a thermometer. */
function knotsOf(probe: Probe, trim: 'offsetTrim' | 'gainTrim'): number[] {
  const thermometer = probe.chain.find((spec): spec is StageSpecOf<'thermometer'> => spec.stage === 'thermometer');
  if (thermometer === undefined) return [25];
  const spec = probe.chain.find((stage): stage is StageSpecOf<'offsetTrim' | 'gainTrim'> => stage.stage === trim);
  if (spec !== undefined && spec.table.length > 1) return spec.table.map(({ at_C }: { at_C: number }) => at_C);
  const { lowest_C, highest_C } = thermometer;
  return Array.from({ length: UNIT_KNOTS }, (_, knot) => lowest_C + ((highest_C - lowest_C) * knot) / (UNIT_KNOTS - 1));
}

/** Offset in codes at a temperature, from the file's table or the nominal hardware. */
function offsetAt(probe: Probe, celsius: number): number {
  const trim = probe.chain.find((spec): spec is StageSpecOf<'offsetTrim'> => spec.stage === 'offsetTrim');
  if (trim === undefined || trim.table.length === 0) return nominalOffsetCodes(probe, celsius);
  const amperes = heldLine(trim.table.map((p) => p.at_C), trim.table.map((p) => p.offset_A), celsius);
  return amperes * nominalTransfer(probe).codesPerAmpere;
}

/** Correction at a temperature: one over what the reading is too large by. */
function gainAt(probe: Probe, celsius: number): number {
  const trim = probe.chain.find((spec): spec is StageSpecOf<'gainTrim'> => spec.stage === 'gainTrim');
  if (trim === undefined || trim.table.length === 0) return 1 / nominalGain(probe, celsius);
  return 1 / heldLine(trim.table.map((p) => p.at_C), trim.table.map((p) => p.gain), celsius);
}

function heldLine(xs: readonly number[], ys: readonly number[], x: number): number {
  if (x <= xs[0]) return ys[0];
  for (let i = 1; i < xs.length; i++) {
    if (x <= xs[i]) return ys[i - 1] + ((ys[i] - ys[i - 1]) * (x - xs[i - 1])) / (xs[i] - xs[i - 1]);
  }
  return ys[ys.length - 1];
}
