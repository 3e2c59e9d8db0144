/**
 * Every field of a probe file, described once. A name ends in its unit (`bandwidth_kHz`); a number without a unit in
 * its name is a pure number. `Probe` is the type of a file after validation, with every default filled in.
 */
import { group, list, number, text, type Of } from './describe.ts';
import { stage } from './fields-chain.ts';
import { amplifier, converter, core, coupling, sensor, shunt, thermometer, transformer } from './fields-hardware.ts';
import { requirement } from './fields-requirement.ts';
import { scenario } from './fields-scenario.ts';

const calibration = group('what the factory measures on each unit, with the current known', {
  at_C: number('temperature of the calibration', { unit: '°C', min: -100, max: 200, preset: 23 }),
  span_A: number('current of the two gain points, plus and minus', { unit: 'A', min: 0, aboveMin: true, max: 1e6 }),
  samples: number('codes averaged at each point', { unit: 'samples', min: 16, max: 1e6, integer: true, preset: 4096 }),
}, 'absent');

export const PROBE = group('a probe: hardware, firmware chain, and what it must hold', {
  name: text('name of the probe'),
  about: text('where it is used', ''),
  range_A: number('nominal range: accuracy in percent of range refers to it', { unit: 'A', min: 0, aboveMin: true, max: 1e6 }),
  direction: number('+1 or -1: which way the current is counted positive', { unit: '', min: -1, max: 1, integer: true, preset: 1 }),
  supply_V: number('supply of sensor and amplifier', { unit: 'V', min: 0.5, max: 100, toleranced: true, preset: 5 }),
  core,
  sensor,
  coupling,
  amplifier,
  converter,
  thermometer,
  calibration,
  shunt,
  transformer,
  gridFactor: number('analog steps for one A/D sample; left out: 16 times the highest corner over the A/D rate', { unit: '', min: 1, max: 4096, integer: true, preset: null }),
  chain: list('the stages in order', stage, { min: 2, max: 32 }),
  scenarios: list('the runs', scenario, { min: 1, max: 200 }),
  requirements: list('what must hold', requirement, { min: 1, max: 500 }),
});

export type Probe = Of<typeof PROBE>;
export type StageSpec = Probe['chain'][number];
export type StageSpecOf<K extends StageSpec['stage']> = Extract<StageSpec, { stage: K }>;
export type Scenario = Probe['scenarios'][number];
export type CurrentSpec = Scenario['current'];
export type Requirement = Probe['requirements'][number];
