/**
 * The checked and counted operators agree with the fast ones, the checked ones refuse, and the bundle is ES5 of one
 * piece.
 */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { execFileSync } from 'node:child_process';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import * as fast from '../../lib/arithmetic.ts';
import * as checked from '../../lib/variants/checked.ts';
import * as counted from '../../lib/variants/counted.ts';
import * as library from '../../lib/index.ts';
import { bundle, bundleText } from './bundle.ts';
import { edgy, sampleOf, unitOf } from './records.ts';
import { feed } from './feed.ts';

type Operator = (...operands: number[]) => number;
type Operators = Record<string, Operator>;

const WALL = 2 ** 53;
const wide = fc.oneof(edgy(-(WALL - 1), WALL - 1), edgy(-(2 ** 31), 2 ** 31), edgy(-40000, 40000));
const half = edgy(-(2 ** 52) + 1, 2 ** 52 - 1);
const narrow = fc.oneof(edgy(-(2 ** 31), 2 ** 31 - 1), edgy(-300, 300));
const shift = edgy(0, 52);
const divisor = fc.oneof(edgy(1, 2 ** 52), edgy(1, 70000));

/** Operands within each operator's law. */
const WITHIN: Record<string, fc.Arbitrary<number[]>> = {
  add: fc.tuple(half, half),
  subtract: fc.tuple(half, half),
  multiply: fc.tuple(wide, wide).filter(([a, b]) => Math.abs(a * b) < WALL),
  multiplyAdd: fc.tuple(wide, narrow, edgy(-65536, 65536)).filter(([s, a, b]) => Math.abs(s) + Math.abs(a * b) < WALL),
  shiftLeft: fc.tuple(wide, shift).filter(([a, n]) => Math.abs(a) * 2 ** n < WALL),
  shiftFloor: fc.tuple(wide, shift),
  shiftRound: fc.tuple(half, shift),
  lowBits: fc.tuple(wide, shift),
  divideFloor: fc.tuple(wide, divisor),
  divideRound: fc.tuple(wide, divisor).filter(([a, d]) => Math.abs(a) + d < WALL),
  magnitude: fc.tuple(wide),
  clamp: fc.tuple(wide, wide, wide).map(([a, b, c]) => [a, Math.min(b, c), Math.max(b, c)]),
  addWrapping: fc.tuple(narrow, narrow),
  subtractWrapping: fc.tuple(narrow, narrow),
};

describe('variants of the operators', () => {
  test('have the names of the fast ones', () => {
    expect(Object.keys(checked).sort()).toEqual(Object.keys(fast).sort());
    const extra = ['OPERATORS', 'OPERATION_COUNTS', 'clearOperationCounts'];
    expect(Object.keys(counted).sort()).toEqual([...Object.keys(fast), ...extra].sort());
    expect(Object.keys(WITHIN).sort()).toEqual(Object.keys(fast).sort());
    expect(counted.OPERATORS.length).toBe(counted.OPERATION_COUNTS.length);
  });

  test.each(Object.keys(WITHIN))('%s: fast, checked and counted agree for operands within the law', (name) => {
    fc.assert(fc.property(WITHIN[name], (operands) => {
      const result = (fast as unknown as Operators)[name](...operands);
      expect(Number.isSafeInteger(result)).toBe(true);
      // + 0: a negative zero is zero
      expect((checked as unknown as Operators)[name](...operands) + 0).toBe(result + 0);
      expect((counted as unknown as Operators)[name](...operands) + 0).toBe(result + 0);
    }), { numRuns: 500 });
  });

  test.each<[string, number[]]>([
    ['add', [WALL - 1, 1]], ['add', [-WALL + 1, -1]], ['add', [0.5, 0]], ['add', [NaN, 0]],
    ['subtract', [-WALL + 1, 1]],
    ['multiply', [2 ** 27, 2 ** 26]], ['multiply', [0.5, 1]], ['multiplyAdd', [WALL - 1, 1, 1]],
    ['multiplyAdd', [-1, 2 ** 27, 2 ** 26]], ['shiftLeft', [1, 53]], ['shiftLeft', [2, 52]], ['shiftLeft', [1, -1]],
    ['shiftLeft', [1, 0.5]], ['shiftFloor', [1, 53]], ['shiftFloor', [WALL, 1]], ['shiftRound', [WALL - 1, 1]],
    ['shiftRound', [0.5, 1]], ['lowBits', [1, -1]], ['lowBits', [Infinity, 1]], ['divideFloor', [1, 0]],
    ['divideFloor', [1, -1]], ['divideFloor', [1, 1.5]], ['divideFloor', [WALL, 2]], ['divideRound', [1, 0]],
    ['divideRound', [1, 2 ** 52 + 1]], ['magnitude', [WALL]], ['clamp', [0.5, 0, 1]], ['clamp', [0, 1, -1]],
    ['addWrapping', [2 ** 31, 0]], ['subtractWrapping', [0, -(2 ** 31) - 1]], ['addWrapping', [0.5, 0]],
  ])('checked %s refuses %j, naming operator and operands', (name, operands) => {
    const call = () => (checked as unknown as Operators)[name](...operands);
    expect(call).toThrow(RangeError);
    expect(call).toThrow(`${name}(${operands.join(', ')}): `);
  });

  test('counted adds up by operator, multiplies by the width of their operands', () => {
    counted.clearOperationCounts();
    counted.multiply(32767, -32768);
    counted.multiply(32768, 1);
    counted.multiply(32768, 1);
    counted.multiply(2147483648, 1);
    counted.multiplyAdd(1e12, 3, 4);
    counted.shiftRound(5, 1);
    const used = counted.OPERATORS.map((name, i) => [name, counted.OPERATION_COUNTS[i]]).filter(([, times]) =>
      times !== 0);
    expect(used).toEqual([
      ['multiply16', 1], ['multiply32', 2], ['multiplyWide', 1], ['multiplyAdd16', 1], ['shiftRound', 1],
    ]);
    counted.clearOperationCounts();
    expect([...counted.OPERATION_COUNTS].every((times) => times === 0)).toBe(true);
  });
});

