/**
 * Headings and units from the lines above the first row of numbers. The last of them names the columns when it has as
 * many cells as a row; when it holds nothing but units, the line above it does. Other lines are notes and passed over.
 */
import { isBlank, isNumber, splitCells, type Separator } from './cells.ts';
import { readable } from './lines.ts';
import { loneUnit, nameAndUnit } from './units.ts';

/** A line above the first row, one character a byte. */
export interface Line {
  text: string;
  number: number;
}

export interface Columns {
  /** As written; '' where a column has none. */
  headings: string[];
  /** null where neither the heading nor a line of units names one. */
  units: (string | null)[];
}

/** What stands where a number is missing; such a cell does not make a row of values a heading. */
const MISSING = /^\s*(?:[+-]?nan(?:\(.*\))?|[+-]?inf(?:inity)?|n\/?a|null|none|overflow|-+|\?+|\*+|#.*)?\s*$/i;

/** `above`: up to two lines directly above the first row of numbers, the nearer one last. */
export function columnsFrom(above: readonly Line[], separator: Separator, columns: number): Columns {
  const lines = above.map(({ text }) => cellsOf(text, separator, columns));
  const last = lines.at(-1) ?? null;
  if (last === null) return unnamed(columns);
  const written = last.filter((cell) => cell !== '');
  const unitsOnly = written.length > 0 && written.every((cell) => loneUnit(cell) !== null);
  const headings = (unitsOnly ? lines.at(-2) : null) ?? last;
  const units = headings.map((heading) => nameAndUnit(heading).unit);
  // only a whole line of units may be bare: a heading "A" in other company is a channel
  return { headings, units: unitsOnly ? last.map((cell, index) => loneUnit(cell) ?? units[index]) : units };
}

/** Index of the cell that spoils a row of values standing directly above the first good one; -1: it is no such row. */
export function spoiledCell(line: string, separator: Separator, columns: number): number {
  const cells = splitCells(line, separator);
  if (cells.length !== columns || !cells.some(isNumber)) return -1;
  if (!isNumber(cells[0]) && !MISSING.test(cells[0])) return -1;
  return cells.findIndex((cell) => !isNumber(cell) && !isBlank(cell));
}

function cellsOf(line: string, separator: Separator, columns: number): string[] | null {
  const cells = splitCells(readable(line), separator).map((cell) => cell.trim());
  while (cells.length > columns && cells[cells.length - 1] === '') cells.pop();
  return cells.length === columns ? cells : null;
}

function unnamed(columns: number): Columns {
  return { headings: new Array(columns).fill(''), units: new Array(columns).fill(null) };
}
