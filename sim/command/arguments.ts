/** Reads the arguments of one command with Node's own parser; wrong ones become a UsageError. */
import { parseArgs, type ParseArgsConfig } from 'node:util';
import { UsageError } from './fault.ts';

type Options = NonNullable<ParseArgsConfig['options']>;

/** The value of each option: a boolean, or text where it was given or has a default. */
export type Values<T extends Options> = {
  [K in keyof T]: T[K]['type'] extends 'boolean' ? boolean : T[K] extends { default: string } ? string : string | undefined;
};

export function readArguments<T extends Options>(
  command: string, given: string[], options: T, positionals: { min: number; max: number },
): { values: Values<T>; positionals: string[] } {
  let parsed;
  try {
    parsed = parseArgs({ args: given, options, allowPositionals: true, strict: true });
  } catch (error) {
    throw new UsageError(`${command}: ${(error as Error).message}`);
  }
  const values = parsed.values as unknown as Values<T> & { help?: boolean };
  const count = parsed.positionals.length;
  if (!values.help && (count < positionals.min || count > positionals.max)) {
    const wanted = positionals.min === positionals.max ? `${positionals.min}` : `${positionals.min} to ${positionals.max}`;
    throw new UsageError(`${command}: expected ${wanted} file names, got ${count}; ${command} --help tells more`);
  }
  return { values, positionals: parsed.positionals };
}

/** A whole number of at least `least`, or a UsageError that names the option. */
export function wholeNumber(command: string, option: string, text: string, least: number): number {
  const value = Number(text);
  if (text.trim() === '' || !Number.isSafeInteger(value) || value < least) {
    throw new UsageError(`${command}: --${option}: found "${text}", allowed a whole number from ${least}`);
  }
  return value;
}