describe('bundle', () => {
  test('has every export of the library, and the counts with the counted operators', () => {
    expect(Object.keys(bundle()).sort()).toEqual(Object.keys(library).sort());
    expect(Object.keys(bundle({ arithmetic: 'counted' }))).toContain('OPERATION_COUNTS');
  });

  test('is ES5: a parser takes it, and there is no let, const, class or arrow in it', () => {
    const text = bundleText();
    const words = text.replace(/\/\*[\s\S]*?\*\/|\/\/.*$|'(?:[^'\\\n]|\\.)*'|"(?:[^"\\\n]|\\.)*"/gm, '');
    expect(/\b(let|const|class|import|export)\b|=>|`|\.\.\./.exec(words)).toBe(null);
    const folder = mkdtempSync(join(tmpdir(), 'bundle-'));
    try {
      const file = join(folder, 'chain.js');
      writeFileSync(file, text);
      execFileSync(process.execPath, ['--check', file]);
    } finally {
      rmSync(folder, { recursive: true });
    }
  });

  test('an edit changes that bundle and no other', () => {
    const constants = { kind: 'scale', gain: 1, shift: 1, readingsPerAmpere: 1000, limit: 100 } as const;
    const wrong = bundle({ edits: [{ file: 'scale.ts', find: 'shiftRound(multiply(',
      replace: 'shiftRound(-multiply(' }] });
    expect(feed(new wrong.Scale(constants, unitOf()), [sampleOf(6)], [1])[0].value).toBe(-3n);
    expect(feed(new (bundle().Scale)(constants, unitOf()), [sampleOf(6)], [1])[0].value).toBe(3n);
  });

  test('an edit must match exactly once, in a file that the library uses', () => {
    const text = (file: string, find: string) => () => bundleText({ edits: [{ file, find, replace: '' }] });
    expect(text('scale.ts', 'no such text')).toThrow('matches 0 times');
    expect(text('scale.ts', 'clamp')).toThrow(/matches \d+ times, allowed: once/);
    expect(text('none.ts', 'clamp')).toThrow('no such file');
  });

  test('two exports of one name are refused, a source that does not parse too', () => {
    const edit = (replace: string) => () => bundleText({ edits: [{ file: 'zero.ts', find: 'const IDLE = 0;',
      replace }] });
    expect(edit('const IDLE = 0; export const CLAMPED = 4;'))
      .toThrow('CLAMPED is exported by status.ts and by zero.ts');
    expect(edit('const IDLE = ;')).toThrow(SyntaxError);
  });

  test('with checked operators a stage whose constants were never proved names operator and operands', () => {
    const { Scale } = bundle({ arithmetic: 'checked' });
    const unproved = new Scale({ kind: 'scale', gain: 2147483647, shift: 0, readingsPerAmpere: 1000, limit: 1 },
      unitOf());
    expect(() => feed(unproved, [sampleOf(2147483647)], [1])).toThrow('multiply(2147483647, 2147483647): gives');
  });
});
