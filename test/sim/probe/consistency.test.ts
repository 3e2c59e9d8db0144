import { describe, expect, test } from 'vitest';
import { put } from './places.ts';
import { switchedBias, tramDoor, type Loose } from './tram-door.ts';
import { problemsOf } from './problems.ts';

function changed(make: () => Loose, changes: Record<string, unknown>): Loose {
  const probe = make();
  for (const [path, value] of Object.entries(changes)) put(probe, path, value);
  return probe;
}

/** Law; what is changed in the valid probe; the path of the one problem; words that it must contain. */
type Conflict = [string, Record<string, unknown>, string, string];

const JILES_ATHERTON = { saturation_kA_per_m: 1600, shape_A_per_m: 1100, coupling: 0.0016, pinning_A_per_m: 400,
  reversibility: 0.2 };

const HARDWARE: Conflict[] = [
  ['the direction is +1 or -1', { direction: 0 }, 'direction', '1 or -1'],
  ['the lower rail is below the upper one', { 'amplifier.railLow_V': 4.95 }, 'amplifier.railLow_V',
    'below amplifier.railHigh_V (4.95 V)'],
  ['the virtual ground lies within the rails', { 'amplifier.virtualGround_V': 0 }, 'amplifier.virtualGround_V',
    'amplifier.railLow_V (0.05 V) to amplifier.railHigh_V (4.95 V)'],
  ['the swing of the sensor has a low and a high end', { 'sensor.swingLow_V': 4.8 }, 'sensor.swingLow_V',
    'below sensor.swingHigh_V (4.8 V)'],
  ['the rest output lies within the swing', { 'sensor.swingHigh_V': 2.4 }, 'sensor.rest_V',
    'sensor.swingHigh_V (2.4 V)'],
  ['a gain is not zero', { 'amplifier.gain': 0 }, 'amplifier.gain', 'not 0'],
  ['a gain keeps its sign over its tolerance', { 'amplifier.gain': { nominal: -1, tolerance: 1 } }, 'amplifier.gain',
    'keeps its sign'],
  ['a code fits in its word', { 'converter.bits': 17 }, 'converter.word_bits', 'converter.bits (17 bits)'],
  ['a linear thermometer has a slope', { 'thermometer.element': 'linear', 'thermometer.slope_mV_per_K': 0 },
    'thermometer.slope_mV_per_K', 'thermometer.element'],
  ['a drift of the reference needs one that is fixed',
    { 'converter.reference': 'supply', 'converter.referenceDrift_ppm_per_K': 20 },
    'converter.referenceDrift_ppm_per_K', 'converter.reference is "supply"'],
  ['one sensor has no mismatch', { 'sensor.count': 1 }, 'sensor.mismatch_percent', 'sensor.count is 1'],
  ['without noise there is no corner of it', { 'sensor.noise_uT_per_rtHz': 0 }, 'sensor.noiseCorner_Hz',
    'sensor.noise_uT_per_rtHz is 0'],
  ['play and Jiles-Atherton exclude each other', { 'core.jilesAtherton': JILES_ATHERTON }, 'core.jilesAtherton',
    'core.play is given'],
  ['play needs its three numbers', { 'core.play.remanence_T': undefined }, 'core.play.remanence_T',
    'coercivity_A_per_m, saturation_T'],
  ['a loop is measured or told, not both', { 'core.play': { loopFile: 'loop.csv', coercivity_A_per_m: 15 } },
    'core.play.coercivity_A_per_m', 'core.play.loopFile is given'],
  ['play needs something', { 'core.play': {} }, 'core.play.loopFile', 'coercivity_A_per_m, remanence_T, saturation_T'],
  ['remanence stays below saturation', { 'core.play.remanence_T': 0.45 }, 'core.play.remanence_T',
    'below core.play.saturation_T (0.45 T)'],
  ['also at the ends of their tolerances', { 'core.play.remanence_T': { nominal: 0.35, tolerance: 0.06 },
    'core.play.saturation_T': { nominal: 0.45, tolerance: 0.05 } }, 'core.play.remanence_T', '(0.4 T)'],
  // alpha = 3 a / Ms = 3 * 1100 / 1.6e6
  ['the anhysteretic curve does not jump', { 'core.play': undefined, 'core.jilesAtherton':
    { ...JILES_ATHERTON, coupling: 0.0020625 } }, 'core.jilesAtherton.coupling', 'below 0.0020625'],
];

