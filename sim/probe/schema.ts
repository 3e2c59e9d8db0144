/**
 * The description of a probe file as JSON Schema (draft 2020-12, json-schema.org/draft/2020-12), for editors that
 * complete and underline while the file is written. It says of each field what reading.ts says of it; what joins
 * several fields, such as nominal ± tolerance within the range, only `validate` can tell. Functions have no place
 * in JSON, so `code` fields are left out.
 */
import { mayBeEmpty } from './allowed.ts';
import type { Field, Fields, GroupField, ListField, NumberField, VariantField } from './describe.ts';
import { PROBE } from './fields.ts';

type Schema = Record<string, unknown>;

export function probeSchema(): object {
  const { properties, ...rest } = fieldsSchema(PROBE.fields) as { properties: Schema };
  return {
    $schema: 'https://json-schema.org/draft/2020-12/schema',
    title: 'probe',
    description: PROBE.meaning,
    ...rest,
    properties: { $schema: { type: 'string', description: 'where an editor finds this schema' }, ...properties },
  };
}

function fieldSchema(field: Field): Schema {
  switch (field.kind) {
    case 'number': return numberSchema(field);
    case 'choice': return { description: field.meaning, enum: [...field.choices], ...defaultOf(field.preset) };
    case 'text': {
      const shortest = mayBeEmpty(field.preset) ? {} : { minLength: 1 };
      return { description: field.meaning, type: 'string', ...shortest, ...defaultOf(field.preset) };
    }
    case 'flag': return { description: field.meaning, type: 'boolean', default: field.preset };
    case 'code': throw new TypeError('schema of a code field: JSON cannot hold a function');
    case 'group': return groupSchema(field);
    case 'list': return listSchema(field as ListField<Field>);
    case 'variant': return variantSchema(field as VariantField<string, Record<string, Fields>>);
  }
}

function defaultOf(preset: number | string | null | undefined): Schema {
  return preset === undefined ? {} : { default: preset };
}

function numberSchema(field: NumberField<number | null | undefined>): Schema {
  const description = field.unit === '' ? field.meaning : `${field.meaning} [${field.unit}]`;
  const type = field.integer ? 'integer' : 'number';
  const limits = { [field.aboveMin ? 'exclusiveMinimum' : 'minimum']: field.min, maximum: field.max };
  const preset = defaultOf(field.preset);
  const plain = { type: field.preset === null ? [type, 'null'] : type, ...limits };
  if (!field.toleranced) return { description, ...plain, ...preset };
  const parts = {
    nominal: { description: 'nominal value', type, ...limits },
    tolerance: { description: 'limit of the deviation from it', type: 'number', minimum: 0 },
  };
  return { description, oneOf: [plain, closed(parts, ['nominal', 'tolerance'])], ...preset };
}

function groupSchema(field: GroupField<Fields>): Schema {
  const schema = fieldsSchema(field.fields);
  const type = field.whenMissing === 'absent' ? { type: ['object', 'null'], default: null } : {};
  return { description: field.meaning, ...schema, ...type };
}

function fieldsSchema(fields: Fields, tag: Schema = {}): Schema {
  const names = Object.keys(fields).filter((name) => fields[name].kind !== 'code');
  const properties = Object.fromEntries(names.map((name) => [name, fieldSchema(fields[name])]));
  return closed({ ...tag, ...properties }, [...Object.keys(tag), ...names.filter((name) => isRequired(fields[name]))]);
}

function closed(properties: Schema, required: string[]): Schema {
  return { type: 'object', properties, required, additionalProperties: false };
}

function listSchema(field: ListField<Field>): Schema {
  const limits = { minItems: field.minLength, maxItems: field.maxLength };
  return { description: field.meaning, type: 'array', ...limits, items: fieldSchema(field.item) };
}

function variantSchema(field: VariantField<string, Record<string, Fields>>): Schema {
  const variants = Object.keys(field.variants).map((name) => ({
    title: name,
    description: field.variantMeanings[name],
    ...fieldsSchema(field.variants[name], { [field.tag]: { const: name } }),
  }));
  return { description: field.meaning, oneOf: variants };
}

function isRequired(field: Field): boolean {
  switch (field.kind) {
    case 'number': return field.preset === undefined;
    case 'choice': return field.preset === undefined;
    case 'text': return field.preset === undefined;
    case 'group': return field.whenMissing === 'required';
    case 'list': return !field.optional;
    case 'variant': return true;
    default: return false;
  }
}
