/**
 * Peak memory of whole scenarios of a million and of a hundred million samples, each in a process of its own: flat
 * when nothing grows with the duration. Called with a number of samples it is that process.
 */
import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { DOOR_STAND } from '../../sim/demo/doorstand.ts';
import { play } from '../../sim/judging/play.ts';
import { validate } from '../../sim/probe/validate.ts';
import { tune } from '../../sim/tuning/tune.ts';

const RATE_KHZ = 1000;

export function benchMemory(): void {
  console.log('peak memory of a process that plays a steady scenario');
  const peaks = [1e6, 1e8].map((samples) => {
    const from = Date.now();
    const { stdout, status } = spawnSync(process.execPath, ['--import', import.meta.resolve('tsx'), fileURLToPath(import.meta.url), String(samples)], { encoding: 'utf8' });
    if (status !== 0) throw new Error(`the process of ${samples} samples ended with ${status}`);
    const megabytes = Number(stdout) / 1024;
    console.log(`  ${samples.toExponential(0)} samples   ${megabytes.toFixed(1)} MB   (${((Date.now() - from) / 1e3).toFixed(0)} s)`);
    return megabytes;
  });
  console.log(`  ratio ${(peaks[1] / peaks[0]).toFixed(3)}`);
}

function playSamples(samples: number): void {
  const given = structuredClone(DOOR_STAND);
  const steady = { name: 'steady', about: '', current: { shape: 'dc', level_A: 5 }, duration_ms: samples / RATE_KHZ };
  const { probe } = validate({
    ...given, gridFactor: 1, converter: { ...given.converter, rate_kHz: RATE_KHZ }, scenarios: [steady],
    requirements: [{ measure: 'reading', scenario: 'steady', amperes: 10 }],
    chain: given.chain.map((stage) => (stage.stage === 'zero' ? { ...stage, settle_ms: 1, mean_ms: 1 } : stage)),
  });
  play(probe, probe.scenarios[0], tune(probe), { seed: 1, trial: 1, folder: '.' }, []);
  console.log(process.resourceUsage().maxRSS);
}

if (process.argv[1] === fileURLToPath(import.meta.url) && process.argv[2] !== undefined) playSamples(Number(process.argv[2]));
