/**
 * What the oracles work on: the whole history of a signal as one record, value by value, in BigInt. An oracle takes
 * the record that goes into a stage and gives the record that must come out, so the oracle of a chain is the
 * composition of the oracles of its stages.
 */
import type { StageConstants, UnitConstants } from '../../../lib/index.ts';

export interface Sample {
  value: bigint;
  status: number;
  /** The code that stands on the thermometer's converter while this sample passes. */
  temperatureCode: number;
  /** 1/256 °C, written by the thermometer stage. */
  temperature: bigint;
  /** Counts, written by the zero stage. */
  zero: bigint;
}

export type Oracle<C extends StageConstants> = (constants: C, unit: UnitConstants, input: Sample[]) => Sample[];

/** Integer division that floors, for any sign. */
export function floorDivide(a: bigint, b: bigint): bigint {
  const quotient = a / b;
  return a % b !== 0n && (a < 0n) !== (b < 0n) ? quotient - 1n : quotient;
}

/** The one rounding rule: add half, then floor. */
export function roundDivide(a: bigint, b: bigint): bigint {
  return floorDivide(2n * a + b, 2n * b);
}
