/**
 * What a command line can do wrong, and how commands end: 0 all is well, 1 something falls short, 2 bad input.
 */
export const HOLDS = 0;
export const FALLS_SHORT = 1;
export const BAD_INPUT = 2;

/** Wrong use of a command: told with the line that helps, exit 2. */
export class UsageError extends Error {
  override name = 'UsageError';
}

/** How this program is called here: from its source, or installed. */
export function invocation(): string {
  return import.meta.url.endsWith('.ts') ? 'npm run hallproof --' : 'npx hallproof';
}
