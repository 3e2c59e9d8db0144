/** CSV files as instruments export them: every dialect gives the same numbers, every fault its place. */
import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { columnUnit, CsvReader, findColumn } from '../../../sim/recorded/csv.ts';
import { LONGEST_LINE } from '../../../sim/recorded/lines.ts';
import { Folder } from './folder.ts';
import { faultOf } from './fault.ts';

const folder = new Folder();

function rowsOf(reader: CsvReader): number[][] {
  const row = new Float64Array(reader.columns);
  const rows: number[][] = [];
  while (reader.next(row)) rows.push([...row]);
  reader.close();
  return rows;
}

const read = (content: string | Uint8Array): number[][] => rowsOf(new CsvReader(folder.write('log.csv', content)));
const open = (content: string | Uint8Array): CsvReader => new CsvReader(folder.write('log.csv', content));

describe('the same rows in every dialect', () => {
  const rows = [[0, -1.5], [0.001, 2500], [0.0025, 0.125]];
  const dialects: Record<string, string | Uint8Array> = {
    'comma and point': 't,I\n0,-1.5\n0.001,2.5e3\n.0025,+0.125\n',
    'semicolon and comma': 't;I\n0;-1,5\n0,001;2,5E3\n,0025;0,125\n',
    'semicolon and point': 't;I\n0;-1.5\n1e-3;2500\n0.0025;0.125\n',
    'tab and comma': 't\tI\n0\t-1,5\n0,001\t2500\n2,5e-3\t0,125\n',
    'tab and point': 't\tI\n0\t-1.5\n0.001\t2500.\n2.5E-03\t0.125\n',
    'comma, quoted decimal comma': '"t","I"\n"0","-1,5"\n"0,001","2500"\n"0,0025","0,125"\n',
    'CR LF, no heading, no end of the last line': '0,-1.5\r\n0.001,2500\r\n0.0025,0.125',
    'byte order mark, blanks, blank lines': '\ufefft , I\n\n 0 , -1.5 \n\n0.001, 2500\n   \n0.0025, 0.125\n\n',
    'byte order mark before the first number': '\ufeff0,-1.5\n0.001,2500\n0.0025,0.125\n',
    'notes above, units below the headings': 'Recorder;3\nnote\nat noon; in the shade\n\nTime;I\n(s);(A)\n' +
      '0;-1.5\n0.001;2500\n0.0025;0.125\n',
    'a separator behind each row': 'Time,I\n0,-1.5,\n0.001,2500,\n0.0025,0.125,\n',
    'a separator behind each line': 'Time,I,\n0,-1.5,\n0.001,2500,\n0.0025,0.125,\n',
    'the note of a spreadsheet': 'sep=;\nt;I\n0;-1.5\n0.001;2500\n0.0025;0.125\n',
    'Latin-1 in the heading': Buffer.from('t [\u00b5s],I\n0,-1.5\n0.001,2500\n0.0025,0.125\n', 'latin1'),
  };
  test.each(Object.entries(dialects))('%s', (_, content) => {
    expect(read(content)).toEqual(rows);
  });

  test('one column without a separator, such as codes', () => {
    expect(read('code\n2048\n2049\n-1\n')).toEqual([[2048], [2049], [-1]]);
    expect(read('2048')).toEqual([[2048]]);
  });
});

describe('round trip', () => {
  const dialect = fc.record({
    separator: fc.constantFrom(',', ';', '\t'), decimal: fc.constantFrom('.', ','), end: fc.constantFrom('\n', '\r\n'),
    blanks: fc.constantFrom('', ' '), mark: fc.boolean(), notes: fc.array(fc.constantFrom('note', 'a note;1,x', '')),
    lastEnd: fc.boolean(),
  });
  const extremes = fc.constantFrom(0, -0, 5e-324, 2 ** 53 + 2, -1.7976931348623157e308, 0.1, 1e21, 1e-7);
  const numbers = fc.oneof(fc.double({ noNaN: true, noDefaultInfinity: true }), extremes, fc.integer());
  const tables = fc.integer({ min: 1, max: 5 }).chain((columns) =>
    fc.array(fc.array(numbers, { minLength: columns, maxLength: columns }), { minLength: 1, maxLength: 20 }));

  test('every finite number comes back as it was, whatever the dialect', () => {
    fc.assert(fc.property(tables, dialect, (rows, { separator, decimal, end, blanks, mark, notes, lastEnd }) => {
      fc.pre(!(decimal === ',' && separator === ',') && !(decimal === ',' && rows[0].length === 1));
      const cell = (value: number): string =>
        blanks + (Object.is(value, -0) ? '-0' : String(value)).replace('.', decimal) + blanks;
      const lines = [...notes, rows[0].map((_, i) => `column ${i}`).join(separator),
        ...rows.map((row) => row.map(cell).join(separator))];
      const text = (mark ? '\ufeff' : '') + lines.join(end) + (lastEnd ? end : '');
      expect(read(text)).toEqual(rows);
    }), { numRuns: 500 });
  });

  test('where the file is cut into chunks does not matter: lines of every length across their borders', () => {
    const rows: number[][] = [];
    let text = 't,I\n';
    for (let i = 0; text.length < 400_000; i++) {
      rows.push([i, i / 8]);
      text += `${i},${' '.repeat((i * 7919) % 3001)}${i / 8}\r\n`;
    }
    expect(read(text)).toEqual(rows);
  });
});

