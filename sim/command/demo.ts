/** The built-in demo as a loaded probe. */
import { fileURLToPath } from 'node:url';
import { DOOR_STAND } from '../demo/doorstand.ts';
import type { LoadedProbe } from '../probe/load.ts';
import { validate } from '../probe/validate.ts';

export function demoProbe(): LoadedProbe {
  return { ...validate(DOOR_STAND), folder: fileURLToPath(new URL('../demo', import.meta.url)), file: 'demo probe' };
}
