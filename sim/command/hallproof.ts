#!/usr/bin/env node
/** The command line: which command, and how it ends. */
import { ProbeError } from '../probe/problem.ts';
import { CsvError } from '../recorded/csv.ts';
import { BAD_INPUT, HOLDS, UsageError } from './fault.ts';
import { constantsCommand, CONSTANTS_HELP } from './constants.ts';
import { fieldsCommand, FIELDS_HELP } from './fields.ts';
import { newCommand, NEW_HELP } from './new.ts';
import { proveCommand, PROVE_HELP } from './prove.ts';
import { readCommand, READ_HELP } from './read.ts';

const COMMANDS: { [name: string]: (given: string[]) => Promise<number> } = {
  prove: proveCommand, read: readCommand, new: newCommand, constants: constantsCommand, fields: fieldsCommand,
};

const HELP = `hallproof proves the integer measuring firmware of a digitizing Hall-effect current probe.

${PROVE_HELP}

${READ_HELP}

${NEW_HELP}

${CONSTANTS_HELP}

${FIELDS_HELP}`;

async function main(given: string[]): Promise<number> {
  const [command, ...rest] = given;
  if (command === undefined || command === 'help' || command === '--help' || command === '-h') {
    console.log(HELP);
    return command === undefined ? BAD_INPUT : HOLDS;
  }
  if (!Object.hasOwn(COMMANDS, command)) {
    throw new UsageError(`no command "${command}"; there are ${Object.keys(COMMANDS).join(', ')}, and --help`);
  }
  return COMMANDS[command](rest);
}

// a pipe that closes early (head) is no fault of ours
process.stdout.on('error', (error: NodeJS.ErrnoException) => process.exit(error.code === 'EPIPE' ? 0 : BAD_INPUT));

try {
  process.exitCode = await main(process.argv.slice(2));
} catch (error) {
  const told = error instanceof ProbeError || error instanceof CsvError || error instanceof UsageError || error instanceof RangeError;
  // anything else is a fault of ours, or of code in the probe file: its trace helps whoever mends it
  console.error(told ? error.message : `unexpected: ${(error as Error)?.stack ?? String(error)}`);
  process.exitCode = BAD_INPUT;
}
