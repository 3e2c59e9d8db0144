/** npm run bench: speed as ratios from one run, and memory. Nothing here passes or fails. */
import { benchChain } from './chain.ts';
import { benchHardware } from './hardware.ts';
import { benchMemory } from './memory.ts';

benchChain();
console.log();
benchHardware();
console.log();
benchMemory();
