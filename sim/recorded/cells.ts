/**
 * Cells of a line: split at a separator, quoted cells taken off their quotes ("" inside stands for one quote), and
 * what counts as a number: optional sign, digits with at most one decimal point or comma, optional power of ten,
 * blanks around. Hexadecimal, NaN and Infinity are no numbers here, nor are groups of thousands.
 */

/** In the order in which they are tried; '' is one column without a separator. */
export const SEPARATORS = ['\t', ';', ',', ''] as const;
export type Separator = (typeof SEPARATORS)[number];

const NUMBER = /^\s*[+-]?(?:\d+[.,]?\d*|[.,]\d+)(?:[eE][+-]?\d+)?\s*$/;
const BLANK = /^\s*$/;

export function isNumber(cell: string): boolean {
  return NUMBER.test(cell);
}

export function isBlank(cell: string): boolean {
  return BLANK.test(cell);
}

export function splitCells(line: string, separator: Separator): string[] {
  if (!line.includes('"')) return separator === '' ? [line] : line.split(separator);
  const cells: string[] = [];
  for (let at = 0; at <= line.length;) {
    const quoted = quotedCell(line, at, separator);
    if (quoted !== null) {
      cells.push(quoted.cell);
      at = quoted.end + 1;
      continue;
    }
    const found = separator === '' ? -1 : line.indexOf(separator, at);
    const end = found < 0 ? line.length : found;
    cells.push(line.slice(at, end));
    at = end + 1;
  }
  return cells;
}

/** The quoted cell that begins at `at` and where it ends; null: no cell wholly in quotes begins there. */
function quotedCell(line: string, at: number, separator: Separator): { cell: string; end: number } | null {
  let open = at;
  while (line[open] === ' ') open++;
  if (line[open] !== '"') return null;
  let close = line.indexOf('"', open + 1);
  while (close >= 0 && line[close + 1] === '"') close = line.indexOf('"', close + 2);
  if (close < 0) return null;
  let end = close + 1;
  while (line[end] === ' ') end++;
  if (end < line.length && (separator === '' || line[end] !== separator)) return null;
  return { cell: line.slice(open + 1, close).replaceAll('""', '"'), end };
}

/** The separator under which every cell of the line is a number or empty, null when there is none. */
export function separatorOfNumbers(line: string): Separator | null {
  for (const separator of SEPARATORS) {
    const cells = splitCells(line, separator);
    if (separator !== '' && cells.length < 2) continue;
    if (cells.some(isNumber) && cells.every((cell) => isNumber(cell) || isBlank(cell))) return separator;
  }
  return null;
}