describe('headings and units', () => {
  test('the line above the numbers names the columns, and brackets their units', () => {
    const reader = open('Recorder 7\nTime [ms],I (A),I (probe 1),t/\u03bcs,A\n0,1,2,3,4\n');
    expect(reader.headings).toEqual(['Time [ms]', 'I (A)', 'I (probe 1)', 't/\u03bcs', 'A']);
    expect([0, 1, 2, 3, 4].map((i) => columnUnit(reader, i))).toEqual(['ms', 'A', null, '\u00b5s', null]);
    reader.close();
  });

  test.each([
    ['Time;I;n\n(ms);(mA);\n', ['Time', 'I', 'n'], ['ms', 'mA', null]],
    ['Time;I;n\nus;\u03bcA;\n', ['Time', 'I', 'n'], ['\u00b5s', '\u00b5A', null]],
    ['s;A;V\n', ['s', 'A', 'V'], ['s', 'A', 'V']],
    ['a note\ns;A;V\n', ['s', 'A', 'V'], ['s', 'A', 'V']],
    ['Time;A;B\n', ['Time', 'A', 'B'], [null, null, null]],
    ['two;cells\n', ['', '', ''], [null, null, null]],
    ['', ['', '', ''], [null, null, null]],
  ])('%j', (above, headings, units) => {
    const reader = open(`${above}0;1;2\n`);
    expect(reader.headings).toEqual(headings);
    expect(reader.units).toEqual(units);
    expect(rowsOf(reader)).toEqual([[0, 1, 2]]);
  });

  test('a column is found by its heading, with or without unit, capitals or not', () => {
    const reader = open('Time [ms],Current (A),current (mA)\n0,1,2\n');
    expect(findColumn(reader, 'time', 1, 'time')).toBe(0);
    expect(findColumn(reader, 'Current (mA)', 0, 'current')).toBe(2);
    expect(findColumn(reader, '', 1, 'current')).toBe(1);
    expect(faultOf(() => findColumn(reader, 'current', 0, 'current')).message).toContain('2 columns "current"');
    expect(faultOf(() => findColumn(reader, 'volts', 0, 'current')).message).toBe(
      'log.csv: no column "volts" for the current; the headings are "Time [ms]", "Current (A)", "current (mA)"');
    expect(faultOf(() => findColumn(reader, '', 3, 'code')).message).toBe(
      'log.csv: no column 4 for the code, the rows have 3');
    reader.close();
  });
});