const CHAIN: Conflict[] = [
  ['a median window is odd', { 'chain[2].window_samples': 4 }, 'chain[2].window_samples', '3 or 5'],
  ['the code for zero current is one that an offset-binary converter has', { 'chain[0].midCode': 4096 },
    'chain[0].midCode', '0 to 4095'],
  ['a code limit is one that the converter has', { 'chain[1].lowCode': -1 }, 'chain[1].lowCode', '0 to 4095'],
  ['the low code limit is below the high one', { 'chain[1].lowCode': 4075 }, 'chain[1].lowCode',
    'below chain[1].highCode (4075)'],
  ['one code alone is not stuck', { 'chain[1].stuckAfter_samples': 1 }, 'chain[1].stuckAfter_samples', '2 and more'],
  ['the limits of a thermometer are in order', { 'chain[4].lowest_C': 125 }, 'chain[4].lowest_C', 'chain[4].highest_C'],
  ['the fallback temperature is one that the thermometer may show', { 'chain[4].fallback_C': -50 },
    'chain[4].fallback_C', 'chain[4].lowest_C (-40 °C)'],
  ['a table over temperature ascends', { 'chain[5].table[1].at_C': -20 }, 'chain[5].table[1].at_C',
    'above chain[5].table[0].at_C (-20 °C)'],
  ['the readings of a correction ascend', { 'chain[8].table[1].reads_A': 30 }, 'chain[8].table[2].reads_A',
    'above chain[8].table[1].reads_A (30 A)'],
  ['the true currents of a correction ascend', { 'chain[8].table[1].is_A': -31 }, 'chain[8].table[1].is_A',
    'above chain[8].table[0].is_A (-30.2 A)'],
  ['tracking removes no more than its window', { 'chain[6].trackAuthority_A': 0.2 }, 'chain[6].trackAuthority_A',
    'at most chain[6].trackWindow_A (0.1 A)'],
  ['the window of tracking is narrower than the range', { 'chain[6].trackWindow_A': 30 }, 'chain[6].trackWindow_A',
    'below range_A (30 A)'],
  ['tracking that is on can move', { 'chain[6].trackRate_A_per_s': 0 }, 'chain[6].trackRate_A_per_s',
    'chain[6].tracking'],
  // 50 kHz over a decimation by 5 is 10 kHz, half of it 5000 Hz
  ['a corner is below half the rate behind the decimation', { 'chain[9].corner_Hz': 5000 }, 'chain[9].corner_Hz',
    'below 5000 Hz'],
  ['a notch has a width', { 'chain[10].width_Hz': undefined }, 'chain[10].width_Hz', 'chain[10].filter'],
  ['only a notch has a width', { 'chain[9].width_Hz': 5 }, 'chain[9].width_Hz', 'left out'],
  ['a notch has no order to choose', { 'chain[10].order': 4 }, 'chain[10].order', 'chain[10].filter'],
  // 0.04 ms at 10 kHz is 0.4 samples
  ['an average holds a sample', { 'chain[11].length_ms': 0.04 }, 'chain[11].length_ms', 'one sample'],
  ['a window of a meter holds a sample', { 'chain[13].window_ms': 0.04 }, 'chain[13].window_ms', 'one sample'],
  ['meters have names of their own', { 'chain[14]': { stage: 'meter', name: 'door', window_ms: 50 } }, 'chain[14].name',
    'chain[13].name'],
  ['a switched bias needs a chain that demodulates', { 'sensor.bias': 'reversal' }, 'sensor.bias', 'demodulate'],
];

