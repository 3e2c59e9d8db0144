/**
 * The hardware of the demo probe with nominal parts, magnetic memory and all noises on, beside the same hardware in
 * NumPy and SciPy (test/references/bench_numpy.py, where there is a python3 that has them), and a whole scenario
 * through bench, chain and judge.
 */
import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { DOOR_STAND } from '../../sim/demo/doorstand.ts';
import { Bench, newCodeBlock } from '../../sim/hardware/bench.ts';
import { nominalUnit } from '../../sim/hardware/draw.ts';
import { play } from '../../sim/judging/play.ts';
import type { Probe, Scenario } from '../../sim/probe/fields.ts';
import { validate } from '../../sim/probe/validate.ts';
import { tune } from '../../sim/tuning/tune.ts';
import { nanosecondsAnItem } from './timing.ts';

const NUMPY = fileURLToPath(new URL('../references/bench_numpy.py', import.meta.url));
const OPTIONS = { seed: 1, trial: 0, folder: '.' };
const ROUNDS = 5;

interface Codes {
  meanCode: number;
  deviationCodes: number;
}

export function benchHardware(): void {
  const { probe } = validate(DOOR_STAND);
  const scenario = { ...probe.scenarios.find(({ name }) => name === 'PWM drive')!, duration_ms: 5000 };
  const { totalSamples, gridFactor, stepSeconds } = new Bench(probe, scenario, OPTIONS);
  const block = newCodeBlock(256);
  const nanoseconds = nanosecondsAnItem(totalSamples, () => {
    const one = new Bench(probe, scenario, OPTIONS);
    while (one.next(block));
  });
  const tuned = tune(probe);
  const whole = nanosecondsAnItem(totalSamples, () => void play(probe, scenario, tuned, OPTIONS, []));
  console.log(`hardware of the demo probe, scenario "${scenario.name}", ${totalSamples} A/D samples, ` +
    `${gridFactor} analog steps for one, magnetic memory and all noises on, one core`);
  console.log(line('bench', nanoseconds, gridFactor, codesOf(probe, scenario)));
  console.log(`  with chain and judge  ${(whole / nanoseconds).toFixed(2)} times the time of the bench alone`);
  benchNumpy(probe, scenario, { samples: totalSamples, gridFactor, stepSeconds }, nanoseconds);
}

interface Grid {
  samples: number;
  gridFactor: number;
  stepSeconds: number;
}

function benchNumpy(probe: Probe, scenario: Scenario, grid: Grid, nanoseconds: number): void {
  const input = JSON.stringify({ ...nominalUnit(probe), current: scenario.current, ...grid, rounds: ROUNDS });
  const { status, stdout, stderr } = spawnSync('python3', [NUMPY], { input, encoding: 'utf8' });
  if (status !== 0) {
    console.log(`  NumPy: not compared (${stderr?.trim().split('\n').at(-1) ?? 'no python3'})`);
    return;
  }
  const numpy: Codes & { seconds: number } = JSON.parse(stdout);
  const its = (numpy.seconds / grid.samples) * 1e9;
  console.log(line('NumPy and SciPy', its, grid.gridFactor, numpy));
  console.log(`  ratio                 ${(its / nanoseconds).toFixed(1)} times the samples a second of NumPy`);
}

function line(name: string, nanoseconds: number, gridFactor: number, { meanCode, deviationCodes }: Codes): string {
  return `  ${name.padEnd(22)}${((1e3 * gridFactor) / nanoseconds).toFixed(2).padStart(6)} million analog steps, ` +
    `${(1e3 / nanoseconds).toFixed(3)} million A/D samples a second; ` +
    `codes ${meanCode.toFixed(2)} ± ${deviationCodes.toFixed(2)}`;
}

/** Behind the first tenth, like those of NumPy. */
function codesOf(probe: Probe, scenario: Scenario): Codes {
  const bench = new Bench(probe, scenario, OPTIONS);
  const block = newCodeBlock(256);
  const from = Math.floor(bench.totalSamples / 10);
  let sum = 0;
  let squares = 0;
  for (let position = 0; bench.next(block); position += block.count) {
    for (let k = Math.max(0, from - position); k < block.count; k++) {
      sum += block.code[k];
      squares += block.code[k] ** 2;
    }
  }
  const count = bench.totalSamples - from;
  const meanCode = sum / count;
  return { meanCode, deviationCodes: Math.sqrt(squares / count - meanCode ** 2) };
}
