import { execFileSync, spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, rmSync, utimesSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, relative } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { loadProbe } from '../../../sim/probe/load.ts';
import { ProbeError } from '../../../sim/probe/problem.ts';
import { validate } from '../../../sim/probe/validate.ts';
import { tramDoor } from './tram-door.ts';

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'probe-'));
});
afterAll(() => rmSync(folder, { recursive: true }));

function put(name: string, content: string | Uint8Array): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

async function errorOf(path: string): Promise<ProbeError> {
  const error = await loadProbe(path).then(() => null, (reason: unknown) => reason);
  expect(error).toBeInstanceOf(ProbeError);
  expect((error as ProbeError).file).toBe(path);
  expect((error as ProbeError).message.startsWith(`${path}: `)).toBe(true);
  return error as ProbeError;
}

const asJson = JSON.stringify(tramDoor(), null, 2);

describe('the same probe comes out of every kind of file', () => {
  test.each([
    ['a.json', asJson],
    ['b.JSON', asJson.replaceAll('\n', '\r\n')],
    ['mark.json', `\ufeff${asJson}`],
    ['link.json', asJson.replace('{', '{"$schema": "./probe.schema.json",')],
    ['c.mjs', `export default ${asJson};`],
    ['d.js', `export default ${asJson};`],
    ['e.ts', `const probe: object = ${asJson};\nexport default probe;`],
  ])('%s', async (name, content) => {
    const path = put(name, content);
    const loaded = await loadProbe(path);
    expect(loaded).toEqual({ ...validate(tramDoor()), folder, file: path });
  });

  test('a relative path means the folder that Node was started in', async () => {
    const path = relative(process.cwd(), put('relative.json', asJson));
    expect(await loadProbe(path)).toMatchObject({ folder, file: path });
  });
});

test('a script that has changed is read anew', async () => {
  const path = put('changing.mjs', `export default ${asJson};`);
  utimesSync(path, 1000, 1000);
  expect((await loadProbe(path)).probe.range_A).toBe(30);
  put('changing.mjs', `export default ${asJson.replace('"range_A": 30', '"range_A": 40')};`);
  utimesSync(path, 2000, 2000);
  expect((await loadProbe(path)).probe.range_A).toBe(40);
});

describe('what is wrong comes as a ProbeError that names the file', () => {
  test('with every problem of the probe', async () => {
    const path = put('wrong.json', asJson.replace('"gap_mm"', '"gap_m"').replace('"bits": 12', '"bits": 99'));
    const { problems } = await errorOf(path);
    expect(problems.map((problem) => problem.path)).toEqual(['core.gap_m', 'core.gap_mm', 'converter.bits']);
  });

  test('with line and column of what is no JSON', async () => {
    const path = put('comma.json', '{\n  "name": "door",\n  "range_A": 30,\n}\n');
    expect((await errorOf(path)).message).toBe([
      `${path}: 1 problem`,
      '  line 4, column 1: found "}", allowed the name of a field in double quotes; remove the comma before it',
    ].join('\n'));
  });

  test('an empty file', async () => {
    expect((await errorOf(put('empty.json', ''))).problems[0]).toMatchObject({ path: 'line 1, column 1' });
  });

  test('a field that stands twice', async () => {
    const path = put('twice.json', asJson.replace('"range_A": 30,', '"range_A": 30,\n  "range_A": 3,'));
    const [only] = (await errorOf(path)).problems;
    expect(only).toMatchObject({ path: 'line 4, column 3', allowed: 'each field once in a group' });
  });

  test('text that is not UTF-8', async () => {
    const path = put('latin.json', Buffer.from(asJson.replace('door drive', 'door drive µ'), 'latin1'));
    expect((await errorOf(path)).problems[0].found).toContain('not UTF-8');
  });

  test.each([['missing.json'], ['missing.mjs'], ['a.json/inside.json']])('no such file: %s', async (name) => {
    put('a.json', asJson);
    expect((await errorOf(join(folder, name))).problems[0].found).toBe('no file of that name');
  });

  test('a folder', async () => {
    mkdirSync(join(folder, 'probe.json'), { recursive: true });
    expect((await errorOf(join(folder, 'probe.json'))).problems[0].found).toBe('a folder');
  });

  test.each(['probe.yaml', 'probe', 'probe.json.txt'])('another kind of file: %s', async (name) => {
    expect((await errorOf(put(name, asJson))).problems[0].allowed).toContain('.json');
  });

  test.each([
    ['nothing.mjs', 'export const probe = {};', 'no default export'],
    ['call.mjs', 'export default () => ({});', 'a function as default export'],
    ['later.mjs', 'export default Promise.resolve({});', 'a promise as default export'],
    ['number.mjs', 'export default 5;', '5'],
    ['throws.mjs', 'throw new RangeError("no drive");', 'RangeError: no drive'],
    ['throws-text.mjs', 'throw "no drive";', 'a thrown "no drive"'],
  ])('%s', async (name, content, found) => {
    expect((await errorOf(put(name, content))).problems[0].found).toBe(found);
  });

  test('a script with a mistake in its grammar', async () => {
    expect((await errorOf(put('grammar.mjs', 'export default {\n  a: ]\n};'))).problems.length).toBe(1);
  });
});

describe('in plain Node', () => {
  // Compiled files run without any loader; here tsx compiles only what lies in the project, as a build would.
  const outcomeIn = (name: string): string => {
    const loader = JSON.stringify(new URL('../../../sim/probe/load.ts', import.meta.url).href);
    const path = JSON.stringify(join(folder, name));
    const code = `
      import { register } from 'tsx/esm/api';
      const unregister = register();
      const { loadProbe } = await import(${loader});
      await unregister();
      const text = await loadProbe(${path}).then(() => 'loaded', (error) => error.message);
      console.log(text);
    `;
    const root = new URL('../../..', import.meta.url).pathname;
    return execFileSync(process.execPath, ['--input-type=module', '-e', code], { cwd: root, encoding: 'utf8' });
  };

  test('TypeScript either loads or is refused in plain words', () => {
    put('plain.ts', `export default ${asJson};`);
    expect(outcomeIn('plain.ts')).toMatch(/^loaded|found TypeScript, .* allowed \.json, .*; start it under tsx/m);
  });

  test('a mistake in the grammar of a script comes with the command that tells its place', () => {
    const path = put('plain.mjs', 'export default {\n  a: ]\n};');
    expect(outcomeIn('plain.mjs')).toContain('found SyntaxError');
    expect(outcomeIn('plain.mjs')).toContain(`node --check ${path}`);
    const checked = spawnSync(process.execPath, ['--check', path], { encoding: 'utf8' });
    expect(checked.stderr).toContain('plain.mjs:2');
  });
});
