/**
 * Reads a probe file from disk and validates it. JSON is read here; JavaScript (.js, .mjs) and TypeScript (.ts, where
 * Node can import it or tsx is there) give the probe as their default export. Whatever goes wrong comes as one
 * ProbeError that carries the name of the file.
 */
import { readFile, stat } from 'node:fs/promises';
import { dirname, extname, resolve } from 'node:path';
import { pathToFileURL } from 'node:url';
import { foundText } from './allowed.ts';
import { jsonFault, placeOf } from './json-fault.ts';
import { ProbeError } from './problem.ts';
import { validate, type ValidProbe } from './validate.ts';

export interface LoadedProbe extends ValidProbe {
  /** Absolute folder of the file: recorded currents are looked for there. */
  folder: string;
  /** The path as it was given. */
  file: string;
}

const SCRIPT_ENDINGS = ['.js', '.mjs', '.ts'];

export async function loadProbe(path: string): Promise<LoadedProbe> {
  const whole = resolve(path);
  const modified = await modificationTime(whole, path);
  const ending = extname(path).toLowerCase();
  let given: unknown;
  if (ending === '.json') given = parseProbe(await textOf(whole, path), path);
  else if (SCRIPT_ENDINGS.includes(ending)) given = await defaultExport(whole, modified, path);
  else throw fileError(path, `a file ending in ${JSON.stringify(ending)}`, '.json, .js, .mjs, or .ts under tsx');
  try {
    return { ...validate(given), folder: dirname(whole), file: path };
  } catch (error) {
    throw error instanceof ProbeError ? new ProbeError(error.problems, path) : error;
  }
}

function fileError(file: string, found: string, allowed: string, hint = '', place = ''): ProbeError {
  return new ProbeError([{ path: place, found, allowed, hint }], file);
}

async function modificationTime(whole: string, path: string): Promise<number> {
  const status = await stat(whole).catch((error: NodeJS.ErrnoException) => {
    const missing = error.code === 'ENOENT' || error.code === 'ENOTDIR';
    throw fileError(path, missing ? 'no file of that name' : reasonOf(error), 'a probe file');
  });
  if (status.isDirectory()) throw fileError(path, 'a folder', 'a probe file', 'name the file inside it');
  if (!status.isFile()) throw fileError(path, 'something that is no regular file', 'a probe file');
  return status.mtimeMs;
}

async function textOf(whole: string, path: string): Promise<string> {
  const bytes = await readFile(whole).catch((error: Error) => {
    throw fileError(path, reasonOf(error), 'a file that can be read');
  });
  try {
    return new TextDecoder('utf-8', { fatal: true }).decode(bytes); // also takes a byte order mark away
  } catch {
    throw fileError(path, 'bytes that are not UTF-8', 'a text in UTF-8', 'units such as µA or °C depend on it');
  }
}

function parseProbe(text: string, path: string): unknown {
  const fault = jsonFault(text);
  if (fault !== null) {
    const { line, column } = placeOf(text, fault.offset);
    throw fileError(path, fault.found, fault.allowed, fault.hint, `line ${line}, column ${column}`);
  }
  return JSON.parse(text);
}

async function defaultExport(whole: string, modified: number, path: string): Promise<unknown> {
  const url = pathToFileURL(whole);
  // Node keeps a module by its URL: without this a changed file would come back as it was at first.
  url.search = `modified=${Math.round(modified * 1000)}`;
  let module: Record<string, unknown>;
  try {
    module = await import(/* @vite-ignore */ url.href) as Record<string, unknown>;
  } catch (error) {
    throw importError(error, path);
  }
  const given = module.default;
  if (given === undefined) {
    throw fileError(path, 'no default export', 'a default export that is the probe', 'export default { name: ... }');
  }
  if (typeof given === 'function' || given instanceof Promise) {
    const found = given instanceof Promise ? 'a promise' : foundText(given);
    throw fileError(path, `${found} as default export`, 'the probe itself, a plain object',
      'export what it gives, not the function or promise');
  }
  return given;
}

function importError(error: unknown, path: string): ProbeError {
  const code = error instanceof Error ? (error as NodeJS.ErrnoException).code : undefined;
  if (code === 'ERR_UNKNOWN_FILE_EXTENSION' && path.toLowerCase().endsWith('.ts')) {
    return fileError(path, 'TypeScript, which this Node cannot import by itself', '.json, .js or .mjs',
      'start it under tsx (node --import tsx ...), or write the file as .js');
  }
  // The engine keeps the place of a mistake in the grammar to itself.
  const hint = error instanceof SyntaxError ? `node --check ${path} tells the place` : '';
  return fileError(path, reasonOf(error), 'a module that can be imported', hint);
}

function reasonOf(error: unknown): string {
  const reason = error instanceof Error ? `${error.name}: ${error.message}` : `a thrown ${foundText(error)}`;
  return reason.split('\n')[0];
}
