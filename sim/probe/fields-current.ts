/** Fields of the currents. See fields.ts for how names end. */
import { choice, list, number, text, variant } from './describe.ts';
import { MAX_TIME_MS } from './longest.ts';

const currentLevel = (meaning: string) => number(meaning, { unit: 'A', min: -1e6, max: 1e6 });
const currentLevelOr = (meaning: string, preset: number) => number(meaning, { unit: 'A', min: -1e6, max: 1e6, preset });
export const frequency = number('frequency', { unit: 'Hz', min: 0, aboveMin: true, max: 1e7 });
const edge = number('duration of an edge from level to level', { unit: 'µs', min: 0, max: 1e9, preset: 1 });

export const atMs = (meaning: string) => number(meaning, { unit: 'ms', min: 0, max: MAX_TIME_MS });

const simpleCurrents = {
  dc: { level_A: currentLevel('current') },
  staircase: {
    levels_A: list('the levels in turn', currentLevel('one level'), { min: 1, max: 1000 }),
    hold_ms: number('time on each level', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
    edge_us: edge,
  },
  sine: {
    peak_A: currentLevel('amplitude'),
    frequency_Hz: frequency,
    offset_A: currentLevelOr('direct current below it', 0),
    phase_deg: number('phase at the start', { unit: '°', min: -360, max: 360, preset: 0 }),
  },
  pwm: {
    low_A: currentLevelOr('current while off', 0),
    high_A: currentLevel('current while on'),
    frequency_Hz: frequency,
    duty_percent: number('share of the period while on, between the middles of the edges', { unit: '%', min: 0, max: 100 }),
    edge_us: edge,
    swing_V: number('voltage step of the conductor at each edge, in the direction of the current', { unit: 'V', min: -1e5, max: 1e5, preset: 0 }),
  },
  step: {
    from_A: currentLevelOr('current before', 0),
    to_A: currentLevel('current after'),
    at_ms: number('when the edge starts', { unit: 'ms', min: 0, max: MAX_TIME_MS }),
    edge_us: edge,
  },
  file: {
    path: text('CSV file with time and current, beside the probe file'),
    timeColumn: text('heading of the time column; empty: the first column', ''),
    currentColumn: text('heading of the current column; empty: the second column', ''),
    timeUnit: choice('unit of the time column where its heading names none', ['s', 'ms', 'µs', 'ns'], 's'),
    currentUnit: choice('unit of the current column where its heading names none', ['A', 'mA', 'µA', 'kA'], 'A'),
  },
  harmonics: {
    peak_A: currentLevel('amplitude of the fundamental'),
    frequency_Hz: frequency,
    offset_A: currentLevelOr('direct current below it', 0),
    percents: list('amplitude of harmonics 2, 3, 4, ... in percent of the fundamental', number('one harmonic', { unit: '%', min: -1000, max: 1000 }), { min: 1, max: 100 }),
    phases_deg: list('their phases at the start; missing ones are 0', number('one phase', { unit: '°', min: -360, max: 360 }), { max: 100, optional: true }),
  },
  ripple: {
    mean_A: currentLevel('direct current of a converter inductor'),
    peakToPeak_A: number('ripple from valley to peak', { unit: 'A', min: 0, max: 1e6 }),
    frequency_Hz: frequency,
    duty_percent: number('share of the period while rising', { unit: '%', min: 1, max: 99, preset: 50 }),
  },
  inrush: {
    peak_A: currentLevel('peak at switch-on'),
    steady_A: currentLevelOr('what remains', 0),
    timeConstant_ms: number('time constant of the decay', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
    at_ms: atMs('when it is switched on'),
    frequency_Hz: number('mains frequency; 0: direct current', { unit: 'Hz', min: 0, max: 1e6, preset: 0 }),
  },
  motor: {
    stall_A: currentLevel('current while the rotor stands'),
    run_A: currentLevel('current while it turns'),
    runUp_ms: number('time constant of running up', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
    electrical_ms: number('electrical time constant of the winding', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: 1 }),
    at_ms: atMs('when it is switched on'),
    stallAt_ms: number('when the rotor is blocked; left out: never', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: null }),
  },
  pulse: {
    base_A: currentLevelOr('current outside', 0),
    peak_A: currentLevel('current inside'),
    at_ms: atMs('when its first edge starts'),
    width_us: number('width between the middles of its edges', { unit: 'µs', min: 0, aboveMin: true, max: 1e9 }),
    edge_us: edge,
  },
  ramp: {
    from_A: currentLevelOr('current before', 0),
    to_A: currentLevel('current after'),
    at_ms: atMs('when it starts'),
    rise_ms: number('how long it takes', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
  },
  sweep: {
    peak_A: currentLevel('amplitude'),
    from_Hz: frequency,
    to_Hz: frequency,
    over_ms: number('time from the first to the last frequency, evenly in octaves', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
    offset_A: currentLevelOr('direct current below it', 0),
  },
  phaseCut: {
    peak_A: currentLevel('amplitude of the uncut sine'),
    frequency_Hz: frequency,
    firing_deg: number('angle from each zero crossing until the current starts', { unit: '°', min: 0, max: 180 }),
    edge_us: edge,
  },
};

const currentMeanings = {
  dc: 'steady current',
  staircase: 'levels in turn',
  sine: 'sine, with or without direct current',
  pwm: 'pulse-width modulated current with finite edges',
  step: 'one step',
  file: 'a recorded current',
  harmonics: 'a fundamental with its harmonics',
  ripple: 'triangle ripple on a direct current',
  inrush: 'a decaying peak at switch-on',
  motor: 'start and stall of a motor',
  pulse: 'one pulse',
  ramp: 'one ramp',
  sweep: 'a sine whose frequency rises or falls',
  phaseCut: 'mains current behind a dimmer',
};

const part = variant('one part of a sum', 'shape', simpleCurrents, currentMeanings);

export const current = variant('the current in the conductor', 'shape', {
  ...simpleCurrents,
  sum: {
    parts: list('the parts', part, { min: 1, max: 20 }),
    times: number('factor on the sum', { unit: '', min: -1e6, max: 1e6, preset: 1 }),
  },
}, { ...currentMeanings, sum: 'parts added, and scaled' });
