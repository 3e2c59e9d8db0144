/**
 * The schema and the validator are two readings of one description. A small evaluator of JSON Schema, which knows
 * the keywords used and throws on any other, must accept exactly what the validator accepts field by field.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { probeSchema } from '../../../sim/probe/schema.ts';
import { readProbe } from '../../../sim/probe/validate.ts';
import { pathOf, placesIn, put } from './places.ts';
import { tramDoor, type Loose } from './tram-door.ts';

type Assertion = (limit: any, value: any, schema: Loose) => boolean;

const onNumber = (holds: (value: number, limit: number) => boolean): Assertion => (
  (limit, value) => typeof value !== 'number' || holds(value, limit)
);
const isObject = (value: unknown) => typeof value === 'object' && value !== null && !Array.isArray(value);

function isOfType(type: string, value: unknown): boolean {
  switch (type) {
    case 'integer': return Number.isInteger(value);
    case 'object': return isObject(value);
    case 'array': return Array.isArray(value);
    case 'null': return value === null;
    default: return typeof value === type;
  }
}

/** JSON Schema validation (draft 2020-12), sections 10 and 6: the keywords that the schema uses. */
const ASSERTIONS: Record<string, Assertion> = {
  $schema: () => true,
  title: () => true,
  description: () => true,
  default: () => true,
  type: (types, value) => [types].flat().some((type: string) => isOfType(type, value)),
  minimum: onNumber((value, limit) => value >= limit),
  exclusiveMinimum: onNumber((value, limit) => value > limit),
  maximum: onNumber((value, limit) => value <= limit),
  minLength: (limit, value) => typeof value !== 'string' || [...value].length >= limit,
  minItems: (limit, value) => !Array.isArray(value) || value.length >= limit,
  maxItems: (limit, value) => !Array.isArray(value) || value.length <= limit,
  items: (schema, value) => !Array.isArray(value) || value.every((item) => accepts(schema, item)),
  enum: (values, value) => values.includes(value),
  const: (only, value) => value === only,
  oneOf: (schemas, value) => schemas.filter((schema: Loose) => accepts(schema, value)).length === 1,
  required: (names, value) => !isObject(value) || names.every((name: string) => Object.hasOwn(value, name)),
  properties: (schemas, value) => !isObject(value) || Object.keys(value).every((name) => (
    !Object.hasOwn(schemas, name) || accepts(schemas[name], value[name])
  )),
  additionalProperties: (allowed, value, schema) => allowed !== false || !isObject(value) ||
    Object.keys(value).every((name) => Object.hasOwn(schema.properties, name)),
};

function accepts(schema: Loose, value: unknown): boolean {
  return Object.keys(schema).every((keyword) => {
    if (!Object.hasOwn(ASSERTIONS, keyword)) throw new Error(`unknown keyword ${keyword}`);
    return ASSERTIONS[keyword](schema[keyword], value, schema);
  });
}

const schema = JSON.parse(JSON.stringify(probeSchema())) as Loose;

/** That nominal ± tolerance stays in the range joins two fields: no JSON Schema can say it. */
function validatorAccepts(given: unknown): boolean {
  return readProbe(given).problems.every((problem) => problem.allowed.startsWith('nominal ± tolerance of '));
}

const anyNumber = fc.oneof(
  fc.double({ noNaN: true, noDefaultInfinity: true }), fc.integer(), fc.integer({ min: -5, max: 70 }),
  fc.constantFrom(0, 100, 1e6, -1e6, 1e7, 3_600_000, Number.MAX_VALUE),
);
const anyWord = fc.oneof(fc.string(), fc.constantFrom('', 'dc', 'average', 'mean', 'µA', 'zero', 'fixed', 'notch'));
const anyJson = fc.oneof(
  anyNumber, anyWord, fc.boolean(), fc.constant(null), fc.array(anyNumber, { maxLength: 3 }),
  fc.record({ nominal: anyNumber, tolerance: anyNumber }, { requiredKeys: [] }), fc.jsonValue({ maxDepth: 2 }),
);

describe('the schema', () => {
  test('accepts a valid probe, also with a link to the schema in it', () => {
    expect(accepts(schema, tramDoor())).toBe(true);
    expect(accepts(schema, { $schema: './probe.schema.json', ...tramDoor() })).toBe(true);
  });

  test('agrees with the validator on a probe changed in any one place', () => {
    const places = placesIn(tramDoor());
    const where = fc.constantFrom(...places);
    fc.assert(fc.property(where, anyJson, (place, value) => {
      const given = put(tramDoor(), place, value);
      expect(accepts(schema, given), pathOf(place)).toBe(validatorAccepts(given));
    }), { numRuns: 1500 });
  });

  test('agrees with the validator at the limits of each number', () => {
    for (const place of placesIn(tramDoor())) {
      if (typeof place.reduce<any>((tree, step) => tree[step], tramDoor()) !== 'number') continue;
      for (const limit of [0, 1, 100, 1e6, 1e7]) {
        const given = put(tramDoor(), place, limit);
        expect(accepts(schema, given), `${pathOf(place)} = ${limit}`).toBe(validatorAccepts(given));
      }
    }
  });

  test('agrees with the validator on each field taken away, and on a field too many', () => {
    for (const place of placesIn(tramDoor())) {
      const last = place[place.length - 1];
      if (typeof last === 'string') {
        const given = put(tramDoor(), place, undefined);
        expect(accepts(schema, given), pathOf(place)).toBe(validatorAccepts(given));
      }
      const part = place.reduce<any>((tree, step) => tree[step], tramDoor());
      if (isObject(part)) {
        const more = put(tramDoor(), [...place, 'surplus'], 1);
        expect(accepts(schema, more), pathOf(place)).toBe(false);
        expect(validatorAccepts(more), pathOf(place)).toBe(false);
      }
    }
  });

  test('accepts a probe with every default filled in, null included', () => {
    const { value } = readProbe(tramDoor());
    expect(accepts(schema, JSON.parse(JSON.stringify(value)))).toBe(true);
  });

  test('every default that it states is one that it accepts', () => {
    const stated = (part: unknown): Loose[] => {
      if (typeof part !== 'object' || part === null) return [];
      const inner = Object.values(part).flatMap(stated);
      const isSchema = isObject(part) && 'default' in part && !isObject(part.default);
      return isSchema ? [part as Loose, ...inner] : inner;
    };
    const withDefault = stated(schema);
    expect(withDefault.length).toBeGreaterThan(50);
    for (const part of withDefault) expect(accepts(part, part.default), part.description).toBe(true);
  });

  test('names the unit of a number', () => {
    expect(schema.properties.range_A.description).toContain('[A]');
  });
});
