/**
 * A file that appears whole or not at all: written beside its place and renamed at the end. A file that is already
 * there is never replaced.
 */
import { closeSync, existsSync, openSync, renameSync, rmSync, writeSync } from 'node:fs';
import { UsageError } from './fault.ts';

const FLUSH_AT = 65536;

export class NewFile {
  private readonly partial: string;
  private readonly handle: number;
  private waiting: string[] = [];
  private length = 0;

  constructor(private readonly path: string, option: string) {
    if (existsSync(path)) throw new UsageError(`${option} ${path}: there is a file of that name; nothing was written`);
    this.partial = `${path}.partial`;
    try {
      this.handle = openSync(this.partial, 'w');
    } catch (error) {
      throw new UsageError(`${option} ${path}: ${(error as Error).message}`);
    }
  }

  write(text: string): void {
    this.waiting.push(text);
    this.length += text.length;
    if (this.length >= FLUSH_AT) this.flush();
  }

  finish(): void {
    this.flush();
    closeSync(this.handle);
    renameSync(this.partial, this.path);
  }

  abandon(): void {
    closeSync(this.handle);
    rmSync(this.partial, { force: true });
  }

  private flush(): void {
    writeSync(this.handle, this.waiting.join(''));
    this.waiting = [];
    this.length = 0;
  }
}
