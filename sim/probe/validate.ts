/**
 * From what a probe file holds to a `Probe` with every default filled in, or one error with every problem in it:
 * first each field by itself (reading.ts), then the fields against each other (consistency.ts).
 */
import { isPlainObject } from './allowed.ts';
import { inconsistencies } from './consistency.ts';
import { PROBE, type Probe } from './fields.ts';
import { ProbeError } from './problem.ts';
import { readAs, type Preset, type Reading } from './reading.ts';

export type { Preset } from './reading.ts';

export interface ValidProbe {
  probe: Probe;
  /** Every field that the file left to its default. */
  presets: Preset[];
}

export function validate(given: unknown): ValidProbe {
  const reading = readProbe(given);
  const probe = reading.value as Probe;
  const problems = [...reading.problems, ...inconsistencies(probe)];
  if (problems.length > 0) throw new ProbeError(problems);
  return { probe, presets: reading.presets };
}

/** Each field by itself, without the rules that join several: what a JSON Schema can say too. */
export function readProbe(given: unknown): Reading {
  return readAs(withoutSchemaLink(given), PROBE);
}

/** Editors find the schema of a JSON file by a `$schema` beside its fields; it says nothing about the probe. */
function withoutSchemaLink(given: unknown): unknown {
  if (!isPlainObject(given) || !Object.hasOwn(given, '$schema') || typeof given.$schema !== 'string') return given;
  const { $schema: _, ...fields } = given;
  return fields;
}
