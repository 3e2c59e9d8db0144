/** A recorded current: straight lines between its rows, units, and every fault with its line. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { openCurrent, type CurrentSource } from '../../../sim/current/source.ts';
import type { CurrentSpec } from '../../../sim/probe/fields.ts';
import { Folder } from '../recorded/folder.ts';
import { faultOf } from '../recorded/fault.ts';

const folder = new Folder();

type FileSpec = Extract<CurrentSpec, { shape: 'file' }>;

function open(content: string, stepSeconds: number, more: Partial<FileSpec> = {}): CurrentSource {
  folder.write('currents.csv', content);
  const spec: FileSpec = { shape: 'file', path: 'currents.csv', timeColumn: '', currentColumn: '', timeUnit: 's',
    currentUnit: 'A', ...more };
  return openCurrent(spec, stepSeconds, folder.path);
}

function take(source: CurrentSource, count: number): number[] {
  const amperes = new Float64Array(count);
  source.next(amperes, count);
  source.close();
  return [...amperes];
}

describe('between rows', () => {
  test('rows on the grid come out as they are, points between them on the straight line', () => {
    expect(take(open('0,1\n1,3\n2,-1\n4,7\n', 0.5), 9)).toEqual([1, 2, 3, 1, -1, 1, 3, 5, 7]);
  });

  test('every number recorded on the grid comes out as it is, zero without its sign', () => {
    const numbers = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), { minLength: 2, maxLength: 30 });
    fc.assert(fc.property(numbers, (amperes) => {
      const rows = amperes.map((value, i) => `${i},${value}`);
      const found = take(open(rows.join('\n'), 1), amperes.length);
      expect(found.map((value) => value + 0)).toEqual(amperes.map((value) => value + 0));
    }));
  });

  test('many rows between two points: only those around a point matter', () => {
    const rows = Array.from({ length: 1001 }, (_, i) => `${i / 1000},${i % 250 === 0 ? i / 250 : 999}`);
    expect(take(open(rows.join('\n'), 0.25), 5)).toEqual([0, 1, 2, 3, 4]);
  });

  test('the first row stands at t = 0, also where it counts from 1970', () => {
    expect(take(open('1700000000,1\n1700000001,2\n1700000002,4\n', 0.5), 5)).toEqual([1, 1.5, 2, 3, 4]);
    expect(take(open('-1,1\n0,2\n1,4\n', 0.5), 5)).toEqual([1, 1.5, 2, 3, 4]);
  });

  test('a straight line recorded at uneven times is that line at every grid point', () => {
    const gaps = fc.array(fc.integer({ min: 1, max: 5_000_000 }), { minLength: 1, maxLength: 40 });
    const line = fc.record({ slope: fc.integer({ min: -100, max: 100 }), start: fc.integer({ min: -100, max: 100 }) });
    const steps = fc.double({ min: 1e-3, max: 0.5, noNaN: true });
    fc.assert(fc.property(gaps, line, steps, (gaps, { slope, start }, stepSeconds) => {
      let micros = 0;
      const rows = [0, ...gaps].map((gap) => {
        micros += gap;
        return `${micros},${start + (slope * micros) / 1e6}`;
      });
      const count = Math.floor(micros / 1e6 / stepSeconds) + 1;
      const found = take(open(rows.join('\n'), stepSeconds, { timeUnit: 'µs' }), count);
      let worst = 0;
      found.forEach((amperes, n) => {
        worst = Math.max(worst, Math.abs(amperes - (start + slope * n * stepSeconds)));
      });
      // 200 s at the most: levels to 20100 A, each rounded to 2^-39 A, and positions to 2^-46 s at 100 A/s, in fewer
      // than ten operations
      expect(worst).toBeLessThan(10 * (2 ** -39 + 100 * 2 ** -46));
    }), { numRuns: 200 });
  });
});

describe('units', () => {
  const rows = '0,100\n1,200\n2,400\n';
  test.each([
    ['t,I\n', 's', 'A', 1, 1], ['t,I\n', 'ms', 'mA', 1e-3, 1e-3], ['t,I\n', 'µs', 'µA', 1e-6, 1e-6],
    ['t,I\n', 'ns', 'kA', 1e-9, 1e3], ['t [ms],I [mA]\n', 's', 'A', 1e-3, 1e-3],
    ['t (us),I (uA)\n', 's', 'A', 1e-6, 1e-6], ['t (\u03bcs),I (\u03bcA)\n', 's', 'A', 1e-6, 1e-6],
    ['t (\u00b5s),I (\u00b5A)\n', 's', 'A', 1e-6, 1e-6], ['t,I\nns,mA\n', 's', 'A', 1e-9, 1e-3],
    ['t,I (mA)\n', 'ms', 'A', 1e-3, 1e-3], ['t/ns,I/kA\n', 's', 'A', 1e-9, 1e3],
  ] as const)('%j with %s and %s where the file names none', (above, timeUnit, currentUnit, second, ampere) => {
    const found = take(open(above + rows, second, { timeUnit, currentUnit }), 3);
    [100, 200, 400].forEach((value, i) => {
      const expected = value * ampere;
      // time and current are scaled and rounded, the expected value too: fewer than nine roundings of 2^-53
      expect(Math.abs(found[i] - expected)).toBeLessThan(expected * 1e-15);
    });
  });

  test('1234 mA is the very number that 1.234 A is', () => {
    fc.assert(fc.property(fc.integer({ min: -1e9, max: 1e9 }), (milliamperes) => {
      const [found] = take(open(`t,I (mA)\n0,${milliamperes}\n1,0\n`, 1), 1);
      expect(found + 0).toBe(Number(`${milliamperes}e-3`) + 0); // + 0: zero without its sign
    }));
  });

  test('columns by heading, others are not looked at', () => {
    const content = 'No,I (A),state,t (ms)\n0,5,1,0\n1,6,bad,1\n2,7,,2\n';
    expect(take(open(content, 1e-3, { timeColumn: 'T', currentColumn: 'i' }), 3)).toEqual([5, 6, 7]);
  });
});

describe('faults', () => {
  test.each([
    ['a time that stands still', 't,I\n0,1\n1,2\n1,3\n', 4, '"t"', '1 is not later than 1 in the row before'],
    ['a time that runs back', '0,1\n\n1,2\n0.5,3\n', 4, '1', '0.5 is not later than 1 in the row before'],
    ['a bad cell', 't,I\n0,1\n1,2\n2,n/a\n', 4, '"I"', '"n/a" is not a number'],
    ['the number for over-range', 't,I\n0,1\n1,9.9E37\n', 3, '"I"', '9.9e+37 A, allowed -1000000 to 1000000 A'],
    ['one row', 't,I\n0,1\n\n', 2, null, 'only one row; a current needs at least two'],
    ['one column', 'I\n0\n1\n', null, null, 'no column 2 for the current, the rows have 1'],
    ['a unit of something else', 't (ms),U (mV)\n0,1\n1,2\n', null, '"U (mV)"', 'unit "mV", allowed A, mA, µA, kA'],
    ['minutes', 't (min),I\n0,1\n1,2\n', null, '"t (min)"', 'unit "min", allowed s, ms, µs, ns'],
  ])('%s', (_, content, line, column, what) => {
    const fault = faultOf(() => take(open(content, 0.5), 5));
    expect(fault).toMatchObject({ file: 'currents.csv', line, column });
    expect(fault.message).toContain(what);
  });

  test('a missing column lists those there are; time and current may not be the same one', () => {
    const content = 'Time,I\n0,1\n1,2\n';
    expect(faultOf(() => open(content, 1, { currentColumn: 'U' })).message).toBe(
      'currents.csv: no column "U" for the current; the headings are "Time", "I"');
    expect(faultOf(() => open(content, 1, { currentColumn: 'time' })).message).toContain('both time and current');
  });

  test('a missing file tells where it was looked for', () => {
    const spec: FileSpec = { shape: 'file', path: 'absent.csv', timeColumn: '', currentColumn: '', timeUnit: 's',
      currentUnit: 'A' };
    expect(() => openCurrent(spec, 1, folder.path)).toThrow(
      `absent.csv: there is no such file (looked for ${folder.path}/absent.csv)`);
  });

  test('a point behind the last row is refused with the length of the record; the last row itself is not', () => {
    const source = open('t,I\n5,1\n5.1,2\n5.3,4\n', 0.1);
    const amperes = new Float64Array(5);
    source.next(amperes, 3);
    expect(source.endSeconds).toBe(null);
    source.next(amperes, 1);
    expect(amperes[0]).toBeCloseTo(4, 12); // 5.3 - 5 and 3 * 0.1 are both rounded, to about 1e-15
    const fault = faultOf(() => source.next(amperes, 1));
    expect(fault.message).toMatch(/^currents\.csv, line 4: the record lasts 0\.(3|29{10}\d*) s from its first row/);
    expect(fault.message).toContain('the current at 0.4 s was asked for');
    expect(source.endSeconds).toBeCloseTo(0.3, 12);
    source.close();
    source.close();
  });
});