const SCENARIOS: Conflict[] = [
  ['scenarios have names of their own', { 'scenarios[5].name': 'stairs' }, 'scenarios[5].name', 'scenarios[1].name'],
  ['judging begins within the duration', { 'scenarios[0].judgeFrom_ms': 400 }, 'scenarios[0].judgeFrom_ms',
    'below scenarios[0].duration_ms (400 ms)'],
  ['events begin within the duration', { 'scenarios[0].events[0].at_ms': 400 }, 'scenarios[0].events[0].at_ms',
    'below scenarios[0].duration_ms (400 ms)'],
  ['a step begins within the duration', { 'scenarios[4].current.at_ms': 200 }, 'scenarios[4].current.at_ms',
    'below scenarios[4].duration_ms (200 ms)'],
  ['the last level of a staircase begins within the duration', { 'scenarios[1].duration_ms': 200 },
    'scenarios[1].duration_ms', 'above 200 ms'],
  ['an edge of a staircase reaches its level', { 'scenarios[1].current.edge_us': 100_001 },
    'scenarios[1].current.edge_us', 'scenarios[1].current.hold_ms (100 ms)'],
  ['the levels of a pulse-width modulation differ', { 'scenarios[3].current.low_A': 12 }, 'scenarios[3].current.high_A',
    'scenarios[3].current.low_A (12 A)'],
  // a period of 1/18000 s is 55.6 µs, 40 % of it 22.2 µs
  ['an edge fits in the on time', { 'scenarios[3].current.edge_us': 22.3 }, 'scenarios[3].current.edge_us', '22.2'],
  ['an edge fits in the off time', { 'scenarios[3].current.edge_us': 6, 'scenarios[3].current.duty_percent': 90 },
    'scenarios[3].current.edge_us', '5.5'],
  ['a sine has an amplitude', { 'scenarios[2].current.peak_A': 0 }, 'scenarios[2].current.peak_A', 'not 0'],
  ['an inrush begins within the duration', { 'scenarios[6].current.at_ms': 400 }, 'scenarios[6].current.at_ms',
    'below scenarios[6].duration_ms (400 ms)'],
  ['the ambient goes forward in time', { 'scenarios[6].ambient[0].at_ms': 300 }, 'scenarios[6].ambient[1].at_ms',
    'above scenarios[6].ambient[0].at_ms (300 ms)'],
  // 12.5 V/s for 0.4 s is all of 5 V
  ['a battery is not empty before the end', { 'scenarios[6].supplySag_mV_per_s': 12_500 },
    'scenarios[6].supplySag_mV_per_s', 'supply_V of 5 V over duration_ms (400 ms)'],
  ['a current in the coil needs a coil', { 'core.coilTurns': 0 }, 'scenarios[6].coil', 'core.coilTurns is 0'],
  ['the coil begins within the duration', { 'scenarios[6].coil.at_ms': 400 }, 'scenarios[6].coil.at_ms',
    'below scenarios[6].duration_ms (400 ms)'],
  ['an opened jaw is closed within the duration', { 'scenarios[7].events[1].for_ms': 21 },
    'scenarios[7].events[1].for_ms', 'at most 20 ms'],
  ['a jaw that is open cannot be opened', { 'scenarios[7].events[2].for_ms': 11 }, 'scenarios[7].events[1].at_ms',
    '381 ms or later, when the event "jaw opened" of scenarios[7].events[2]'],
  ['a probe that is turned over is turned over once', { 'scenarios[7].events[2]': { at_ms: 240, event: 'polarity' } },
    'scenarios[7].events[2].at_ms', '250 ms or later'],
  ['a winding is faster than its rotor', { 'scenarios[7].current.electrical_ms': 60 },
    'scenarios[7].current.electrical_ms', 'below scenarios[7].current.runUp_ms (60 ms)'],
  ['a motor draws most while its rotor stands', { 'scenarios[7].current.run_A': -46 }, 'scenarios[7].current.run_A',
    'scenarios[7].current.stall_A (45 A)'],
  ['a rotor is blocked after it was switched on', { 'scenarios[7].current.stallAt_ms': 19 },
    'scenarios[7].current.at_ms', 'at most scenarios[7].current.stallAt_ms (19 ms)'],
  ['a rotor is blocked within the duration', { 'scenarios[7].current.stallAt_ms': 400 },
    'scenarios[7].current.stallAt_ms', 'below scenarios[7].duration_ms (400 ms)'],
  ['the edges of a pulse do not overlap', { 'scenarios[8].current.edge_us': 5001 }, 'scenarios[8].current.edge_us',
    'at most scenarios[8].current.width_us (5000 µs)'],
  // 100 ms, the width and an edge of 0.1 ms
  ['a pulse ends within the duration', { 'scenarios[8].current.width_us': 299_901 }, 'scenarios[8].current.width_us',
    'scenarios[8].duration_ms (400 ms)'],
  ['a pulse is another current', { 'scenarios[8].current.base_A': 90, 'requirements[9].scenario': 'short' },
    'scenarios[8].current.peak_A', 'scenarios[8].current.base_A (90 A)'],
  ['a ramp ends within the duration', { 'scenarios[9].current.rise_ms': 381 }, 'scenarios[9].current.rise_ms',
    'scenarios[9].duration_ms (400 ms)'],
  ['a ramp goes somewhere', { 'scenarios[9].current.to_A': 0, 'requirements[11].scenario': 'short' },
    'scenarios[9].current.to_A', 'scenarios[9].current.from_A (0 A)'],
  ['a sweep comes to its last frequency', { 'scenarios[10].current.over_ms': 401 }, 'scenarios[10].current.over_ms',
    'at most scenarios[10].duration_ms (400 ms)'],
  // 90 degrees of 20 ms are 5 ms
  ['the edge behind the firing ends before the zero crossing', { 'scenarios[11].current.edge_us': 5001 },
    'scenarios[11].current.edge_us', '(5000 µs)'],
  ['a ripple is above zero', { 'scenarios[12].current.peakToPeak_A': 0 }, 'scenarios[12].current.peakToPeak_A',
    'above 0'],
  ['phases belong to harmonics', { 'scenarios[13].current.phases_deg': [0, 0, 0, 0, 90] },
    'scenarios[13].current.phases_deg', 'at most 4'],
  ['a sum is more than nothing', { 'scenarios[14].current.times': 0 }, 'scenarios[14].current.times', 'not 0'],
  ['a part of a sum follows the rules of its shape', { 'scenarios[14].current.parts[0].edge_us': 22.3 },
    'scenarios[14].current.parts[0].edge_us', '22.2'],
];

