/** hallproof constants: the integers that a probe's chain is made of, and what each stage is in one line. */
import { Chain } from '../../lib/index.ts';
import { loadProbe } from '../probe/load.ts';
import { residueOf } from '../tuning/residue.ts';
import { tune } from '../tuning/tune.ts';
import { readArguments } from './arguments.ts';
import { demoProbe } from './demo.ts';
import { HOLDS } from './fault.ts';

export const CONSTANTS_HELP = `hallproof constants [PROBE] [--json]
  The integers that decide every reading, as tuned for nominal parts: one line a stage (its law, and how many values
  make an ampere behind it). Without PROBE: the demo probe.
  --json   the whole table (design and unit) as JSON: what a port needs`;

const OPTIONS = { json: { type: 'boolean', default: false }, help: { type: 'boolean', short: 'h', default: false } } as const;

export async function constantsCommand(given: string[]): Promise<number> {
  const { values, positionals } = readArguments('constants', given, OPTIONS, { min: 0, max: 1 });
  if (values.help) {
    console.log(CONSTANTS_HELP);
    return HOLDS;
  }
  const { probe, file } = positionals.length === 0 ? demoProbe() : await loadProbe(positionals[0]);
  const tuned = tune(probe, undefined, file);
  if (values.json) {
    console.log(JSON.stringify(tuned.constants, null, 2));
    return HOLDS;
  }
  const { stages } = new Chain(tuned.constants, tuned.makers);
  stages.forEach((stage, index) => {
    const rateHz = (probe.converter.rate_kHz * 1e3) / tuned.ratios[index];
    console.log(`${String(index + 1).padStart(2)}  ${stage.describe()}`);
    const constants = tuned.constants.design[index];
    if (constants.kind === 'sections') {
      const { dither, meanError } = residueOf(constants);
      console.log(`    at rest: dither ${dither} counts peak to peak, mean off by ${meanError.toPrecision(2)} counts`);
    }
    console.log(`    behind it: ${rateHz} samples a second, ${tuned.valuesPerAmpere[index].toPrecision(8)} values an ampere, at most ±${tuned.limits[index]}`);
  });
  console.log(`delay of the reading: ${tuned.delaySamples.toPrecision(6)} input samples`);
  return HOLDS;
}
