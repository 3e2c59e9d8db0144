/** hallproof fields: what can stand in a probe file. */
import { fieldTable } from '../probe/table.ts';
import { readArguments } from './arguments.ts';
import { HOLDS, UsageError } from './fault.ts';

export const FIELDS_HELP = `hallproof fields [WORD]
  Every field of a probe file: name, unit, range, default, meaning. With WORD: only the tables whose heading has it.`;

const OPTIONS = { help: { type: 'boolean', short: 'h', default: false } } as const;

export async function fieldsCommand(given: string[]): Promise<number> {
  const { values, positionals } = readArguments('fields', given, OPTIONS, { min: 0, max: 1 });
  if (values.help) {
    console.log(FIELDS_HELP);
    return HOLDS;
  }
  const [word] = positionals;
  const sections = fieldTable().split(/^(?=#+ )/m);
  const wanted = word === undefined ? sections : sections.filter((section) => section.split('\n', 1)[0].includes(word));
  if (wanted.length === 0) throw new UsageError(`fields: no table whose heading has "${word}"`);
  console.log(wanted.join('').trimEnd());
  return HOLDS;
}