const REQUIREMENTS: Conflict[] = [
  ['a requirement names a scenario that exists', { 'requirements[0].scenario': 'stiars' }, 'requirements[0].scenario',
    'did you mean "stairs"?'],
  ['a requirement names a meter that exists', { 'requirements[1].meter': 'dor' }, 'requirements[1].meter',
    'did you mean "door"?'],
  ['an allowance is not zero altogether', { 'requirements[1].amperes': 0 }, 'requirements[1]', 'above 0'],
  ['noise is judged at a steady current', { 'requirements[4].scenario': 'mains' }, 'requirements[4].scenario', '"dc"'],
  ['settling is judged at a step', { 'requirements[5].scenario': 'still' }, 'requirements[5].scenario', '"step"'],
  ['settling needs two different currents', { 'scenarios[4].current.from_A': 15 }, 'requirements[5].scenario',
    'two different currents'],
  // 200 ms less 20 ms less half an edge of 1 µs leaves 179.9995 ms
  ['the limit of settling passes within the duration', { 'requirements[5].limit_ms': 180 }, 'requirements[5].limit_ms',
    'duration_ms (200 ms)'],
  ['a scenario is as long as a window that is judged in it', { 'chain[13].window_ms': 401, 'requirements[2].scenario':
    'ride', 'requirements[3].scenario': 'ride' }, 'requirements[1].scenario', 'window_ms 401'],
  ['a share of a true value of zero allows nothing', { 'requirements[2].scenario': 'still' },
    'requirements[2].percentOfReading', 'true value in scenario "still" is 0'],
  ['a steady current has no alternating part to allow a share of', { 'requirements[3].scenario': 'still',
    'scenarios[0].current.level_A': 5 }, 'requirements[3].percentOfReading', 'is 0'],
  ['a transition needs a step', { 'requirements[7].scenario': 'hum' }, 'requirements[7].scenario', 'such as "start"'],
  ['an overshoot needs a step', { 'requirements[8].scenario': 'climb' }, 'requirements[8].scenario', '"step"'],
  ['a zero after an overload needs a pulse', { 'requirements[9].scenario': 'shut' }, 'requirements[9].scenario',
    'shape "pulse"; such as "short"'],
  ['there is a zero before the pulse', { 'scenarios[8].judgeFrom_ms': 100 }, 'requirements[9].scenario',
    'behind judgeFrom_ms'],
  ['the drift of a zero needs a steady current', { 'requirements[10].scenario': 'hum' }, 'requirements[10].scenario',
    '"dc"'],
  // 0.4 s hold three times 0.1333 s
  ['an averaging time fits three times into what is judged', { 'requirements[10].tau_s': 0.1334 },
    'requirements[10].tau_s', 'a third of what duration_ms and judgeFrom_ms of scenario "still" leave (0.4 s)'],
  ['gain needs a sine', { 'requirements[13].scenario': 'rectifier' }, 'requirements[13].scenario', '"sine"'],
  ['phase needs a sine', { 'requirements[14].scenario': 'tones' }, 'requirements[14].scenario', '"sine"'],
  ['SINAD needs a sine', { 'requirements[15].scenario': 'still' }, 'requirements[15].scenario', '"sine"'],
  ['effective bits need a sine', { 'requirements[16].scenario': 'together' }, 'requirements[16].scenario', '"sine"'],
  // 10 kHz behind the decimation
  ['a sine that is fitted is below half the rate of readings', { 'scenarios[2].current.frequency_Hz': 5000,
    'requirements[13].scenario': 'mains' }, 'requirements[13].scenario', 'below 5000 Hz'],
  // 300 ms of 16.6 Hz are 4.98 periods
  ['a sine that is fitted has five periods', { 'scenarios[2].current.frequency_Hz': 16.6,
    'requirements[14].scenario': 'mains' }, 'requirements[14].scenario', 'at least 5 periods'],
  ['the delay of an over-range needs one', { 'scenarios[9].current.to_A': 30 }, 'requirements[11].scenario',
    'leaves range_A (30 A)'],
  ['a current that is beyond the range from the start does not leave it', { 'scenarios[9].current.from_A': 31 },
    'requirements[11].scenario', 'leaves range_A (30 A)'],
  ['recovery needs a current that comes back', { 'requirements[12].scenario': 'climb' }, 'requirements[12].scenario',
    'comes back into range_A (30 A)'],
  ['a steady current beyond the range never comes back', { 'scenarios[0].current.level_A': 31,
    'requirements[12].scenario': 'still' }, 'requirements[12].scenario', 'comes back'],
  // (4 + 5) A times 2
  ['a sum stays in the range where its parts together do', { 'requirements[11].scenario': 'together' },
    'requirements[11].scenario', 'leaves range_A (30 A)'],
  ['a band has a lower and an upper end', { 'requirements[17].from_Hz': 1001 }, 'requirements[17].from_Hz',
    'at most requirements[17].to_Hz (1000 Hz)'],
  ['a band with two ends has two points', { 'requirements[17].points': 1 }, 'requirements[17].points', '2 or more'],
  ['a band is below half the sample rate', { 'requirements[17].to_Hz': 25_000 }, 'requirements[17].to_Hz',
    'below 25000 Hz'],
  ['a band is judged at a meter that exists', { 'requirements[17].meter': 'doors' }, 'requirements[17].meter',
    'did you mean "door"?'],
  ['a band has a cold and a warm end', { 'requirements[17].lowest_C': 41 }, 'requirements[17].lowest_C',
    'at most requirements[17].highest_C (40 °C)'],
  ['a bandwidth is below half the rate of readings', { 'requirements[18].atLeast_Hz': 5000 },
    'requirements[18].atLeast_Hz', 'below 5000 Hz'],
  ['zero over temperature has a cold and a warm end', { 'requirements[19].highest_C': -11 },
    'requirements[19].lowest_C', 'at most requirements[19].highest_C (-11 °C)'],
];

