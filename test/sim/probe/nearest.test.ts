import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { editDistance, nearest } from '../../../sim/probe/nearest.ts';

const letters = fc.string({ unit: fc.constantFrom('a', 'b', 'c'), maxLength: 7 });

/** The definition by recursion, without a table: the oracle for the row-by-row form. */
function distanceByDefinition(a: string, b: string): number {
  if (a === '' || b === '') return a.length + b.length;
  const same = a.at(-1) === b.at(-1) ? 0 : 1;
  const ways = [
    distanceByDefinition(a.slice(0, -1), b) + 1,
    distanceByDefinition(a, b.slice(0, -1)) + 1,
    distanceByDefinition(a.slice(0, -1), b.slice(0, -1)) + same,
  ];
  const swapped = a.length > 1 && b.length > 1 && a.at(-1) === b.at(-2) && a.at(-2) === b.at(-1);
  if (swapped) ways.push(distanceByDefinition(a.slice(0, -2), b.slice(0, -2)) + 1);
  return Math.min(...ways);
}

describe('edit distance', () => {
  test('is what its definition says', () => {
    fc.assert(fc.property(letters, letters, (a, b) => {
      expect(editDistance(a, b)).toBe(distanceByDefinition(a, b));
    }), { numRuns: 60 });
  });

  test('is symmetric, and zero for equal words only', () => {
    fc.assert(fc.property(letters, letters, (a, b) => {
      expect(editDistance(a, b)).toBe(editDistance(b, a));
      expect(editDistance(a, b) === 0).toBe(a === b);
    }));
  });

  // "kitten" to "sitting" takes three edits: the usual textbook example of V. I. Levenshtein's distance.
  test.each([['kitten', 'sitting', 3], ['ab', 'ba', 1], ['', 'abc', 3]])('%s to %s', (a, b, edits) => {
    expect(editDistance(a, b)).toBe(edits);
  });
});

describe('nearest', () => {
  const known = ['gap_mm', 'path_mm', 'permeability', 'noise_uT_per_rtHz'];

  test.each([
    ['gap_m', 'gap_mm'], ['GAP_MM', 'gap_mm'], ['permability', 'permeability'], ['noise', 'noise_uT_per_rtHz'],
    ['noise_mV', 'noise_uT_per_rtHz'], ['colour', null], ['', null], ['__proto__', null],
  ])('%j means %j', (word, meant) => {
    expect(nearest(word, known)).toBe(meant);
  });

  test('both micro signs and u are alike', () => {
    for (const word of ['uA', '\u00b5A', '\u03bcA']) expect(nearest(word, ['mA', 'µA'])).toBe('µA');
  });

  test('a name that two fields share without their units means neither', () => {
    expect(nearest('lengths_of_everything', ['lengths_mm', 'lengths_in'])).toBe(null);
  });

  test('a known word means itself', () => {
    fc.assert(fc.property(fc.constantFrom(...known), (word) => nearest(word, known) === word));
  });

  test('gives a known word or null for any word', () => {
    fc.assert(fc.property(fc.string(), (word) => [null, ...known].includes(nearest(word, known))));
  });
});
