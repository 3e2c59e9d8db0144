/**
 * Rows of numbers from a CSV file as an oscilloscope or a data logger exports it, one after the other, in memory that
 * does not grow with the file. The first line that consists of numbers (and empty cells) is the first row and decides
 * the separator (tab, semicolon, comma, or none: one column) and the number of columns. The decimal sign is the first
 * one met, point or comma; the other one is an error from then on, because it may be a mark of thousands. A separator
 * behind the last cell of each row is accepted where the first row has it and no heading stands there.
 */
import { basename } from 'node:path';
import { isBlank, isNumber, separatorOfNumbers, splitCells, type Separator } from './cells.ts';
import { CsvError } from './error.ts';
import { columnsFrom, spoiledCell, type Line } from './headings.ts';
import { LineReader, readable } from './lines.ts';
import { nameAndUnit } from './units.ts';

export { CsvError } from './error.ts';

/** What a column must hold; 'anything' is not looked at and gives NaN, as an empty cell that is allowed does. */
export type Demand = 'number' | 'number or empty' | 'anything';

const SEPARATOR_NOTE = /^sep=.?$/i; // a hint that spreadsheets write for themselves

export class CsvReader {
  /** How messages call the file. */
  readonly file: string;
  readonly headings: readonly string[];
  readonly units: readonly (string | null)[];
  readonly columns: number;
  /** Line of the row last given, from 1; 0 before the first. */
  line = 0;
  private readonly lines: LineReader;
  private readonly separator: Separator;
  private readonly demands: Demand[];
  private readonly firstLine: number;
  private readonly trailing: boolean;
  private decimals = '';
  private pending = true;

  /** `file`: how messages call it; left out, the name of the file without its folders. */
  constructor(path: string, file = basename(path)) {
    this.file = file;
    this.lines = new LineReader(path, file);
    try {
      const above: Line[] = [];
      this.separator = this.findFirstRow(above);
      this.firstLine = this.lines.line;
      const cells = splitCells(this.lines.text, this.separator);
      const named = columnsFrom(above, this.separator, cells.length);
      this.trailing = cells.length > 1 && isBlank(cells[cells.length - 1]) && named.headings.at(-1) === '';
      this.columns = this.trailing ? cells.length - 1 : cells.length;
      const { headings, units } = this.trailing ? columnsFrom(above, this.separator, this.columns) : named;
      this.headings = headings;
      this.units = units;
      this.demands = new Array<Demand>(this.columns).fill('number');
      this.refuseSpoiledRow(above);
    } catch (error) {
      this.lines.close();
      throw error;
    }
  }

  /** Says what a column must hold from the next row on; without a word it is 'number'. */
  demand(column: number, demand: Demand): void {
    if (!Number.isInteger(column) || column < 0 || column >= this.columns) {
      throw new RangeError(`column: found ${column}, allowed 0 to ${this.columns - 1}`);
    }
    this.demands[column] = demand;
  }

  /** Writes the next row; false when there is none left. */
  next(row: Float64Array): boolean {
    if (row.length < this.columns) {
      throw new RangeError(`row: found room for ${row.length} numbers, allowed at least ${this.columns}`);
    }
    if (!this.pending && !this.lines.next()) {
      this.close();
      return false;
    }
    this.pending = false;
    this.line = this.lines.line;
    const cells = splitCells(this.lines.text, this.separator);
    const { columns, demands } = this;
    if (cells.length !== columns) this.dropTrailing(cells);
    for (let i = 0; i < columns; i++) row[i] = demands[i] === 'anything' ? NaN : this.numberIn(cells[i], i);
    return true;
  }

  close(): void {
    this.pending = false;
    this.lines.close();
  }

  /** How messages call a column: its heading in quotes, or its number from 1. */
  columnName(column: number): string {
    return this.headings[column] === '' ? String(column + 1) : `"${this.headings[column]}"`;
  }

  /** Reads on to the first line of numbers; `above` gets the two lines before it. */
  private findFirstRow(above: Line[]): Separator {
    while (this.lines.next()) {
      const separator = separatorOfNumbers(this.lines.text);
      if (separator !== null) return separator;
      if (SEPARATOR_NOTE.test(this.lines.text)) continue;
      above.push({ text: this.lines.text, number: this.lines.line });
      if (above.length > 2) above.shift();
    }
    const last = above.at(-1);
    const seen = last === undefined ? '' : `; line ${last.number} is "${readable(last.text).slice(0, 60)}"`;
    throw new CsvError(`no row of numbers in the whole file${seen}`, this.file);
  }