describe.each([
  ['hardware', HARDWARE], ['chain', CHAIN], ['scenarios', SCENARIOS], ['requirements', REQUIREMENTS],
])('%s', (_, conflicts) => {
  test.each(conflicts)('%s', (_law, changes, path, words) => {
    const problems = problemsOf(changed(tramDoor, changes));
    expect(problems.map((problem) => problem.path)).toEqual([path]);
    expect(`${problems[0].allowed}; ${problems[0].hint}`).toContain(words);
  });
});

describe('the thermometer', () => {
  test('stages that need it are refused where the hardware has none', () => {
    const problems = problemsOf(changed(tramDoor, { thermometer: undefined }));
    expect(problems.map((problem) => problem.path)).toEqual(['chain[4].stage', 'chain[5].stage']);
  });

  test('a trim stands behind the stage that tells the temperature', () => {
    const given = tramDoor();
    [given.chain[4], given.chain[5]] = [given.chain[5], given.chain[4]];
    expect(problemsOf(given).map((problem) => problem.path)).toEqual(['chain[4].stage']);
  });
});

describe('the bias', () => {
  const DEMODULATE = 3;

  test.each(['steady', 'reversal'])('%s in the hardware does not go with demodulation by quarter turns', (bias) => {
    const [only, ...more] = problemsOf(changed(switchedBias, { 'sensor.bias': bias }));
    expect(more).toEqual([]);
    expect(only.path).toBe(`chain[${DEMODULATE}].bias`);
  });

  test('samples left out after a switch leave some of the phase', () => {
    const given = changed(switchedBias, { [`chain[${DEMODULATE}].blank_samples`]: 32 });
    expect(problemsOf(given).map((problem) => problem.path)).toEqual([`chain[${DEMODULATE}].blank_samples`]);
  });

  test('the longest phase is not shorter than the phase of the sensor', () => {
    const given = changed(switchedBias, { [`chain[${DEMODULATE}].longestPhase_samples`]: 31 });
    expect(problemsOf(given).map((problem) => problem.path)).toEqual([`chain[${DEMODULATE}].longestPhase_samples`]);
  });
});

