/**
 * The words in which the fields of a probe file are described. One description of a field (kind, unit, range,
 * default, meaning) serves the validator, the JSON Schema, the table of fields in the guide and the TypeScript type.
 */

/** A hardware value as one unit has it or as its datasheet gives it: nominal, and the limit of its deviation. */
export interface Toleranced {
  nominal: number;
  tolerance: number;
}

interface Described {
  /** What the field means, in one line. */
  meaning: string;
}

export interface NumberField<D> extends Described {
  kind: 'number';
  /** Unit as printed, '' for a pure number. */
  unit: string;
  min: number;
  max: number;
  /** true: the limit itself is not allowed (a length above zero). */
  aboveMin: boolean;
  integer: boolean;
  /** true: a plain value or {nominal, tolerance} is accepted; the type is then Toleranced. */
  toleranced: boolean;
  /** undefined: required; null: may be left out and stays null (tuning or the bench then derives it). */
  preset: D;
}

export interface ChoiceField<C extends string> extends Described {
  kind: 'choice';
  choices: readonly C[];
  preset: C | undefined;
}

export interface TextField extends Described {
  kind: 'text';
  preset: string | undefined;
}

export interface FlagField extends Described {
  kind: 'flag';
  preset: boolean;
}

/** A function given by a probe file written in JavaScript (a custom stage). */
export interface CodeField extends Described {
  kind: 'code';
}

export interface Fields {
  [name: string]: Field;
}

export interface GroupField<F extends Fields> extends Described {
  kind: 'group';
  fields: F;
  /** 'given' must stand in the file; 'preset': left out means all its defaults; 'absent': left out means null. */
  whenMissing: 'required' | 'preset' | 'absent';
}

export interface ListField<I extends Field> extends Described {
  kind: 'list';
  item: I;
  minLength: number;
  maxLength: number;
  /** true: may be left out and is then an empty list. */
  optional: boolean;
}

/** One of several groups, told apart by the value of the field named `tag`. */
export interface VariantField<T extends string, V extends Record<string, Fields>> extends Described {
  kind: 'variant';
  tag: T;
  variants: V;
  variantMeanings: Record<string, string>;
}

export type Field =
  | NumberField<number | null | undefined>
  | ChoiceField<string>
  | TextField
  | FlagField
  | CodeField
  | GroupField<any>
  | ListField<any>
  | VariantField<any, any>;

type GroupOf<F extends Fields> = { [K in keyof F]: Of<F[K]> };

/** The type of a validated value of a described field: every default filled in. */
export type Of<F> =
  F extends { kind: 'number'; toleranced: true; preset: infer D } ? (null extends D ? Toleranced | null : Toleranced)
  : F extends { kind: 'number'; preset: infer D } ? (null extends D ? number | null : number)
  : F extends ChoiceField<infer C> ? C
  : F extends TextField ? string
  : F extends FlagField ? boolean
  : F extends CodeField ? ((...given: never[]) => unknown) | null
  : F extends VariantField<infer T, infer V> ? { [K in keyof V & string]: { [P in T]: K } & GroupOf<V[K]> }[keyof V & string]
  : F extends { kind: 'group'; whenMissing: 'absent'; fields: infer G extends Fields } ? GroupOf<G> | null
  : F extends { kind: 'group'; fields: infer G extends Fields } ? GroupOf<G>
  : F extends ListField<infer I> ? Of<I>[]
  : never;

interface NumberOptions {
  unit: string;
  min: number;
  max: number;
  aboveMin?: boolean;
  integer?: boolean;
  toleranced?: boolean;
  preset?: number | null;
}

type PresetOf<O> = O extends { preset: infer D } ? (D extends null ? null : number) : undefined;

/** A number; with `preset` left out it is required, with `preset: null` optional without a default. */
export function number<const O extends NumberOptions>(
  meaning: string, options: O,
): NumberField<PresetOf<O>> & { toleranced: O extends { toleranced: true } ? true : false } {
  return {
    kind: 'number', meaning, unit: options.unit, min: options.min, max: options.max,
    aboveMin: options.aboveMin ?? false, integer: options.integer ?? false,
    toleranced: (options.toleranced ?? false) as O extends { toleranced: true } ? true : false,
    preset: options.preset as PresetOf<O>,
  };
}

export function choice<const C extends string>(meaning: string, choices: readonly C[], preset?: C): ChoiceField<C> {
  return { kind: 'choice', meaning, choices, preset };
}

export function text(meaning: string, preset?: string): TextField {
  return { kind: 'text', meaning, preset };
}

export function flag(meaning: string, preset: boolean): FlagField {
  return { kind: 'flag', meaning, preset };
}

export function code(meaning: string): CodeField {
  return { kind: 'code', meaning };
}

export function group<F extends Fields, W extends 'required' | 'preset' | 'absent' = 'required'>(
  meaning: string, fields: F, whenMissing?: W,
): GroupField<F> & { whenMissing: W } {
  return { kind: 'group', meaning, fields, whenMissing: (whenMissing ?? 'required') as W };
}

export function list<I extends Field>(
  meaning: string, item: I, limits: { min?: number; max: number; optional?: boolean },
): ListField<I> {
  return { kind: 'list', meaning, item, minLength: limits.min ?? 0, maxLength: limits.max, optional: limits.optional ?? false };
}

export function variant<const T extends string, V extends Record<string, Fields>>(
  meaning: string, tag: T, variants: V, variantMeanings: { [K in keyof V]: string },
): VariantField<T, V> {
  return { kind: 'variant', meaning, tag, variants, variantMeanings };
}
