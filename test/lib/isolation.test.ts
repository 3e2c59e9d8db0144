import { execFileSync } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';

const lib = fileURLToPath(new URL('../../lib', import.meta.url));
const sources = readdirSync(lib).filter((name) => name.endsWith('.ts') && !name.endsWith('.d.ts'));

describe('lib/ stands alone', () => {
  test.each(sources)('%s imports nothing from outside lib/', (name) => {
    const text = readFileSync(`${lib}/${name}`, 'utf8');
    const imported = [...text.matchAll(/^(?:import|export)[^;]*?from '([^']+)';/gm)].map((match) => match[1]);
    for (const path of imported) {
      expect(path).toMatch(/^\.\/\w+\.ts$/);
      expect(sources).toContain(path.slice(2));
    }
    expect(text).not.toMatch(/\brequire\s*\(|\bimport\s*\(/);
  });

  test.each(sources.filter((name) => name !== 'arithmetic.ts' && name !== 'unit.ts'))(
    '%s neither shifts nor multiplies wide by hand: arithmetic.ts does', (name) => {
      const code = readFileSync(`${lib}/${name}`, 'utf8').replace(/\/\*[^]*?\*\//g, '').replace(/\/\/.*$/gm, '');
      expect(code).not.toMatch(/<<|>>|Math\.(?!floor)|BigInt|\bDate\b|Math\.random/);
    });

  test('it compiles against the declarations of an embedded ES5 engine alone', () => {
    const compiler = fileURLToPath(new URL('../../node_modules/typescript/bin/tsc', import.meta.url));
    expect(() => execFileSync(process.execPath, [compiler, '-p', `${lib}/tsconfig.json`], { stdio: 'pipe' })).not.toThrow();
  });
});