test("codes of a two's complement converter have a sign", () => {
  const changes = { 'converter.format': "two's complement", 'chain[0].midCode': 0, 'chain[1].lowCode': -2048 };
  expect(problemsOf(changed(tramDoor, { ...changes, 'chain[1].highCode': 2047 }))).toEqual([]);
  const [only] = problemsOf(changed(tramDoor, { ...changes, 'chain[1].highCode': 2048 }));
  expect(only.allowed).toContain('-2048 to 2047');
});

test('a stage of your own without its function is refused', () => {
  const given = JSON.parse(JSON.stringify(switchedBias()));
  const index = given.chain.findIndex((stage: { stage: string }) => stage.stage === 'custom');
  expect(problemsOf(given).map((problem) => problem.path)).toEqual([`chain[${index}].make`]);
});

test('a sum of sums is refused: a part has one of the other shapes', () => {
  const changes = { 'scenarios[14].current.parts[0]': { shape: 'sum', parts: [] } };
  const [only, ...more] = problemsOf(changed(tramDoor, changes));
  expect(more).toEqual([]);
  expect(only.path).toBe('scenarios[14].current.parts[0].shape');
  expect(only.allowed).not.toContain('"sum"');
});

test('without any meter the hint is to add one', () => {
  const given = tramDoor();
  given.chain.pop();
  const problems = problemsOf(given);
  expect(problems.map((problem) => problem.path)).toEqual([1, 2, 3, 17].map((index) => `requirements[${index}].meter`));
  expect(problems[0].hint).toContain('"meter"');
});

