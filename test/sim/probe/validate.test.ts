import { describe, expect, test } from 'vitest';
import type { Field, Fields } from '../../../sim/probe/describe.ts';
import { group, number } from '../../../sim/probe/describe.ts';
import { PROBE } from '../../../sim/probe/fields.ts';
import { ProbeError, type Problem } from '../../../sim/probe/problem.ts';
import { readAs } from '../../../sim/probe/reading.ts';
import { validate } from '../../../sim/probe/validate.ts';
import { at, put } from './places.ts';
import { switchedBias, tramDoor } from './tram-door.ts';
import { problemsOf } from './problems.ts';

function deepFreeze<T>(tree: T): T {
  if (typeof tree === 'object' && tree !== null) {
    Object.values(tree).forEach(deepFreeze);
    Object.freeze(tree);
  }
  return tree;
}

describe('a valid probe', () => {
  test('has no problems, and keeps every value that the file gives', () => {
    for (const given of [tramDoor(), switchedBias()]) {
      const { probe } = validate(given);
      expect(probe).toMatchObject({ name: 'door drive', range_A: 30, chain: given.chain, scenarios: given.scenarios });
      expect(probe.core.gap_mm).toEqual({ nominal: 2, tolerance: 0.05 });
    }
  });

  test('a plain number for a toleranced field has tolerance 0', () => {
    expect(validate(tramDoor()).probe.core.path_mm).toEqual({ nominal: 80, tolerance: 0 });
  });

  test('the object given is never modified, nor shared with the result', () => {
    const given = deepFreeze(tramDoor());
    const { probe } = validate(given);
    probe.chain.length = 0;
    probe.supply_V.nominal = 1;
    expect(given).toEqual(tramDoor());
  });

  test('validating a validated probe gives the same probe, and nothing is left to a default', () => {
    for (const given of [tramDoor(), switchedBias()]) {
      const once = validate(given);
      const twice = validate(once.probe);
      expect(twice.probe).toEqual(once.probe);
      expect(twice.presets).toEqual([]);
      expect(once.presets.length).toBeGreaterThan(0);
    }
  });

  test('minus zero becomes zero', () => {
    const { probe } = validate(put(tramDoor(), 'scenarios[4].current.from_A', -0));
    expect(Object.is((probe.scenarios[4].current as { from_A: number }).from_A, 0)).toBe(true);
  });

  test('the link to the schema that editors use is no field', () => {
    expect(validate({ $schema: './probe.schema.json', ...tramDoor() }).probe).toEqual(validate(tramDoor()).probe);
    expect(problemsOf({ $schema: 5, ...tramDoor() }).map((problem) => problem.path)).toEqual(['$schema']);
    expect(problemsOf(put(tramDoor(), 'core.$schema', 'x')).map((problem) => problem.path)).toEqual(['core.$schema']);
  });
});

describe('presets', () => {
  test('each is the value at its path, and was not in the file', () => {
    const given = tramDoor();
    const { probe, presets } = validate(given);
    for (const { path, value, meaning } of presets) {
      const filled = at(probe, path) as any;
      const plain = Array.isArray(filled) ? null : filled?.nominal ?? filled;
      expect(plain, path).toEqual(value);
      expect(at(given, path), path).toBeUndefined();
      expect(meaning).not.toBe('');
    }
  });

  test('name value, unit and meaning', () => {
    const { presets } = validate(tramDoor());
    expect(presets).toContainEqual(
      { path: 'thermometer.beta_K', value: 3435, unit: 'K', meaning: 'beta of a thermistor' },
    );
    expect(presets.filter((preset) => preset.path === 'chain[0].midCode')).toEqual([]);
  });

  test('a group left out is a preset itself, without its fields', () => {
    const { probe, presets } = validate(put(tramDoor(), 'calibration', undefined));
    expect(probe.calibration).toBe(null);
    const paths = presets.map((preset) => preset.path).filter((path) => path.startsWith('calibration'));
    expect(paths).toEqual(['calibration']);
  });
});

test('every problem is in one error, one line each', () => {
  const given = tramDoor();
  put(given, 'sensor.noise_uT_per_rtHz', -3);
  put(given, 'core.gap_mm', undefined);
  put(given, 'chain[9].corner_Hz', '400');
  const lines = [
    'probe: 3 problems',
    '  core.gap_mm: found nothing, allowed above 0, up to 100 mm, or {nominal, tolerance}; ' +
      'length of the air gap that holds the sensor',
    '  sensor.noise_uT_per_rtHz: found -3, allowed 0 to 1000 µT/√Hz, or {nominal, tolerance}',
    '  chain[9].corner_Hz: found "400", allowed above 0, up to 10000000 Hz; write it without quotes',
  ];
  expect(() => validate(given)).toThrow(new ProbeError(problemsOf(given)));
  expect(new ProbeError(problemsOf(given)).message.split('\n')).toEqual(lines);
});