describe('faults and their places', () => {
  test.each([
    ['text', 't,I\n0,1\n1,n/a\n', 3, '"I"', '"n/a" is not a number'],
    ['NaN', 't,I\n0,1\n\n1,NaN\n', 4, '"I"', '"NaN" is not a number'],
    ['Infinity', '0,1\nInfinity,2\n', 2, '1', '"Infinity" is not a number'],
    ['hexadecimal', 't,I\r\n0,1\r\n0x10,2\r\n', 3, '"t"', '"0x10" is not a number'],
    ['two signs', 't,I\n0,1\n1,--2\n', 3, '"I"', '"--2" is not a number'],
    ['two points', 't,I\n0,1\n1,1.2.3\n', 3, '"I"', '"1.2.3" is not a number'],
    ['an open quote', 't,I\n0,1\n1,"2\n', 3, '"I"', '""2" is not a number'],
    ['text behind a quote', 't,I\n0,1\n1,"2"x\n', 3, '"I"', '""2"x" is not a number'],
    ['letters beyond ASCII', 't,I\n0,1\n1,\u2212\u00b5\n', 3, '"I"', '"\u2212\u00b5" is not a number'],
    ['an empty cell', 't,I\n0,1\n,2\n', 3, '"t"', 'an empty cell where a number must stand'],
    ['a number beyond double precision', 't,I\n0,1\n1,1e999\n', 3, '"I"', '"1e999" is too large a number'],
    ['a comma after points', 't;I\n0;1.5\n1;2,5\n', 3, '"I"',
      '"2,5" has a decimal comma, earlier cells have a decimal point'],
    ['a point after commas', 't;I\n0,5;1\n1;2.5\n', 3, '"I"',
      '"2.5" has a decimal point, earlier cells have a decimal comma'],
    ['a bad cell in the first row', 't,I\n0,n/a\n1,2\n', 2, '2',
      '"n/a" is not a number (line 3 is the first row of numbers)'],
    ['NaN at the head of the first row', 't,I\nNaN,1\n1,2\n', 2, '1',
      '"NaN" is not a number (line 3 is the first row of numbers)'],
    ['a short row', 't,I\n0,1\n1\n', 3, null, '1 cell, where the first row (line 2) has 2'],
    ['a long row', 'note\nt,I\n0,1\n1,2,3\n', 4, null, '3 cells, where the first row (line 3) has 2'],
    ['a long row behind trailing separators', 't,I\n0,1,\n1,2,3\n', 3, null,
      '3 cells, where the first row (line 2) has 2'],
  ])('%s', (_, content, line, column, what) => {
    const fault = faultOf(() => read(content));
    expect(fault).toMatchObject({ file: 'log.csv', line, column });
    expect(fault.message).toBe(`log.csv, line ${line}${column === null ? '' : `, column ${column}`}: ${what}`);
  });

  test('a file that is missing, a folder, empty, without numbers, UTF-16', () => {
    expect(faultOf(() => new CsvReader(`${folder.path}/absent.csv`, 'absent.csv'))).toMatchObject({
      file: 'absent.csv', line: null,
      message: `absent.csv: there is no such file (looked for ${folder.path}/absent.csv)`,
    });
    expect(faultOf(() => new CsvReader(folder.path, 'here')).message).toBe('here: is a folder, not a file');
    expect(faultOf(() => read('')).message).toBe('log.csv: no row of numbers in the whole file');
    expect(faultOf(() => read('t,I\nno,numbers\n')).message).toBe(
      'log.csv: no row of numbers in the whole file; line 2 is "no,numbers"');
    expect(faultOf(() => read(Buffer.from('\ufefft,I\n0,1\n', 'utf16le'))).message).toContain('UTF-16');
  });

  test('a line may have LONGEST_LINE bytes and no more, whatever ends it', () => {
    for (const end of ['\n', '\r\n', '']) {
      const padded = (bytes: number): string => `t,I\n0,1\n${'1,'.padEnd(bytes - 1)}2${end}`;
      expect(read(padded(LONGEST_LINE))).toEqual([[0, 1], [1, 2]]);
      expect(faultOf(() => read(padded(LONGEST_LINE + 1)))).toMatchObject({ line: 3 });
    }
  });

  test('a longest line keeps its end and its number wherever the chunks are cut', () => {
    for (let blanks = LONGEST_LINE - 20; blanks < LONGEST_LINE; blanks++) {
      const reader = open(`0,1\n${' '.repeat(blanks)}\n${'1,'.padEnd(LONGEST_LINE - 1)}2\r\n3,4\n`);
      const row = new Float64Array(2);
      const lines: number[] = [];
      while (reader.next(row)) lines.push(reader.line);
      expect(lines).toEqual([1, 3, 4]);
      expect([...row]).toEqual([3, 4]);
    }
  });

  test('rows before a fault are given, and the reader tells their lines', () => {
    const reader = open('t,I\n\n0,1\n\n1,2\n1,x\n');
    const row = new Float64Array(2);
    expect([reader.next(row), reader.line, reader.next(row), reader.line]).toEqual([true, 3, true, 5]);
    expect(faultOf(() => reader.next(row)).line).toBe(6);
    reader.close();
    reader.close();
    expect(reader.next(row)).toBe(false);
  });

  test('a row that is too small is refused', () => {
    const reader = open('0,1\n');
    expect(() => reader.next(new Float64Array(1))).toThrow(RangeError);
    expect(() => reader.demand(2, 'anything')).toThrow(RangeError);
    reader.close();
  });
});

test('an empty cell is NaN where it is allowed, and an ignored column may hold anything from the second row on', () => {
  const reader = open('t,I,note,state\n0,,1,1\n1,2,a remark,"x"\n,1,,\n');
  reader.demand(1, 'number or empty');
  reader.demand(2, 'anything');
  reader.demand(3, 'anything');
  const row = new Float64Array(4);
  reader.next(row);
  expect([...row]).toEqual([0, NaN, NaN, NaN]);
  reader.next(row);
  expect([...row]).toEqual([1, 2, NaN, NaN]);
  expect(faultOf(() => reader.next(row))).toMatchObject({ line: 4, column: '"t"' });
  reader.close();
});

test('a file of 40 MB is read in flat memory', () => {
  setFlagsFromString('--expose-gc');
  const collect = runInNewContext('gc') as () => void;
  const inUse = (): number => {
    collect();
    const { heapUsed, external } = process.memoryUsage();
    return heapUsed + external;
  };
  const line = `${'1.2345678,'.repeat(9)}-2.5e-3\n`;
  const repeated = Math.ceil(40e6 / line.length);
  const path = folder.write('big.csv', line.repeat(repeated));
  const before = inUse();
  const reader = new CsvReader(path);
  const row = new Float64Array(reader.columns);
  let rows = 0;
  let most = 0;
  while (reader.next(row)) if (++rows % 50000 === 0) most = Math.max(most, inUse());
  expect(rows).toBe(repeated);
  expect(most).toBeGreaterThan(0);
  expect(most - before).toBeLessThan(4e6); // a tenth of the file, where two chunks of 64 KiB are needed
});
