/**
 * A valid probe changed in any one place either validates or fails with a ProbeError that names the place, and
 * nothing else is ever thrown.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { ProbeError, type Problem } from '../../../sim/probe/problem.ts';
import { readProbe, validate } from '../../../sim/probe/validate.ts';
import { pathOf, placesIn, put, type Step } from './places.ts';
import { switchedBias, tramDoor } from './tram-door.ts';

/** `LOOK=25` in the environment looks 25 times as long. */
const LOOK = Number(process.env.LOOK ?? 1);
const MAKERS = [tramDoor, switchedBias];
const TAGS = ['stage', 'shape', 'measure'];
const GROUP_WIDE = [...TAGS, 'nominal', 'tolerance'];

const anyNumber = fc.oneof(
  fc.double(), fc.integer(), fc.integer({ min: -5, max: 70 }), fc.double({ min: -100, max: 100, noNaN: true }),
  fc.constantFrom(-0, 0, NaN, Infinity, -Infinity, Number.MAX_VALUE, Number.MIN_VALUE, 2 ** 53, -(2 ** 31)),
);
const anyWord = fc.oneof(
  fc.string(), fc.string({ unit: 'binary' }),
  fc.constantFrom('', 'meter', 'door', 'still', 'start', 'dc', 'step', 'sections', 'notch', 'reversal', '__proto__'),
);
const anyGroup = fc.record({ nominal: anyNumber, tolerance: anyNumber }, { requiredKeys: [] });
const anyThing = fc.oneof(
  anyNumber, anyWord, anyGroup, fc.boolean(), fc.constantFrom(null, undefined, () => 1, Symbol('s'), 7n, new Map()),
  fc.array(anyNumber, { maxLength: 4 }), fc.anything({ withBigInt: true, withDate: true, withMap: true, withSet: true,
    withSparseArray: true, withTypedArray: true, withNullPrototype: true, withObjectString: true }),
);

const change = fc.record({
  make: fc.constantFrom(...MAKERS),
  where: fc.nat(),
  value: anyThing,
}).map(({ make, where, value }) => {
  const places = placesIn(make());
  return { make, place: places[where % places.length], value };
});

function isGroup(part: unknown): boolean {
  return typeof part === 'object' && part !== null && !Array.isArray(part);
}

function outcome(given: unknown): Problem[] {
  try {
    validate(given);
    return [];
  } catch (error) {
    if (!(error instanceof ProbeError)) throw error;
    expect(error.problems.length).toBeGreaterThan(0);
    expect(error.message.split('\n').length).toBe(error.problems.length + 1);
    return error.problems;
  }
}

function isTag(place: Step[]): boolean {
  return TAGS.includes(place[place.length - 1] as string);
}

/**
 * Below the changed place. A changed tag lets the fields of its group become unknown or missing; nominal and
 * tolerance are only judged together.
 */
function isAt(problem: Problem, place: Step[]): boolean {
  const last = place[place.length - 1];
  const top = GROUP_WIDE.includes(last as string) ? place.slice(0, -1) : place;
  const path = pathOf(top);
  const rest = problem.path.slice(path.length);
  return path === '' || (problem.path.startsWith(path) && ['', '.', '['].includes(rest.slice(0, 1)));
}

describe('one change anywhere', () => {
  test('a broken field is named, and no sound field is blamed', () => {
    fc.assert(fc.property(change, ({ make, place, value }) => {
      const given = put(make(), place, value);
      const broken = readProbe(given).problems;
      const problems = outcome(given);
      if (broken.length > 0) {
        expect(problems.length).toBeGreaterThan(0);
        // Another group in place of a group, or another tag, may be sound in parts that do conflict with the rest.
        const before = place.reduce<any>((tree, step) => tree[step], make());
        if (isGroup(before) && isGroup(value)) return;
        if (isTag(place) && !broken.some((problem) => problem.path === pathOf(place))) return;
        const strays = problems.filter((problem) => !isAt(problem, place));
        expect(strays).toEqual([]);
      }
    }), { numRuns: 1500 * LOOK });
  });

  test('fields that conflict are named together', () => {
    fc.assert(fc.property(change, ({ make, place, value }) => {
      const given = put(make(), place, value);
      if (readProbe(given).problems.length > 0) return;
      for (const problem of outcome(given)) {
        const words = place.filter((step) => typeof step === 'string');
        const last = String(words[words.length - 1]).split('_')[0];
        const sentence = `${problem.path} ${problem.found} ${problem.allowed} ${problem.hint}`;
        expect(isAt(problem, place) || sentence.includes(last), `${pathOf(place)}: ${sentence}`).toBe(true);
      }
    }), { numRuns: 1500 * LOOK });
  });

  test('a field of any unknown name is refused by its name', () => {
    const groups = placesIn(tramDoor()).filter((place) => {
      const part = place.reduce<any>((tree, step) => tree[step], tramDoor());
      return typeof part === 'object' && !Array.isArray(part);
    });
    fc.assert(fc.property(fc.constantFrom(...groups), fc.string({ minLength: 1 }), (place, name) => {
      fc.pre(name !== '$schema');
      const given = tramDoor();
      const parent = place.reduce<any>((tree, step) => tree[step], given);
      fc.pre(!/^\w+$/.test(name) || !(name in parent));
      Object.defineProperty(parent, name, { value: 1, enumerable: true });
      const unknown = readProbe(given).problems.filter((problem) => problem.found === 'an unknown field');
      expect(unknown.length).toBe(1);
      expect(unknown[0].path).toContain(/^[A-Za-z_$][\w$]*$/.test(name) ? name : JSON.stringify(name));
    }), { numRuns: 500 });
  });

  test('several changes at once: still only a ProbeError', () => {
    fc.assert(fc.property(fc.array(change, { minLength: 2, maxLength: 6 }), (changes) => {
      const given = tramDoor();
      for (const { place, value } of changes) {
        try {
          if (place.length > 0) put(given, place, value);
        } catch {
          // an earlier change took the parent of this place away
        }
      }
      outcome(given);
    }), { numRuns: 700 * LOOK });
  });
});
