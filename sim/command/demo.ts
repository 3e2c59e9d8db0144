/** The built-in demos as loaded probes. */
import { fileURLToPath } from 'node:url';
import { BARGAIN_PROBE } from '../demo/bargainprobe.ts';
import { DOOR_STAND } from '../demo/doorstand.ts';
import { WEIGHED_STAND } from '../demo/weighedstand.ts';
import type { LoadedProbe } from '../probe/load.ts';
import { validate } from '../probe/validate.ts';
import { UsageError } from './fault.ts';

/** By name; the first is the one that is proved when nothing is named. */
export const DEMOS: { [name: string]: unknown } = { door: DOOR_STAND, bargain: BARGAIN_PROBE, weighed: WEIGHED_STAND };

export function demoProbe(name = 'door'): LoadedProbe {
  if (!Object.hasOwn(DEMOS, name)) {
    throw new UsageError(`no demo "${name}"; there are ${Object.keys(DEMOS).join(', ')}`);
  }
  return { ...validate(DEMOS[name]), folder: fileURLToPath(new URL('../demo', import.meta.url)), file: `demo ${name}` };
}
