/** hallproof prove: a probe through physics and integer firmware, one line a requirement. */
import { prove, type Verdict } from '../judging/prove.ts';
import { rowLines, paintFor, summaryLines, TABLE_HEAD } from '../report/terminal.ts';
import { verdictJson } from '../report/json.ts';
import { readArguments, wholeNumber } from './arguments.ts';
import { demoProbe, DEMOS } from './demo.ts';
import { FALLS_SHORT, HOLDS, invocation, UsageError } from './fault.ts';
import { loadProbe, type LoadedProbe } from '../probe/load.ts';
import { NewFile } from './newfile.ts';
import { Progress } from './progress.ts';
import { readingsCsv } from './readingscsv.ts';

export const PROVE_HELP = `hallproof prove [PROBE] [options]
  Takes a probe file through physics and integer firmware and says, line by line, what holds and what falls short.
  Without PROBE: the demo probe.
  --demo NAME       another demo instead: ${Object.keys(DEMOS).join(', ')}
  --all             also the scenarios that the probe file marks as long
  --only SCENARIO   only this scenario
  --seed N          seed of everything random (default 1)
  --trial N         0: nominal parts; 1, 2, ...: a unit drawn within the tolerances (default 1)
  --json            the verdict as JSON on standard output
  --csv FILE        also write every reading beside the true current: scenario, time, true, reading, status
  --quiet           only the lines that fall short
  Exit status: 0 all requirements hold, 1 something falls short, 2 bad input.`;

const OPTIONS = {
  only: { type: 'string' }, demo: { type: 'string' }, all: { type: 'boolean', default: false }, seed: { type: 'string', default: '1' }, trial: { type: 'string', default: '1' },
  json: { type: 'boolean', default: false }, csv: { type: 'string' }, quiet: { type: 'boolean', default: false },
  help: { type: 'boolean', short: 'h', default: false },
} as const;

export async function proveCommand(given: string[]): Promise<number> {
  const { values, positionals } = readArguments('prove', given, OPTIONS, { min: 0, max: 1 });
  if (values.help) {
    console.log(PROVE_HELP);
    return HOLDS;
  }
  const seed = wholeNumber('prove', 'seed', values.seed, 0);
  const trial = wholeNumber('prove', 'trial', values.trial, 0);
  if (values.demo !== undefined && positionals.length > 0) throw new UsageError('prove: give a probe file or --demo, not both');
  const loaded = positionals.length === 0 ? demoProbe(values.demo) : await loadProbe(positionals[0]);
  demandScenario(loaded, values.only);
  const csv = values.csv === undefined ? null : new NewFile(values.csv, '--csv');
  try {
    const verdict = show(loaded, { seed, trial, only: values.only, all: values.all, json: values.json, quiet: values.quiet, csv });
    csv?.finish();
    if (!values.json && !values.quiet && positionals.length === 0) console.log(nextSteps());
    return verdict.holds ? HOLDS : FALLS_SHORT;
  } catch (error) {
    csv?.abandon();
    throw error;
  }
}

function demandScenario({ probe }: LoadedProbe, only: string | undefined): void {
  if (only === undefined || probe.scenarios.some((scenario) => scenario.name === only)) return;
  throw new UsageError(`prove: --only "${only}": no such scenario; there are ${probe.scenarios.map(({ name }) => `"${name}"`).join(', ')}`);
}

function show(
  loaded: LoadedProbe, options: { seed: number; trial: number; only?: string; all: boolean; json: boolean; quiet: boolean; csv: NewFile | null },
): Verdict {
  const paint = paintFor(process.stdout);
  const progress = new Progress(!options.json && !options.quiet);
  const { probe, presets, folder, file } = loaded;
  const proving = prove(probe, {
    seed: options.seed, trial: options.trial, only: options.only, all: options.all, folder, file, presets,
    progress: (scenario, share) => progress.tell(scenario, share),
    observer: options.csv === null ? undefined : readingsCsv(options.csv),
  });
  // told with the first row, so that nothing is printed for a probe that tuning refuses
  let head = options.json || options.quiet ? '' : `${[probe.name, probe.about].filter(Boolean).join(': ')}\n\n${TABLE_HEAD}\n`;
  for (;;) {
    const step = proving.next();
    progress.wipe();
    if (step.done) {
      if (options.json) console.log(verdictJson(step.value));
      else if (!options.quiet) console.log(summaryLines(step.value, paint).join('\n'));
      return step.value;
    }
    if (options.json || (options.quiet && step.value.holds)) continue;
    console.log(head + rowLines(step.value, paint).join('\n'));
    head = '';
  }
}

function nextSteps(): string {
  const call = invocation();
  return ['', 'Next:', `  ${call} new my-probe.mjs              a probe file of your own, ready to be filled with your datasheets`,
    `  ${call} prove my-probe.mjs            does it hold?`,
    `  ${call} read my-probe.mjs codes.csv   A/D codes recorded from a board, through the same chain`].join('\n');
}
