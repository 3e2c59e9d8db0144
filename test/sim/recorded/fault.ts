/** The CsvError that an action ends with; any other end is a failure. */
import { CsvError } from '../../../sim/recorded/error.ts';

export function faultOf(action: () => unknown): CsvError {
  try {
    action();
  } catch (error) {
    if (error instanceof CsvError) return error;
    throw error;
  }
  throw new Error('expected a CsvError, nothing was thrown');
}
