/**
 * The chain: each stage of the kinds there are, on its own, and the demo chain, at three block sizes; as nanoseconds an
 * input sample and as a ratio to copying a sample, from the same run.
 */
import { Block, Chain, makeStage, type StageConstants } from '../../lib/index.ts';
import { DOOR_STAND } from '../../sim/demo/doorstand.ts';
import { validate } from '../../sim/probe/validate.ts';
import { tune } from '../../sim/tuning/tune.ts';
import { nanosecondsAnItem } from './timing.ts';

const SAMPLES = 1 << 17;
const SIZES = [1, 16, 256];

/** Codes that wander over a quarter of the range, so that no branch is always the same. */
function wandering(): Int32Array {
  const values = new Int32Array(SAMPLES);
  for (let i = 0, state = 1; i < SAMPLES; i++) {
    state = (Math.imul(state, 1103515245) + 12345) & 0x7fffffff;
    values[i] = 2048 + (state >> 21) - 512;
  }
  return values;
}

export function benchChain(): void {
  const { probe } = validate(DOOR_STAND);
  const { constants } = tune(probe);
  const values = wandering();
  const copy = SIZES.map((size) => timed(values, size, null));
  console.log('chain, nanoseconds an input sample (ratio to copying it) at blocks of 1, 16, 256');
  console.log(line('copy', copy, copy));
  const kinds: StageConstants[] = [
    ...constants.design.filter((stage, index) => constants.design.findIndex(({ kind }) => kind === stage.kind) === index),
    { kind: 'despike', window: 5, primed: 1 }, { kind: 'demodulate', quarter: 1, blank: 4, longest: 4096 },
    { kind: 'linearise', origin: -(2 ** 19), gridBits: 15, knots: Array.from({ length: 33 }, (_, i) => (i - 16) * 2 ** 15), beyond: 1, limit: 2 ** 20 },
  ];
  for (const stage of kinds) {
    const one = makeStage(stage, constants.unit, []);
    const times = SIZES.map((size) => timed(values, size, (block) => one.process(block)));
    console.log(line(stage.kind, times, copy));
  }
  const chain = new Chain(constants);
  console.log(line('demo chain', SIZES.map((size) => timed(values, size, (block) => chain.process(block))), copy));
}

function timed(values: Int32Array, size: number, process: ((block: Block) => void) | null): number {
  const block = new Block(size);
  return nanosecondsAnItem(SAMPLES, () => {
    for (let at = 0; at < SAMPLES; at += size) {
      for (let i = 0; i < size; i++) {
        block.value[i] = values[at + i];
        block.status[i] = 0;
      }
      block.count = size;
      block.temperatureCode = 2048;
      process?.(block);
    }
  });
}

function line(name: string, times: number[], copy: number[]): string {
  const cells = times.map((time, i) => `${time.toFixed(1).padStart(8)} (${(time / copy[i]).toFixed(1).padStart(5)})`);
  return `  ${name.padEnd(12)}${cells.join('  ')}`;
}
