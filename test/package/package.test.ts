import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';

const root = fileURLToPath(new URL('../..', import.meta.url));

const USE = `
import { Block, Chain, type ChainConstants } from 'hallproof';
import { DOOR_STAND, prove, tune, validate, type Verdict } from 'hallproof/sim';
const { probe } = validate(DOOR_STAND);
const constants: ChainConstants = tune(probe).constants;
const block = new Block(8);
block.count = 8;
new Chain(constants).process(block);
const rows: Generator<unknown, Verdict> = prove(probe, { seed: 1, trial: 0, folder: '.' });
declare const console: { log(...words: unknown[]): void };
console.log(typeof rows.next, block.count);
`;

describe('the package', () => {
  let folder = '';

  beforeAll(() => {
    folder = mkdtempSync(join(tmpdir(), 'hallproof-package-'));
    const quiet = { cwd: folder, stdio: 'pipe' as const };
    execFileSync('npm', ['pack', '--pack-destination', folder], { cwd: root, stdio: 'pipe' });
    writeFileSync(join(folder, 'package.json'), '{ "name": "empty", "private": true, "type": "module" }');
    const version = JSON.parse(readFileSync(join(root, 'package.json'), 'utf8')).version;
    execFileSync('npm', ['install', '--offline', '--no-audit', '--no-fund', join(folder, `hallproof-${version}.tgz`)], quiet);
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  test('installs without any dependency', () => {
    const listed = JSON.parse(execFileSync('npm', ['ls', '--all', '--json'], { cwd: folder, encoding: 'utf8' }));
    expect(Object.keys(listed.dependencies)).toEqual(['hallproof']);
    expect(listed.dependencies.hallproof.dependencies ?? {}).toEqual({});
  });

  test('has a command that works', () => {
    const out = execFileSync('npx', ['--no-install', 'hallproof', 'new', 'probe.mjs'], { cwd: folder, encoding: 'utf8' });
    expect(out).toContain('npx hallproof prove probe.mjs');
    expect(execFileSync('npx', ['--no-install', 'hallproof', 'prove', 'probe.mjs'], { cwd: folder, encoding: 'utf8' })).toContain('requirements hold');
  });

  test('has types and imports that work', () => {
    writeFileSync(join(folder, 'use.ts'), USE);
    const compiler = join(root, 'node_modules/typescript/bin/tsc');
    execFileSync(process.execPath, [compiler, '--strict', '--target', 'es2022', '--module', 'nodenext', '--lib', 'es2022', 'use.ts'],
      { cwd: folder, stdio: 'pipe' });
    expect(execFileSync(process.execPath, ['use.js'], { cwd: folder, encoding: 'utf8' })).toBe('function 1\n');
  });

  test('ships the JSON Schema of the probe file', () => {
    const schema = JSON.parse(readFileSync(join(folder, 'node_modules/hallproof/dist/probe.schema.json'), 'utf8'));
    expect(schema.$schema).toContain('2020-12');
    expect(Object.keys(schema.properties)).toContain('chain');
  });
});

describe('the guides', () => {
  test('are up to date with what running the project prints', () => {
    expect(() => execFileSync(process.execPath, ['--import', import.meta.resolve('tsx'), join(root, 'sim/command/guide.ts'), '--verify'],
      { cwd: root, stdio: 'pipe' })).not.toThrow();
  });

  test('package.json has no dependency at run time and exactly the five of development', () => {
    const manifest = JSON.parse(readFileSync(join(root, 'package.json'), 'utf8'));
    expect(manifest.dependencies).toBeUndefined();
    expect(Object.keys(manifest.devDependencies).sort()).toEqual(['@types/node', 'fast-check', 'tsx', 'typescript', 'vitest']);
  });
});
