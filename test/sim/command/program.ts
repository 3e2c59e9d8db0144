/** Calls the program as a user does, from its source, in an empty folder of its own. */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const source = fileURLToPath(new URL('../../../sim/command/hallproof.ts', import.meta.url));
const tsx = import.meta.resolve('tsx');

export interface Ended {
  status: number | null;
  out: string;
  err: string;
}

export function hallproof(folder: string, ...given: string[]): Ended {
  const { status, stdout, stderr } = spawnSync(process.execPath, ['--import', tsx, source, ...given], { cwd: folder, encoding: 'utf8' });
  return { status, out: stdout, err: stderr };
}

export function emptyFolder(): { folder: string; remove: () => void } {
  const folder = mkdtempSync(join(tmpdir(), 'hallproof-test-'));
  return { folder, remove: () => rmSync(folder, { recursive: true, force: true }) };
}
