/**
 * Lines of a text file of any size in flat memory, read by chunks. LF or CR LF; a UTF-8 byte order mark
 * is dropped; blank lines are passed over but counted. Lines come as one character a byte, since numbers need no more
 * and that is the fastest; `readable` gives the words of a line, as UTF-8, or as Latin-1 where the bytes are no UTF-8
 * (the micro sign of older instruments).
 */
import { closeSync, openSync, readSync } from 'node:fs';
import { CsvError } from './error.ts';

/** Longest line, in bytes without its end. */
export const LONGEST_LINE = 65536;

const CHUNK = 65536;
const NO_FILE = -1;
const BLANK = /^\s*$/;
const UTF8_MARK = '\u00ef\u00bb\u00bf';
const UTF16_MARK = /^(?:\u00ff\u00fe|\u00fe\u00ff)/;
const utf8 = new TextDecoder('utf-8', { fatal: true });

export class LineReader {
  /** Number of the line last read, from 1. */
  line = 0;
  /** That line, one character a byte. */
  text = '';
  private readonly path: string;
  private readonly file: string;
  private handle = NO_FILE;
  private readonly buffer = Buffer.alloc(CHUNK);
  private ahead = ''; // what has been read of the file, from the start of a line at `at` on
  private at = 0;
  private readToEnd = false;

  /** `file`: how messages call it. */
  constructor(path: string, file: string) {
    this.path = path;
    this.file = file;
    try {
      this.handle = openSync(path, 'r');
    } catch (error) {
      throw this.unreadable(error);
    }
    try {
      this.readAhead();
      if (this.ahead.startsWith(UTF8_MARK)) this.at = UTF8_MARK.length;
      if (UTF16_MARK.test(this.ahead)) {
        throw new CsvError('is UTF-16 text; allowed are UTF-8, ASCII and Latin-1', file);
      }
    } catch (error) {
      this.close();
      throw error;
    }
  }

  /** Goes to the next line that is not blank; false at the end of the file. */
  next(): boolean {
    while (this.nextLine()) if (!BLANK.test(this.text)) return true;
    return false;
  }

  close(): void {
    if (this.handle !== NO_FILE) closeSync(this.handle);
    this.handle = NO_FILE;
    this.readToEnd = true;
    this.ahead = '';
    this.at = 0;
  }

  private nextLine(): boolean {
    let stop = this.ahead.indexOf('\n', this.at);
    while (stop < 0 && !this.readToEnd && this.ahead.length - this.at <= LONGEST_LINE + 1) { // + 1: a CR without its LF
      this.readAhead();
      stop = this.ahead.indexOf('\n', this.at);
    }
    if (stop < 0 && this.at === this.ahead.length) return false;
    const after = stop < 0 ? this.ahead.length : stop + 1;
    if (stop < 0) stop = this.ahead.length;
    if (stop > this.at && this.ahead[stop - 1] === '\r') stop--;
    this.line++;
    if (stop - this.at > LONGEST_LINE) {
      throw new CsvError(`longer than ${LONGEST_LINE} bytes; a line ends with LF or CR LF`, this.file, this.line);
    }
    this.text = this.ahead.slice(this.at, stop);
    this.at = after;
    return true;
  }

  private readAhead(): void {
    let got: number;
    try {
      got = readSync(this.handle, this.buffer, 0, CHUNK, null);
    } catch (error) {
      throw this.unreadable(error);
    }
    this.ahead = this.ahead.slice(this.at) + this.buffer.toString('latin1', 0, got);
    this.at = 0;
    this.readToEnd = got === 0;
  }

  private unreadable(error: unknown): CsvError {
    const reason = (error as NodeJS.ErrnoException).code;
    if (reason === 'ENOENT') return new CsvError(`there is no such file (looked for ${this.path})`, this.file);
    if (reason === 'EISDIR') return new CsvError('is a folder, not a file', this.file);
    return new CsvError(`cannot be read: ${(error as Error).message}`, this.file);
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
