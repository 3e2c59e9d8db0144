/** The hardware of the demo probe, all noises on, and a whole scenario through bench, chain and judge. */
import { Bench, newCodeBlock } from '../../sim/hardware/bench.ts';
import { DOOR_STAND } from '../../sim/demo/doorstand.ts';
import { play } from '../../sim/judging/play.ts';
import { validate } from '../../sim/probe/validate.ts';
import { tune } from '../../sim/tuning/tune.ts';
import { nanosecondsAnItem } from './timing.ts';

export function benchHardware(): void {
  const { probe } = validate(DOOR_STAND);
  const scenario = probe.scenarios.find(({ name }) => name === 'PWM drive')!;
  const options = { seed: 1, trial: 1, folder: '.' };
  const block = newCodeBlock(256);
  const { totalSamples, gridFactor } = new Bench(probe, scenario, options);
  const bench = nanosecondsAnItem(totalSamples, () => {
    const one = new Bench(probe, scenario, options);
    while (one.next(block));
  });
  const tuned = tune(probe);
  const whole = nanosecondsAnItem(totalSamples, () => void play(probe, scenario, tuned, options, []));
  console.log(`hardware of the demo probe, scenario "${scenario.name}", ${gridFactor} analog steps for one A/D sample, noises on`);
  console.log(`  bench alone            ${(bench / 1e3).toFixed(2)} µs a sample, ${((1e3 * gridFactor) / bench).toFixed(1)} million analog steps a second`);
  console.log(`  with chain and judge   ${(whole / 1e3).toFixed(2)} µs a sample, ${(whole / bench).toFixed(2)} times the bench alone`);
}