/** Unusual, yet a thing that an engineer may want to prove a probe against. */
const LEGAL: [string, Record<string, unknown>][] = [
  ['a sine above half the sample rate', { 'scenarios[2].current.frequency_Hz': 9e6 }],
  ['a chopper above the sample rate', { 'scenarios[3].current.frequency_Hz': 120_000 }],
  ['a current far beyond the range', { 'scenarios[4].current.to_A': -5000 }],
  ['an amplifier that turns the sign', { 'amplifier.gain': -1.5 }],
  ['a counting direction of -1', { direction: -1 }],
  ['a virtual ground at the lower rail', { 'amplifier.virtualGround_V': 0.05 }],
  ['a median of 5', { 'chain[2].window_samples': 5 }],
  ['a duty of 100 % with an edge longer than the period',
    { 'scenarios[3].current.duty_percent': 100, 'scenarios[3].current.edge_us': 1e6 }],
  ['edges that just meet: a triangle', { 'scenarios[3].current.duty_percent': 50,
    'scenarios[3].current.edge_us': 1e6 / 18000 / 2 }],
  ['a button still held when the run ends', { 'scenarios[0].events[0].for_ms': 1000 }],
  ['tracking that is off, whatever its fields say', { 'chain[6].tracking': false, 'chain[6].trackAuthority_A': 50 }],
  ['tracking with all of its window', { 'chain[6].trackAuthority_A': 0.1 }],
  ['trim tables left out', { 'chain[5].table': [] }],
  ['a scenario that no requirement names', { 'requirements[0].scenario': 'ride' }],
  ['a code that fills its word', { 'converter.bits': 16 }],
  ['a loop file in place of the three numbers', { 'core.play': { loopFile: 'loop.csv' } }],
  ['Jiles-Atherton alone', { 'core.play': undefined, 'core.jilesAtherton': JILES_ATHERTON }],
  ['no magnetic memory', { 'core.play': undefined }],
  ['an over-range of which the fields do not tell the size', { 'requirements[11].scenario': 'ride' }],
  ['an over-range by the sum of its parts', { 'scenarios[14].current.times': 4, 'requirements[12].scenario':
    'together' }],
  ['a jaw opened at the moment it was closed', { 'scenarios[7].events[2].for_ms': 10 }],
  ['a signal during another of its kind', { 'scenarios[0].events': [{ at_ms: 50, for_ms: 100, event: 'zero button' },
    { at_ms: 60, event: 'zero button' }] }],
  ['an ambient that goes on beyond the end', { 'scenarios[6].ambient[1].at_ms': 900 }],
  ['a supply that falls to almost nothing', { 'scenarios[6].supplySag_mV_per_s': 12_499 }],
  ['a band at one frequency', { 'requirements[17].from_Hz': 1000, 'requirements[17].points': 1 }],
  ['one temperature', { 'requirements[17].lowest_C': 40 }],
  ['a recorded current in a sum', { 'scenarios[14].current.parts[1]': { shape: 'file', path: 'ride.csv' } }],
  ['a pulse that ends with the run', { 'scenarios[8].current.width_us': 299_900 }],
  ['fired at 0 degrees, where there is no edge', { 'scenarios[11].current.firing_deg': 0,
    'scenarios[11].current.edge_us': 1e6 }],
  ['a settling limit that just fits', { 'requirements[5].limit_ms': 179.9995 }],
  ['a word of 24 bits in 32', { 'converter.bits': 24, 'converter.word_bits': 32 }],
];

describe('is legal', () => {
  test.each(LEGAL)('%s', (_, changes) => expect(problemsOf(changed(tramDoor, changes))).toEqual([]));
});

describe('a rule is silent about parts that are broken themselves', () => {
  test.each([
    ['amplifier.railHigh_V', 'high'], ['sensor.rest_V', NaN], ['scenarios[4].name', 7], ['scenarios', []],
    ['chain[13].name', ''], ['chain', 'intake'], ['chain[13].stage', 'metre'], ['thermometer', 5],
    ['scenarios[4].current.shape', 'stp'], ['scenarios[4].duration_ms', -1], ['sensor.bias', 'reversed'],
    ['converter.rate_kHz', null], ['chain[8].table[1].is_A', 'x'], ['core', []], ['core.play', 7],
    ['core.play.loopFile', 3], ['core.play.saturation_T', NaN], ['core.coilTurns', -1], ['scenarios[6]', 'lamp'],
    ['scenarios[6].coil', 1], ['scenarios[6].ambient', {}], ['scenarios[13].current.percents', []],
    ['scenarios[14].current.parts', 'x'], ['scenarios[14].current.parts[0].shape', 'sum'],
    ['scenarios[7].events[1].at_ms', 'x'], ['scenarios[7].current.stallAt_ms', 'x'], ['requirements[17].to_Hz', 'x'],
  ])('%s = %o', (path, value) => {
    const problems = problemsOf(changed(tramDoor, { [path]: value }));
    const isTag = path.endsWith('.stage') || path.endsWith('.shape');
    const top = isTag ? path.slice(0, path.lastIndexOf('.')) : path;
    expect(problems.length).toBeGreaterThan(0);
    expect(problems.filter((problem) => !problem.path.startsWith(top))).toEqual([]);
  });
});

test('conflicts and broken fields come in one error', () => {
  const changes = { 'sensor.noise_uT_per_rtHz': -3, direction: 0, 'requirements[0].scenario': 'stares' };
  const given = changed(tramDoor, changes);
  expect(problemsOf(given).map((problem) => problem.path))
    .toEqual(['sensor.noise_uT_per_rtHz', 'direction', 'requirements[0].scenario']);
});
