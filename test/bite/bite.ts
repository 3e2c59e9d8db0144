/**
 * Do the tests bite? Makes each edit of edits.ts in a copy of the project, runs the tests of lib/ on it, and counts the
 * edits that some test notices. Fails below all of them, and when an edit no longer matches exactly once.
 *   npm run test:bite            all edits
 *   npm run test:bite -- zero    only those in lib/zero.ts
 */
import { spawn } from 'node:child_process';
import { cpSync, existsSync, mkdtempSync, readFileSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { availableParallelism, tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { EDITS, type Edit } from './edits.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
const COPIED = ['lib', 'sim', 'test', 'package.json', 'tsconfig.json'];
const LEAST_PER_STAGE = 4;

const only = process.argv[2];
const edits = EDITS.filter((edit) => only === undefined || edit.file === `${only}.ts`);
for (const edit of edits) demandOneMatch(edit);
if (only === undefined) demandEnough();

let caught = 0;
const missed: Edit[] = [];
const waiting = [...edits];
await demandSoundTests();
await Promise.all(Array.from({ length: availableParallelism() }, worker));

console.log(`\n${caught} of ${edits.length} edits caught`);
for (const edit of missed) console.log(`  not caught: lib/${edit.file}: ${edit.find}  ->  ${edit.put}`);
process.exit(missed.length === 0 && edits.length > 0 ? 0 : 1);

function demandOneMatch({ file, find }: Edit): void {
  const matches = readFileSync(join(root, 'lib', file), 'utf8').split(find).length - 1;
  if (matches === 1) return;
  console.error(`lib/${file}: "${find}" stands there ${matches} times, expected once; mend test/bite/edits.ts`);
  process.exit(2);
}

function demandEnough(): void {
  const stages = readFileSync(join(root, 'lib/chain.ts'), 'utf8').matchAll(/from '\.\/(\w+)\.ts'/g);
  const noStage = new Set(['constants', 'stage', 'problems', 'block', 'unit']);
  for (const [, stage] of stages) {
    const count = EDITS.filter((edit) => edit.file === `${stage}.ts`).length;
    if (noStage.has(stage) || count >= LEAST_PER_STAGE) continue;
    console.error(`lib/${stage}.ts has ${count} edits, expected at least ${LEAST_PER_STAGE}`);
    process.exit(2);
  }
}

function copyOfProject(): string {
  const folder = mkdtempSync(join(tmpdir(), 'hallproof-bite-'));
  for (const name of COPIED) cpSync(join(root, name), join(folder, name), { recursive: true });
  symlinkSync(join(root, 'node_modules'), join(folder, 'node_modules'));
  return folder;
}

/** A test that fails anyway would notice every edit. */
async function demandSoundTests(): Promise<void> {
  const folder = copyOfProject();
  const fail = await testsFail(folder, 'test/lib');
  rmSync(folder, { recursive: true, force: true });
  if (!fail) return;
  console.error('the tests of lib/ fail without any edit; mend them first');
  process.exit(2);
}

async function worker(): Promise<void> {
  const folder = copyOfProject();
  try {
    for (let edit = waiting.shift(); edit !== undefined; edit = waiting.shift()) await attempt(folder, edit);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

async function attempt(folder: string, edit: Edit): Promise<void> {
  const path = join(folder, 'lib', edit.file);
  const text = readFileSync(path, 'utf8');
  writeFileSync(path, text.replace(edit.find, () => edit.put));
  // the stage's own tests first, then all of lib/
  const own = `test/lib/${edit.file.replace('.ts', '.test.ts')}`;
  let noticed = existsSync(join(folder, own)) && await testsFail(folder, own);
  noticed ||= await testsFail(folder, 'test/lib');
  writeFileSync(path, text);
  if (noticed) caught++;
  else missed.push(edit);
  console.log(`${noticed ? 'caught ' : 'MISSED '} lib/${edit.file}: ${edit.put === '' ? `without ${edit.find}` : edit.put}`);
}

/** true when a test failed; an error that is no failing test (nothing ran) ends the whole. */
function testsFail(folder: string, tests: string): Promise<boolean> {
  return new Promise((resolve, reject) => {
    const report = join(folder, 'report.json');
    rmSync(report, { force: true });
    const runner = spawn(process.execPath, [join(folder, 'node_modules/vitest/vitest.mjs'), 'run', '--config', 'test/vitest.config.ts',
      '--bail=1', '--reporter=json', `--outputFile=${report}`, '--maxWorkers=1', tests], { cwd: folder, stdio: 'ignore' });
    runner.on('error', reject);
    runner.on('exit', (code) => {
      if (code === 0) return resolve(false);
      const found = existsSync(report) ? JSON.parse(readFileSync(report, 'utf8')) as { numFailedTests: number; numFailedTestSuites: number } : null;
      if (found !== null && found.numFailedTests + found.numFailedTestSuites > 0) resolve(true);
      else reject(new Error(`${tests}: the test runner ended with ${code} and no failing test`));
    });
  });
}
