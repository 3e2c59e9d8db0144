/** hallproof new: a starter probe file that holds and explains itself. */
import { extname } from 'node:path';
import { starterText } from '../demo/starter.ts';
import { readArguments } from './arguments.ts';
import { HOLDS, invocation, UsageError } from './fault.ts';
import { NewFile } from './newfile.ts';

export const NEW_HELP = `hallproof new FILE.mjs
  Writes a starter probe file of some 30 lines in datasheet units; it holds as it is. Never replaces a file.`;

const OPTIONS = { help: { type: 'boolean', short: 'h', default: false } } as const;

export async function newCommand(given: string[]): Promise<number> {
  const { values, positionals } = readArguments('new', given, OPTIONS, { min: 1, max: 1 });
  if (values.help) {
    console.log(NEW_HELP);
    return HOLDS;
  }
  const [path] = positionals;
  if (extname(path) !== '.mjs') {
    throw new UsageError(`new: ${path}: the starter has comments, so its name must end in .mjs; nothing was written`);
  }
  const file = new NewFile(path, 'new');
  file.write(starterText());
  file.finish();
  console.log(`${path} written. Next: ${invocation()} prove ${path}`);
  return HOLDS;
}
