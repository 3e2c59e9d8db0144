/** Reads the arguments of one command with Node's own parser; wrong ones become a UsageError. */
import { parseArgs, type ParseArgsConfig } from 'node:util';
import { UsageError } from './fault.ts';

export function readArguments<T extends NonNullable<ParseArgsConfig['options']>>(
  command: string, given: string[], options: T, positionals: { min: number; max: number },
) {
  let parsed;
  try {
    parsed = parseArgs({ args: given, options, allowPositionals: true, strict: true });
  } catch (error) {
    throw new UsageError(`${command}: ${(error as Error).message}`);
  }
  const count = parsed.positionals.length;
  if (!parsed.values['help' as keyof typeof parsed.values] && (count < positionals.min || count > positionals.max)) {
    const wanted = positionals.min === positionals.max ? `${positionals.min}` : `${positionals.min} to ${positionals.max}`;
    throw new UsageError(`${command}: expected ${wanted} file names, got ${count}`);
  }
  return parsed;
}

/** A whole number of at least `least`, or a UsageError that names the option. */
export function wholeNumber(command: string, option: string, text: string, least: number): number {
  const value = Number(text);
  if (text.trim() === '' || !Number.isSafeInteger(value) || value < least) {
    throw new UsageError(`${command}: --${option}: found "${text}", allowed a whole number from ${least}`);
  }
  return value;
}
