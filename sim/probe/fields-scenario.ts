/** Fields of a scenario and its events. See fields.ts for how names end. */
import { choice, flag, group, list, number, text } from './describe.ts';
import { atMs, current, frequency } from './fields-current.ts';
import { MAX_TIME_MS } from './longest.ts';

/** jaw opened: for that long, then closed; polarity: for that long the probe is around the conductor the other way. */
const event = group('something that happens during a scenario', {
  at_ms: number('when it begins', { unit: 'ms', min: 0, max: MAX_TIME_MS }),
  for_ms: number('how long it lasts', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: 10 }),
  event: choice('what', ['zero button', 'sticky clear', 'degaussed', 'power cycle', 'jaw opened', 'polarity']),
});

export const scenario = group('one run of the probe', {
  name: text('name by which requirements call it'),
  about: text('what it is there to show', ''),
  current,
  duration_ms: number('length of the run', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
  judgeFrom_ms: number('readings before this are not judged', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: 0 }),
  settle_ms: number('time after each level of a staircase, or after a step, that is not judged', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: 0 }),
  temperature_C: number('temperature of the whole probe', { unit: '°C', min: -100, max: 200, preset: 25 }),
  ambient: list('ambient over time, on straight lines, held beyond the ends; empty: temperature_C throughout', group('one point', {
    at_ms: atMs('when'),
    temperature_C: number('ambient temperature', { unit: '°C', min: -100, max: 200 }),
  }), { max: 1000, optional: true }),
  supply_V: number('supply at the start; left out: the nominal supply', { unit: 'V', min: 0.5, max: 100, preset: null }),
  supplySag_mV_per_s: number('how fast the supply (a battery) falls', { unit: 'mV/s', min: 0, max: 1e5, preset: 0 }),
  outerField_uT: number('outer field along the sensitive axis; turns over with the event polarity', { unit: 'µT', min: -1e6, max: 1e6, preset: 0 }),
  neighbour_A: number('steady current of a neighbour conductor', { unit: 'A', min: -1e6, max: 1e6, preset: 0 }),
  coil: group('current in the coil for degaussing: a decaying sine', {
    at_ms: atMs('when it starts'),
    peak_A: number('first amplitude', { unit: 'A', min: 0, aboveMin: true, max: 1e4 }),
    frequency_Hz: frequency,
    decay_ms: number('time constant of its decay', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
  }, 'absent'),
  events: list('events, in any order', event, { max: 1000, optional: true }),
  long: flag('played only when all scenarios are asked for', false),
});