const RANGE_OF_PERMEABILITY = '1 to 1000000, or {nominal, tolerance}';

/** Place, what stands there, and what the one problem says: path, found, allowed, hint. */
const BROKEN: [string, unknown, Problem][] = [
  ['core.permeability', NaN, problem('core.permeability', 'NaN', RANGE_OF_PERMEABILITY)],
  ['core.permeability', Infinity, problem('core.permeability', 'Infinity', RANGE_OF_PERMEABILITY)],
  ['core.permeability', null, problem('core.permeability', 'null', RANGE_OF_PERMEABILITY)],
  ['core.permeability', [2000], problem('core.permeability', 'a list of 1', RANGE_OF_PERMEABILITY)],
  ['core.permeability', 2000n, problem('core.permeability', '2000n', RANGE_OF_PERMEABILITY)],
  ['core.permeability', '2000,5',
    problem('core.permeability', '"2000,5"', RANGE_OF_PERMEABILITY, 'decimals take a point, and no quotes')],
  ['converter.bits', 12.5, problem('converter.bits', '12.5', 'an integer 6 to 24 bits')],
  ['core.gap_mm', { nominal: 2 }, problem('core.gap_mm.tolerance', 'nothing', '0 or more mm',
    'a value without tolerance may stand as a plain number')],
  ['core.gap_mm', { nominal: 2, tolerance: -1 }, problem('core.gap_mm.tolerance', '-1', '0 or more mm')],
  ['core.gap_mm', { nominal: 2, tolerance: Infinity }, problem('core.gap_mm.tolerance', 'Infinity', '0 or more mm')],
  ['core.gap_mm', { nominal: 2, tolerance: 2 },
    problem('core.gap_mm', '2 ± 2 mm', 'nominal ± tolerance of above 0, up to 100 mm')],
  ['core.gap_mm', { nominal: 99, tolerance: 2 },
    problem('core.gap_mm', '99 ± 2 mm', 'nominal ± tolerance of above 0, up to 100 mm')],
  ['core.gap_mm', { nominal: 0, tolerance: 0 }, problem('core.gap_mm.nominal', '0', 'above 0, up to 100 mm')],
  ['core.gap_mm', { nominal: 2, tolerance: 0, tolerence: 0 },
    problem('core.gap_mm.tolerence', 'an unknown field', 'the fields of this group', 'did you mean tolerance?')],
  ['core.turns', { nominal: 1, tolerance: 0 }, problem('core.turns', 'a group of fields', 'an integer 1 to 1000')],
  ['core.gapp_mm', 2, problem('core.gapp_mm', 'an unknown field', 'the fields of this group', 'did you mean gap_mm?')],
  ['calibration.colour', 'grey',
    problem('calibration.colour', 'an unknown field', 'at_C, span_A, samples')],
  ['sensor.bandwidth_MHz', 1,
    problem('sensor.bandwidth_MHz', 'an unknown field', 'the fields of this group', 'did you mean bandwidth_kHz?')],
  ['sensor.noise', 1,
    problem('sensor.noise', 'an unknown field', 'the fields of this group', 'did you mean noise_uT_per_rtHz?')],
  ['chain[11].ratio', 4, problem('chain[11].ratio', 'an unknown field', 'stage, length_ms, start',
    'it is a field of decimate')],
  ['chain[11].stage', 'averge', problem('chain[11].stage', '"averge"',
    'one of "intake", "overRange", "despike", "demodulate", "decimate", "thermometer", "offsetTrim", "zero", ' +
    '"gainTrim", "linearise", "sections", "average", "scale", "meter", "custom"', 'did you mean "average"?')],
  ['converter.format', 'ofset binary', problem('converter.format', '"ofset binary"',
    'one of "offset binary", "two\'s complement"', 'did you mean "offset binary"?')],
  ['chain[12].unit', '\u03bcA', problem('chain[12].unit', '"\u03bcA"', 'one of "auto", "µA", "mA"',
    'it looks like "µA" but is written with another character')],
  ['name', '', problem('name', '""', 'a text that is not empty')],
  ['sensor.ratiometric', 0, problem('sensor.ratiometric', '0', 'true or false')],
  ['core', [], problem('core', 'a list of 0', 'a group of fields { ... }')],
  ['thermometer', new Map(), problem('thermometer', 'an object with a class of its own', 'a group of fields { ... }')],
  ['scenarios[1].current.levels_A', [],
    problem('scenarios[1].current.levels_A', 'a list of 0', 'a list of 1 to 1000')],
  ['scenarios[1].current.levels_A', new Array(4e9),
    problem('scenarios[1].current.levels_A', 'a list of 4000000000', 'a list of 1 to 1000')],
  ['scenarios[1].current.levels_A', { length: 3 },
    problem('scenarios[1].current.levels_A', 'a group of fields', 'a list of 1 to 1000')],
  ['scenarios[1].current.levels_A[1]', undefined,
    problem('scenarios[1].current.levels_A[1]', 'nothing', '-1000000 to 1000000 A')],
];

