/**
 * What is wrong in a recorded file, with its place: file, line (counted from 1, blank lines included) and column.
 * Everything that reads recorded files throws this one kind, so that a caller can print it as it is.
 */
export class CsvError extends Error {
  override name = 'CsvError';
  readonly file: string;
  /** null: the file as a whole. */
  readonly line: number | null;
  /** Heading of the column, or its number from 1 where it has none; null: the line as a whole. */
  readonly column: string | null;

  constructor(what: string, file: string, line: number | null = null, column: string | null = null) {
    const place = line === null ? file : `${file}, line ${line}`;
    super(`${column === null ? place : `${place}, column ${column}`}: ${what}`);
    this.file = file;
    this.line = line;
    this.column = column;
  }
}
