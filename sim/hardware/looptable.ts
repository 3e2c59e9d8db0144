/**
 * A measured loop from a CSV file: field (A/m) and flux density (T), row after row in the order of measuring, from the
 * demagnetised state: the first row is a tip. Smaller loops may stand before the largest one; each begins at its tip.
 */
import { resolve } from 'node:path';
import { CsvError, CsvReader, columnUnit } from '../recorded/csv.ts';

export interface MeasuredLoop {
  /** How messages call it. */
  name: string;
  fieldAmperesPerMetre: Float64Array;
  tesla: Float64Array;
}

const LEAST_ROWS = 16;
const MOST_ROWS = 100_000;
const UNITS = ['A/m', 'T'] as const;

export function readLoop(path: string, folder: string): MeasuredLoop {
  const reader = new CsvReader(resolve(folder, path), path);
  try {
    refuseOtherColumns(reader);
    const field: number[] = [];
    const tesla: number[] = [];
    const row = new Float64Array(2);
    while (reader.next(row)) {
      if (field.length === MOST_ROWS) throw new CsvError(`more than ${MOST_ROWS} rows`, reader.file, reader.line);
      field.push(row[0]);
      tesla.push(row[1]);
    }
    if (field.length < LEAST_ROWS) {
      throw new CsvError(`${field.length} rows; a loop needs at least ${LEAST_ROWS}`, reader.file);
    }
    return { name: path, fieldAmperesPerMetre: Float64Array.from(field), tesla: Float64Array.from(tesla) };
  } finally {
    reader.close();
  }
}

function refuseOtherColumns(reader: CsvReader): void {
  if (reader.columns !== 2) {
    throw new CsvError(`${reader.columns} columns; a loop has two: field in A/m, flux density in T`, reader.file);
  }
  for (let column = 0; column < 2; column++) {
    const unit = columnUnit(reader, column);
    if (unit !== null && unit !== UNITS[column]) {
      throw new CsvError(`unit "${unit}" in column ${reader.columnName(column)}; allowed ${UNITS[column]}`,
        reader.file);
    }
  }
}
