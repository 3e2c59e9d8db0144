import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { jsonFault, placeOf } from '../../../sim/probe/json-fault.ts';

function parses(text: string): boolean {
  try {
    JSON.parse(text);
    return true;
  } catch {
    return false;
  }
}

const damaged = fc.record({
  text: fc.json({ maxDepth: 3 }),
  at: fc.nat(),
  cut: fc.nat({ max: 2 }),
  insert: fc.oneof(fc.string({ maxLength: 2 }), fc.constantFrom(
    '', ',', '"', '{', '}', '[', ']', ':', '0', '1', '-', '.', 'e', '\\', '\\u12',
    '\n', '\t', '\u00a0', '\ufeff', 'null', '//',
  )),
}).map(({ text, at, cut, insert }) => {
  const offset = at % (text.length + 1);
  return text.slice(0, offset) + insert + text.slice(offset + cut);
});

describe('a fault is found where JSON.parse refuses, and only there', () => {
  test('in JSON with a small damage', () => {
    fc.assert(fc.property(damaged, (text) => {
      const fault = jsonFault(text);
      expect(fault === null || fault.twice).toBe(parses(text));
    }), { numRuns: 5000 });
  });

  test('the text ahead of the fault is sound: it can be gone on with', () => {
    fc.assert(fc.property(damaged, (text) => {
      const fault = jsonFault(text);
      if (fault === null || fault.twice) return;
      const ahead = text.slice(0, fault.offset);
      // What stands ahead is a whole value, or its own first fault is that it ends.
      const again = jsonFault(ahead);
      expect(again === null || again.twice || again.found === 'the end of the file').toBe(true);
    }), { numRuns: 2000 });
  });

  test('at any depth', () => {
    const deep = '['.repeat(200_000);
    expect(jsonFault(deep)?.offset).toBe(200_000);
    expect(jsonFault(`${deep}${']'.repeat(200_000)}`)).toBe(null);
  });
});

describe('a field that stands twice in one group', () => {
  test('is found, also in another spelling', () => {
    expect(jsonFault('{"a": 1, "b": {"a": 2}, "\\u0061": 3}')).toMatchObject({ twice: true, offset: 24 });
  });

  test('is no fault in two groups', () => {
    expect(jsonFault('[{"a": 1}, {"a": {"a": 2}}]')).toBe(null);
  });

  test('is found exactly when parsing loses a field', () => {
    const fields = fc.array(fc.tuple(fc.constantFrom('a', 'b', '__proto__', 'constructor', 'c'), fc.integer()));
    fc.assert(fc.property(fields, (pairs) => {
      const text = `{${pairs.map(([name, value]) => `${JSON.stringify(name)}:${value}`).join()}}`;
      expect(jsonFault(text) === null).toBe(Object.keys(JSON.parse(text)).length === pairs.length);
    }));
  });
});

describe('the hint fits the mistake', () => {
  test.each([
    ['{"a": 1,}', 9, 'comma'], ['[1, 2,]', 7, 'comma'], ['{"a": 1 // one\n}', 9, 'no comments'],
    ["{'a': 1}", 2, 'double quotes'], ['{a: 1}', 2, 'double quotes'], ['{"a": 1,5}', 9, 'decimals'],
    ['{"a": +1}', 7, 'digit'], ['{"a": .5}', 7, 'digit'],
    ['{"a": NaN}', 7, 'finite'], ['{"a": dc}', 7, 'double quotes'],
    ['{"a": 1 "b": 2}', 9, 'comma may be missing'], ['{"a": 1', 8, 'not closed'], ['{"a": “x”}', 7, 'straight'],
    ['{"a": "C:\\data"}', 7, '\\'], ['{"a": "x\n"}', 7, 'not closed'],
  ])('%j', (text, column, words) => {
    const fault = jsonFault(text)!;
    expect(placeOf(text, fault.offset)).toEqual({ line: 1, column });
    expect(fault.hint).toContain(words);
  });
});

test('line and column count from 1 over every kind of line end', () => {
  for (const end of ['\n', '\r\n', '\r']) {
    const text = `{${end}${end}  "a": x}`;
    expect(placeOf(text, jsonFault(text)!.offset)).toEqual({ line: 3, column: 8 });
  }
});
