/**
 * Reads a value against the description of its fields: fills in the defaults, notes each default used, and collects
 * every problem instead of stopping at the first. The value given is never modified; the value returned is new.
 *
 * What could not be read stands in the result as a value of the right shape that compares with nothing: NaN for a
 * number, '' for a text or choice, an empty list. Rules about several fields (consistency.ts) are therefore silent
 * about parts that are broken themselves.
 */
import { allowedText, foundText, isPlainObject, mayBeEmpty, oneOf, rangeText, withUnit } from './allowed.ts';
import type {
  ChoiceField, Field, Fields, GroupField, ListField, NumberField, TextField, VariantField,
} from './describe.ts';
import { nearest } from './nearest.ts';
import { pathTo, type Problem } from './problem.ts';

/** A field that was left out, and what stands in for it. */
export interface Preset {
  path: string;
  /** The nominal value of a toleranced field; null: derived later, or nothing (an empty list, no such part). */
  value: number | string | boolean | null;
  unit: string;
  meaning: string;
}

export interface Reading {
  value: unknown;
  problems: Problem[];
  presets: Preset[];
}

type AnyNumber = NumberField<number | null | undefined>;
type AnyList = ListField<Field>;
type AnyVariant = VariantField<string, Record<string, Fields>>;

/** Names of a group are listed in an error up to this many; more would hide the other problems. */
const FEW_NAMES = 12;

export function readAs(given: unknown, description: GroupField<Fields>): Reading {
  const reader = new Reader();
  return { value: reader.read(description, given, ''), problems: reader.problems, presets: reader.presets };
}

class Reader {
  problems: Problem[] = [];
  presets: Preset[] = [];

  read(field: Field, given: unknown, path: string): unknown {
    if (given === undefined) return this.leftOut(field, path);
    switch (field.kind) {
      case 'number': return this.number(field, given, path);
      case 'choice': return this.choice(field, given, path);
      case 'text': return this.text(field, given, path);
      case 'flag': return typeof given === 'boolean' ? given : this.refuse(field, given, path);
      case 'code': return typeof given === 'function' || given === null ? given : this.refuse(field, given, path);
      case 'group': return this.group(field, given, path);
      case 'list': return this.list(field as AnyList, given, path);
      case 'variant': return this.variant(field as AnyVariant, given, path);
    }
  }

  note(path: string, found: string, allowed: string, hint = ''): void {
    this.problems.push({ path, found, allowed, hint });
  }

  refuse(field: Field, given: unknown, path: string, hint = ''): unknown {
    this.note(path, foundText(given), allowedText(field), hint);
    return unreadable(field);
  }

  leftOut(field: Field, path: string): unknown {
    const filled = presetOf(field);
    if (filled === undefined) return this.refuse(field, undefined, path, field.meaning);
    if (field.kind === 'group' && field.whenMissing === 'preset') return this.group(field, {}, path);
    const unit = field.kind === 'number' ? field.unit : '';
    this.presets.push({ path, value: filled, unit, meaning: field.meaning });
    if (field.kind === 'number' && field.toleranced && filled !== null) return { nominal: filled, tolerance: 0 };
    return field.kind === 'list' ? [] : filled;
  }

  number(field: AnyNumber, given: unknown, path: string): unknown {
    if (given === null && field.preset === null) return null;
    if (field.toleranced && isPlainObject(given)) return this.toleranced(field, given, path);
    if (!inRange(field, given)) return this.refuse(field, given, path, numberHint(given));
    const value = given + 0; // -0 would differ from 0 where results are compared bit for bit
    return field.toleranced ? { nominal: value, tolerance: 0 } : value;
  }

  toleranced(field: AnyNumber, given: Record<string, unknown>, path: string): unknown {
    const before = this.problems.length;
    this.unknownNames(given, ['nominal', 'tolerance'], path, []);
    const nominal = ownValue(given, 'nominal');
    const tolerance = ownValue(given, 'tolerance');
    const tolerancePath = pathTo(path, 'tolerance');
    const soundNominal = inRange(field, nominal);
    const soundTolerance = typeof tolerance === 'number' && tolerance >= 0 && tolerance < Infinity;
    if (!soundNominal) {
      this.note(pathTo(path, 'nominal'), foundText(nominal), rangeText(field), numberHint(nominal));
    }
    if (!soundTolerance) {
      const hint = tolerance === undefined ? 'a value without tolerance may stand as a plain number' : '';
      this.note(tolerancePath, foundText(tolerance), withUnit('0 or more', field.unit), hint);
    }
    if (!soundNominal || !soundTolerance) return unreadable(field);
    if (!withinLimits(field, nominal - tolerance) || !withinLimits(field, nominal + tolerance)) {
      // Either of the two may be the mistaken one, so the field is named rather than one of its halves.
      this.note(path, withUnit(`${nominal} ± ${tolerance}`, field.unit), `nominal ± tolerance of ${rangeText(field)}`);
    }
    return this.problems.length > before ? unreadable(field) : { nominal: nominal + 0, tolerance: tolerance + 0 };
  }

