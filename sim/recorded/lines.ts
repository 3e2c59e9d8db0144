/**
 * Lines of a text file of any size in flat memory: one buffer, filled by chunks. LF or CR LF; a UTF-8 byte order mark
 * is dropped; blank lines are passed over but counted. Lines come as one character a byte, since numbers need no more
 * and that is the fastest; `readable` gives the words of a line, as UTF-8, or as Latin-1 where the bytes are no UTF-8
 * (the micro sign of older instruments).
 */
import { closeSync, openSync, readSync } from 'node:fs';
import { CsvError } from './error.ts';

/** Longest line, in bytes without its end. */
export const LONGEST_LINE = 65536;

const CHUNK = 65536;
const LF = 10;
const CR = 13;
const NO_FILE = -1;
const BLANK = /^\s*$/;
const utf8 = new TextDecoder('utf-8', { fatal: true });

export class LineReader {
  /** Number of the line last read, from 1. */
  line = 0;
  /** That line, one character a byte. */
  text = '';
  private readonly file: string;
  private handle: number;
  private readonly buffer = Buffer.alloc(LONGEST_LINE + CHUNK);
  private start = 0;
  private end = 0;
  private readToEnd = false;

  /** `file`: how messages call it. */
  constructor(path: string, file: string) {
    this.file = file;
    try {
      this.handle = openSync(path, 'r');
    } catch (error) {
      throw unreadable(error, path, file);
    }
    try {
      this.fill(path);
      this.dropByteOrderMark();
    } catch (error) {
      this.close();
      throw error instanceof CsvError ? error : unreadable(error, path, file);
    }
  }

  /** Goes to the next line that is not blank; false at the end of the file. */
  next(): boolean {
    while (this.nextLine()) if (!BLANK.test(this.text)) return true;
    return false;
  }

  close(): void {
    if (this.handle === NO_FILE) return;
    closeSync(this.handle);
    this.handle = NO_FILE;
    this.readToEnd = true;
    this.start = this.end;
  }

  private nextLine(): boolean {
    let stop = this.lineEnd();
    while (stop < 0 && !this.readToEnd && this.end - this.start <= LONGEST_LINE + 1) { // + 1: a CR without its LF
      this.fill(this.file);
      stop = this.lineEnd();
    }
    if (stop < 0 && this.start === this.end) return false;
    const after = stop < 0 ? this.end : stop + 1;
    if (stop < 0) stop = this.end;
    if (stop > this.start && this.buffer[stop - 1] === CR) stop--;
    this.line++;
    if (stop - this.start > LONGEST_LINE) {
      throw new CsvError(`longer than ${LONGEST_LINE} bytes; a line ends with LF or CR LF`, this.file, this.line);
    }
    this.text = this.buffer.toString('latin1', this.start, stop);
    this.start = after;
    return true;
  }

  /** Place of the next line end among the bytes at hand, or -1. */
  private lineEnd(): number {
    const at = this.buffer.indexOf(LF, this.start);
    return at < this.end ? at : -1; // behind `end` stand bytes of an earlier filling
  }

  private fill(path: string): void {
    this.buffer.copyWithin(0, this.start, this.end);
    this.end -= this.start;
    this.start = 0;
    let got: number;
    try {
      got = readSync(this.handle, this.buffer, this.end, this.buffer.length - this.end, null);
    } catch (error) {
      throw unreadable(error, path, this.file);
    }
    this.end += got;
    this.readToEnd = got === 0;
  }

  private dropByteOrderMark(): void {
    const [first, second, third] = this.buffer.subarray(0, this.end);
    if (first === 0xef && second === 0xbb && third === 0xbf) this.start = 3;
    if ((first === 0xff && second === 0xfe) || (first === 0xfe && second === 0xff)) {
      throw new CsvError('is UTF-16 text; allowed are UTF-8, ASCII and Latin-1', this.file);
    }
  }
}

/** The words of a line or cell as it came from a LineReader. */
export function readable(text: string): string {
  try {
    return utf8.decode(Buffer.from(text, 'latin1'));
  } catch {
    return text;
  }
}

function unreadable(error: unknown, path: string, file: string): CsvError {
  const reason = (error as NodeJS.ErrnoException).code;
  if (reason === 'ENOENT') return new CsvError(`there is no such file (looked for ${path})`, file);
  if (reason === 'EISDIR') return new CsvError('is a folder, not a file', file);
  return new CsvError(`cannot be read: ${(error as Error).message}`, file);
}
