/** A folder of its own for the files that a test writes, gone when the tests of the file are done. */
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll } from 'vitest';

export class Folder {
  readonly path = mkdtempSync(join(tmpdir(), 'hallproof-'));

  constructor() {
    afterAll(() => rmSync(this.path, { recursive: true, force: true }));
  }

  write(name: string, content: string | Uint8Array): string {
    const path = join(this.path, name);
    writeFileSync(path, content);
    return path;
  }
}