  choice(field: ChoiceField<string>, given: unknown, path: string): unknown {
    if (typeof given === 'string' && field.choices.includes(given)) return given;
    return this.refuse(field, given, path, choiceHint(given, field.choices));
  }

  text(field: TextField, given: unknown, path: string): unknown {
    if (typeof given === 'string' && (given !== '' || mayBeEmpty(field.preset))) return given;
    return this.refuse(field, given, path);
  }

  group(field: GroupField<Fields>, given: unknown, path: string): unknown {
    if (given === null && field.whenMissing === 'absent') return null;
    if (!isPlainObject(given)) return this.refuse(field, given, path);
    this.unknownNames(given, Object.keys(field.fields), path, []);
    return this.fields(field.fields, given, path);
  }

  fields(fields: Fields, given: Record<string, unknown>, path: string): Record<string, unknown> {
    const value: Record<string, unknown> = {};
    for (const name of Object.keys(fields)) {
      value[name] = this.read(fields[name], ownValue(given, name), pathTo(path, name));
    }
    return value;
  }

  list(field: AnyList, given: unknown, path: string): unknown {
    // The items of a list that is far too long are not worth reading, and there may be millions.
    if (!Array.isArray(given) || given.length > field.maxLength) return this.refuse(field, given, path);
    if (given.length < field.minLength) this.refuse(field, given, path);
    return Array.from(given, (item: unknown, index) => {
      const itemPath = pathTo(path, index);
      return item === undefined ? this.refuse(field.item, item, itemPath) : this.read(field.item, item, itemPath);
    });
  }

  variant(field: AnyVariant, given: unknown, path: string): unknown {
    if (!isPlainObject(given)) return this.refuse(field, given, path);
    const which = ownValue(given, field.tag);
    const known = Object.keys(field.variants);
    if (typeof which !== 'string' || !known.includes(which)) {
      this.note(pathTo(path, field.tag), foundText(which), oneOf(known), choiceHint(which, known));
      return unreadable(field);
    }
    const fields = field.variants[which];
    const others = known.filter((name) => name !== which).map((name) => ({ name, fields: field.variants[name] }));
    this.unknownNames(given, [field.tag, ...Object.keys(fields)], path, others);
    return { [field.tag]: which, ...this.fields(fields, given, path) };
  }

  unknownNames(
    given: object, known: string[], path: string, others: { name: string; fields: Fields }[],
  ): void {
    for (const name of Object.keys(given)) {
      if (known.includes(name)) continue;
      const near = nearest(name, known);
      const owners = others.filter((other) => Object.hasOwn(other.fields, name)).map((other) => other.name);
      const allowed = near === null && known.length <= FEW_NAMES ? known.join(', ') : 'the fields of this group';
      let hint = near === null ? '' : `did you mean ${near}?`;
      if (owners.length > 0) hint = `it is a field of ${owners.join(', ')}`;
      this.note(pathTo(path, name), 'an unknown field', allowed, hint);
    }
  }
}

/** The default that the description states; null: none, and none needed; undefined: the field is required. */
function presetOf(field: Field): number | string | boolean | null | undefined {
  switch (field.kind) {
    case 'group': return field.whenMissing === 'required' ? undefined : null;
    case 'list': return field.optional ? null : undefined;
    case 'code': return null;
    case 'variant': return undefined;
    default: return field.preset;
  }
}

function unreadable(field: Field): unknown {
  switch (field.kind) {
    case 'number': return field.toleranced ? { nominal: NaN, tolerance: NaN } : NaN;
    case 'choice': return '';
    case 'text': return '';
    case 'flag': return false;
    case 'code': return () => null;
    case 'group': return unreadableGroup(field.fields);
    case 'list': return [];
    case 'variant': return { [field.tag]: '' };
  }
}

function unreadableGroup(fields: Fields): unknown {
  return Object.fromEntries(Object.keys(fields).map((name) => [name, unreadable(fields[name])]));
}

function ownValue(given: Record<string, unknown>, name: string): unknown {
  return Object.hasOwn(given, name) ? given[name] : undefined;
}

function inRange(field: AnyNumber, given: unknown): given is number {
  return typeof given === 'number' && withinLimits(field, given) && (!field.integer || Number.isInteger(given));
}

function withinLimits(field: AnyNumber, value: number): boolean {
  return (field.aboveMin ? value > field.min : value >= field.min) && value <= field.max;
}

function numberHint(given: unknown): string {
  if (typeof given !== 'string' || given.trim() === '') return '';
  if (Number.isFinite(Number(given))) return 'write it without quotes';
  return /^[\s+-]*\d+,\d+\s*$/.test(given) ? 'decimals take a point, and no quotes' : '';
}

function choiceHint(given: unknown, choices: readonly string[]): string {
  if (typeof given !== 'string') return '';
  const near = nearest(given, choices);
  if (near === null) return '';
  const looksTheSame = given.normalize('NFKC') === near.normalize('NFKC');
  return looksTheSame ? `it looks like ${JSON.stringify(near)} but is written with another character`
    : `did you mean ${JSON.stringify(near)}?`;
}