function problem(path: string, found: string, allowed: string, hint = ''): Problem {
  return { path, found, allowed, hint };
}

describe('a broken field is named with what was found and what is allowed', () => {
  // Some values are too large to be printed in the name of a test.
  const rows = BROKEN.map((row, index) => ({ index, place: row[0], found: row[2].found }));
  test.each(rows)('$place: $found', ({ index }) => {
    const [place, value, expected] = BROKEN[index];
    expect(problemsOf(put(tramDoor(), place, value))).toEqual([expected]);
  });

  test('a function is the only thing that a code field takes', () => {
    const given = switchedBias();
    const index = given.chain.findIndex((stage: { stage: string }) => stage.stage === 'custom');
    put(given, `chain[${index}].make`, '() => null');
    expect(problemsOf(given)).toEqual([problem(`chain[${index}].make`, '"() => null"', 'a function')]);
  });

  test.each([undefined, null, 5, 'probe', [], () => null, new Date(0)])('a file that holds %o', (given) => {
    const [only, ...more] = problemsOf(given);
    expect(more).toEqual([]);
    expect(only.path).toBe('');
  });
});

test('__proto__ and the names of Object are unknown fields, and nothing is polluted', () => {
  const text = JSON.stringify(tramDoor()).replace('"core":{', '"core":{"__proto__":{"turns":7},"toString":1,');
  const given = JSON.parse(text);
  const problems = problemsOf(given);
  expect(problems.map((entry) => entry.path)).toEqual(['core.__proto__', 'core.toString']);
  expect(problems.every((entry) => entry.found === 'an unknown field')).toBe(true);
  expect(({} as Record<string, unknown>).turns).toBeUndefined();
  expect(problemsOf(put(tramDoor(), 'chain[0].stage', 'constructor')).map((entry) => entry.path))
    .toEqual(['chain[0].stage']);
});

test('fields inherited from a prototype do not count as given', () => {
  const given = tramDoor();
  given.core = Object.create(Object.assign(Object.create(null), given.core));
  // the turns of the coil are not given either
  expect(problemsOf(given).map((entry) => entry.path))
    .toEqual(['core.gap_mm', 'core.path_mm', 'core.permeability', 'scenarios[6].coil']);
});

function numbersIn(field: Field, name: string): { name: string; field: Extract<Field, { kind: 'number' }> }[] {
  switch (field.kind) {
    case 'number': return [{ name, field }];
    case 'group': return Object.keys(field.fields).flatMap((inner) => (
      numbersIn(field.fields[inner], `${name}.${inner}`)
    ));
    case 'list': return numbersIn(field.item, `${name}[]`);
    case 'variant': return Object.entries(field.variants as Record<string, Fields>).flatMap(([which, fields]) => (
      Object.keys(fields).flatMap((inner) => numbersIn(fields[inner], `${name}.${which}.${inner}`))
    ));
    default: return [];
  }
}

/** The neighbour of a double, away from zero or towards it, by its bit pattern (IEEE 754: patterns rise with size). */
function neighbour(value: number, up: boolean): number {
  if (value === 0) return up ? Number.MIN_VALUE : -Number.MIN_VALUE;
  const bits = new BigInt64Array(new Float64Array([value]).buffer);
  bits[0] += value > 0 === up ? 1n : -1n;
  return new Float64Array(bits.buffer)[0];
}

describe('limits of a number', () => {
  test.each(numbersIn(PROBE, 'probe'))('$name takes its limits and nothing beyond them', ({ field }) => {
    const takes = (value: number) => readAs({ value }, group('one field', { value: field })).problems.length === 0;
    const step = (value: number, up: boolean) => (field.integer ? value + (up ? 1 : -1) : neighbour(value, up));
    expect(takes(field.max)).toBe(true);
    expect(takes(step(field.max, true))).toBe(false);
    expect(takes(field.min)).toBe(!field.aboveMin);
    expect(takes(step(field.min, true))).toBe(true);
    expect(takes(step(field.min, false))).toBe(false);
  });
});

test('a default lies within its own limits', () => {
  for (const { name, field } of numbersIn(PROBE, 'probe')) {
    if (typeof field.preset !== 'number') continue;
    const reading = readAs({ value: field.preset }, group('one field', { value: field }));
    expect(reading.problems, name).toEqual([]);
  }
});

test('a group whose absence means its defaults is read as if it were empty', () => {
  const size = number('size', { unit: 'mm', min: 0, max: 9, preset: 4 });
  const inner = group('inner', { size }, 'preset');
  const reading = readAs({}, group('outer', { inner }));
  expect(reading.value).toEqual({ inner: { size: 4 } });
  expect(reading.presets.map((preset) => preset.path)).toEqual(['inner.size']);
  expect(reading.problems).toEqual([]);
});
