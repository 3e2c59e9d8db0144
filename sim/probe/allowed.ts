/**
 * A described field, and a value found in its place, in words: the same words in every error and in the table of
 * fields of the guide.
 */
import type { Field, NumberField } from './describe.ts';

/** `0 to 1000 µT/√Hz`, `above 0, up to 100 mm`, `an integer 1 to 8`. */
export function rangeText(field: NumberField<number | null | undefined>): string {
  const range = field.aboveMin ? `above ${field.min}, up to ${field.max}` : `${field.min} to ${field.max}`;
  return withUnit(`${field.integer ? 'an integer ' : ''}${range}`, field.unit);
}

export function withUnit(value: string | number, unit: string): string {
  return unit === '' ? String(value) : `${value} ${unit}`;
}

/** A text whose default is not empty is a name or a path: an empty one cannot be meant. */
export function mayBeEmpty(preset: string | undefined): boolean {
  return preset === '';
}

export function allowedText(field: Field): string {
  switch (field.kind) {
    case 'number':
      return rangeText(field) + (field.toleranced ? ', or {nominal, tolerance}' : '');
    case 'choice':
      return oneOf(field.choices);
    case 'text':
      return mayBeEmpty(field.preset) ? 'a text' : 'a text that is not empty';
    case 'flag':
      return 'true or false';
    case 'code':
      return 'a function';
    case 'group':
      return 'a group of fields { ... }';
    case 'list':
      return `a list of ${field.minLength} to ${field.maxLength}`;
    case 'variant':
      return `a group of fields { "${field.tag}": ... }`;
  }
}

export function oneOf(words: readonly string[]): string {
  const quoted = words.map((word) => JSON.stringify(word)).join(', ');
  return words.length === 1 ? quoted : `one of ${quoted}`;
}

const LONGEST_QUOTE = 60;

export function foundText(given: unknown): string {
  if (given === undefined) return 'nothing';
  if (typeof given === 'string') {
    return JSON.stringify(given.length > LONGEST_QUOTE ? `${given.slice(0, LONGEST_QUOTE)}...` : given);
  }
  if (typeof given === 'bigint') return `${given}n`;
  if (typeof given === 'symbol') return 'a symbol';
  if (typeof given === 'function') return 'a function';
  if (Array.isArray(given)) return `a list of ${given.length}`;
  if (typeof given === 'object' && given !== null) {
    return isPlainObject(given) ? 'a group of fields' : 'an object with a class of its own';
  }
  return String(given);
}

/** An object literal or parsed JSON. A Map or an instance would read as a group in which every field is missing. */
export function isPlainObject(given: unknown): given is Record<string, unknown> {
  if (typeof given !== 'object' || given === null || Array.isArray(given)) return false;
  const prototype = Object.getPrototypeOf(given);
  // One level above an object literal there is nothing, in whichever realm the literal was made.
  return prototype === null || Object.getPrototypeOf(prototype) === null;
}