  /** A first row with a bad cell must not pass for a heading and get lost. */
  private refuseSpoiledRow(above: readonly Line[]): void {
    const line = above.at(-1);
    if (line === undefined) return;
    const spoiled = spoiledCell(line.text, this.separator, this.columns);
    if (spoiled < 0) return;
    const cell = readable(splitCells(line.text, this.separator)[spoiled].trim());
    throw new CsvError(`"${cell}" is not a number (line ${this.firstLine} is the first row of numbers)`,
      this.file, line.number, String(spoiled + 1));
  }

  private dropTrailing(cells: string[]): void {
    if (this.trailing && cells.length === this.columns + 1 && isBlank(cells[this.columns])) return;
    const have = `${cells.length} ${cells.length === 1 ? 'cell' : 'cells'}`;
    throw new CsvError(`${have}, where the first row (line ${this.firstLine}) has ${this.columns}`,
      this.file, this.line);
  }

  private numberIn(cell: string, column: number): number {
    if (!isNumber(cell)) return this.notANumber(cell, column);
    let value: number;
    if (cell.includes(',')) {
      if (this.decimals === '.') this.mixedDecimals(cell, column);
      this.decimals = ',';
      value = Number(cell.replace(',', '.'));
    } else {
      if (cell.includes('.')) {
        if (this.decimals === ',') this.mixedDecimals(cell, column);
        this.decimals = '.';
      }
      value = Number(cell);
    }
    if (!Number.isFinite(value)) this.fault(column, `"${cell.trim()}" is too large a number`);
    return value;
  }

  private notANumber(cell: string, column: number): number {
    if (!isBlank(cell)) return this.fault(column, `"${readable(cell.trim())}" is not a number`);
    if (this.demands[column] === 'number or empty') return NaN;
    return this.fault(column, 'an empty cell where a number must stand');
  }

  private mixedDecimals(cell: string, column: number): never {
    const [here, before] = this.decimals === '.' ? ['comma', 'point'] : ['point', 'comma'];
    return this.fault(column, `"${cell.trim()}" has a decimal ${here}, earlier cells have a decimal ${before}`);
  }

  private fault(column: number, what: string): never {
    throw new CsvError(what, this.file, this.line, this.columnName(column));
  }
}

/**
 * Index of the column with the heading `wanted`, with or without its unit, capitals or not; `fallback` where `wanted`
 * is empty. `what`: how the message calls what is looked for, such as "time".
 */
export function findColumn(reader: CsvReader, wanted: string, fallback: number, what: string): number {
  if (wanted.trim() === '') {
    if (fallback < reader.columns) return fallback;
    throw new CsvError(`no column ${fallback + 1} for the ${what}, the rows have ${reader.columns}`, reader.file);
  }
  const found = matching(reader, wanted);
  if (found.length === 1) return found[0];
  const there = reader.headings.some((heading) => heading !== '')
    ? `the headings are ${reader.headings.map((heading) => `"${heading}"`).join(', ')}`
    : 'the file has no headings';
  const count = found.length === 0 ? 'no column' : `${found.length} columns`;
  throw new CsvError(`${count} "${wanted}" for the ${what}; ${there}`, reader.file);
}

/** Columns with this very heading, or else those whose heading without its unit is the same. */
function matching(reader: CsvReader, wanted: string): number[] {
  const places = reader.headings.map((_, index) => index);
  const same = (a: string, b: string): boolean => a.trim().toLowerCase() === b.trim().toLowerCase();
  const exact = places.filter((index) => same(reader.headings[index], wanted));
  if (exact.length > 0) return exact;
  return places.filter((index) => same(nameAndUnit(reader.headings[index]).name, nameAndUnit(wanted).name));
}

/** Unit that the heading or a line of units names, with the micro sign as U+00B5; null where none is named. */
export function columnUnit(reader: CsvReader, column: number): string | null {
  return reader.units[column];
}
