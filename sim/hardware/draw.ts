/**
 * One unit of the hardware: the same tree as in the probe file with every {nominal, tolerance} replaced by the value
 * that this unit has. Trial 0 has nominal parts; from trial 1 each part is uniform within nominal +- tolerance.
 * Each field draws from a stream of its own, named after its path, so a new field never changes the others.
 * The gap at the joint stays nominal here: the core draws it anew whenever the jaw closes.
 */
import type { Toleranced } from '../probe/describe.ts';
import type { Probe } from '../probe/fields.ts';
import { RandomStream } from './random.ts';

type Drawn<T> = T extends Toleranced ? number : T extends object ? { [K in keyof T]: Drawn<T[K]> } : T;

const PARTS = [
  'supply_V', 'core', 'sensor', 'coupling', 'amplifier', 'converter', 'thermometer', 'shunt', 'transformer',
] as const;

const DRAWN_AT_EACH_CLOSING = 'core.jointGap_um';

export type Unit = Drawn<Pick<Probe, (typeof PARTS)[number]>>;
export type CoreUnit = Unit['core'];
export type SensorUnit = Unit['sensor'];
export type CouplingUnit = NonNullable<Unit['coupling']>;
export type AmplifierUnit = Unit['amplifier'];
export type ConverterUnit = Unit['converter'];
export type ThermometerUnit = NonNullable<Unit['thermometer']>;
export type ShuntUnit = NonNullable<Unit['shunt']>;
export type TransformerUnit = NonNullable<Unit['transformer']>;

type Choose = (part: Toleranced, path: string) => number;

export function drawUnit(probe: Probe, seed: number, trial: number): Unit {
  if (trial === 0) return nominalUnit(probe);
  return unitOf(probe, ({ nominal, tolerance }, path) => {
    if (tolerance === 0 || path === DRAWN_AT_EACH_CLOSING) return nominal;
    return nominal + tolerance * (2 * new RandomStream(seed, trial, path).uniform() - 1);
  });
}

export function nominalUnit(probe: Probe): Unit {
  return unitOf(probe, (part) => part.nominal);
}

/** How many parts can differ from unit to unit. */
export function countTolerances(probe: Probe): number {
  let count = 0;
  unitOf(probe, ({ nominal, tolerance }) => {
    if (tolerance > 0) count++;
    return nominal;
  });
  return count;
}

function unitOf(probe: Probe, choose: Choose): Unit {
  const unit: Record<string, unknown> = {};
  for (const part of PARTS) unit[part] = drawn(probe[part], part, choose);
  return unit as Unit;
}

function drawn(given: unknown, path: string, choose: Choose): unknown {
  if (typeof given !== 'object' || given === null) return given;
  if (isToleranced(given)) return choose(given, path);
  return Object.fromEntries(
    Object.entries(given).map(([name, value]) => [name, drawn(value, `${path}.${name}`, choose)]));
}

function isToleranced(given: object): given is Toleranced {
  return 'nominal' in given && 'tolerance' in given;
}
