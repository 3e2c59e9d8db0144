/** Fields of the stages of the chain, in engineering units. See fields.ts for how names end. */
import { choice, code, flag, group, list, number, text, variant } from './describe.ts';
import { MAX_TIME_MS } from './longest.ts';

const start = choice('state at the first sample: as if that sample had always been there, or all zero', ['primed', 'zero'], 'primed');

export const stage = variant('one stage of the chain, in engineering units', 'stage', {
  intake: {
    midCode: number('code that stands for zero current; left out: the nominal rest of the hardware', { unit: 'codes', min: -8388608, max: 16777215, integer: true, preset: null }),
    guardBits: number('fraction bits that counts carry behind the code', { unit: 'bits', min: 0, max: 20, integer: true, preset: 8 }),
  },
  overRange: {
    highCode: number('codes from here up are the rail; left out: the highest code', { unit: 'codes', min: -8388608, max: 16777215, integer: true, preset: null }),
    lowCode: number('codes from here down are the rail; left out: the lowest code', { unit: 'codes', min: -8388608, max: 16777215, integer: true, preset: null }),
    consecutive: number('codes in a row at a rail that trip it', { unit: 'samples', min: 1, max: 65535, integer: true, preset: 1 }),
    limit_A: number('current beyond which the sensor is over range; left out: no such limit', { unit: 'A', min: 0, aboveMin: true, max: 1e6, preset: null }),
    slew_A_per_ms: number('change beyond which the sensor is over range; left out: no such limit', { unit: 'A/ms', min: 0, aboveMin: true, max: 1e9, preset: null }),
    hold_ms: number('time that the analog side needs to recover', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: 1 }),
    stuckAfter_samples: number('identical codes in a row that mean a stuck converter; 0: not watched', { unit: 'samples', min: 0, max: 1e6, integer: true, preset: 0 }),
  },
  despike: {
    window_samples: number('window of the running median: 3 or 5', { unit: 'samples', min: 3, max: 5, integer: true, preset: 3 }),
    start,
  },
  demodulate: {
    bias: choice('what the bias does: polarity reversal, or a turn by quarters', ['reversal', 'quarter turn'], 'reversal'),
    blank_samples: number('samples left out after each switch', { unit: 'samples', min: 0, max: 65535, integer: true, preset: 4 }),
    longestPhase_samples: number('a phase longer than this means that the bias does not switch', { unit: 'samples', min: 1, max: 1e6, integer: true, preset: 4096 }),
  },
  decimate: {
    order: number('order of the integrator-comb; 1 is the boxcar', { unit: '', min: 1, max: 5, integer: true, preset: 2 }),
    ratio: number('samples in for one sample out', { unit: '', min: 2, max: 65536, integer: true }),
    start,
  },
  thermometer: {
    timeConstant_s: number('low-pass of the temperature; 0: none', { unit: 's', min: 0, max: 3600, preset: 0 }),
    hold_s: number('how long the last good temperature stands in for a broken thermometer', { unit: 's', min: 0, max: 3600, preset: 1 }),
    fallback_C: number('temperature assumed after that', { unit: '°C', min: -100, max: 300, preset: 25 }),
    lowest_C: number('colder codes mean a broken thermometer', { unit: '°C', min: -100, max: 300, preset: -40 }),
    highest_C: number('warmer codes mean a broken thermometer', { unit: '°C', min: -100, max: 300, preset: 125 }),
  },
  offsetTrim: {
    table: list('reading at zero current over temperature; its changes count, what stands at the calibration temperature is in the zero; left out: the nominal drift', group('one point', {
      at_C: number('temperature', { unit: '°C', min: -100, max: 300 }),
      offset_A: number('reading at zero current', { unit: 'A', min: -1e6, max: 1e6 }),
    }), { max: 16, optional: true }),
  },
  zero: {
    atStart: flag('take a zero at start-up', false),
    settle_ms: number('wait before that zero', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: 20 }),
    mean_ms: number('time over which a zero is averaged', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS, preset: 100 }),
    span_A: number('largest peak-to-peak during a zero; more is refused', { unit: 'A', min: 0, aboveMin: true, max: 1e6 }),
    window_A: number('largest distance of a zero from the factory zero; more is refused', { unit: 'A', min: 0, aboveMin: true, max: 1e6 }),
    onButton: flag('take a zero on the zero event', true),
    tracking: flag('follow slow drift', false),
    trackWindow_A: number('tracking only within this distance of the factory zero', { unit: 'A', min: 0, max: 1e6, preset: 0.1 }),
    trackHold_s: number('time within the window before tracking starts', { unit: 's', min: 0, max: 3600, preset: 2 }),
    trackRate_A_per_s: number('fastest tracking', { unit: 'A/s', min: 0, max: 1e6, preset: 0.001 }),
    trackAuthority_A: number('the most that tracking may remove', { unit: 'A', min: 0, max: 1e6, preset: 0.02 }),
    suspectAfterOverload: flag('an over-range makes the zero suspect until it is taken anew or the core degaussed', true),
  },
  gainTrim: {
    table: list('reading over truth at a temperature; its changes count, what stands at the calibration temperature is in the gain of the unit; left out: the nominal drift', group('one point', {
      at_C: number('temperature', { unit: '°C', min: -100, max: 300 }),
      gain: number('reading divided by true current', { unit: '', min: 0.5, max: 2 }),
    }), { max: 16, optional: true }),
  },
  linearise: {
    table: list('what the chain reads against what is true, ascending', group('one point', {
      reads_A: number('reading without this stage', { unit: 'A', min: -1e6, max: 1e6 }),
      is_A: number('true current', { unit: 'A', min: -1e6, max: 1e6 }),
    }), { min: 2, max: 64 }),
    segments_log2: number('most cells of the grid, as a power of two; left out: as few as keep every point of the table within half a code', { unit: '', min: 1, max: 8, integer: true, preset: null }),
    beyond: choice('beyond the ends: hold (from less than half a cell of the grid beyond them), or go on with the last slope', ['hold', 'slope'], 'slope'),
  },
  sections: {
    filter: choice('shape of the filter', ['low-pass', 'high-pass', 'notch'], 'low-pass'),
    corner_Hz: number('-3 dB corner; for a notch its centre', { unit: 'Hz', min: 0, aboveMin: true, max: 1e7 }),
    order: number('order of a low-pass or high-pass (Butterworth)', { unit: '', min: 1, max: 8, integer: true, preset: 2 }),
    width_Hz: number('-3 dB width of a notch', { unit: 'Hz', min: 0, aboveMin: true, max: 1e7, preset: null }),
    errorFeedback: number('order of the error feedback; left out: the one that leaves no dead band and the least dither at rest', { unit: '', min: 0, max: 2, integer: true, preset: null }),
    fractionBits: number('fraction bits of the coefficients; left out: as many as fit', { unit: 'bits', min: 8, max: 30, integer: true, preset: null }),
    start,
  },
  average: {
    length_ms: number('length of the running mean', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
    start,
  },
  scale: {
    unit: choice('unit of the reading; auto: µA when full scale fits with a factor of two to spare, mA otherwise', ['auto', 'µA', 'mA'], 'auto'),
  },
  meter: {
    name: text('name by which requirements call it', 'meter'),
    window_ms: number('length of a window, or time-out of a window of whole cycles', { unit: 'ms', min: 0, aboveMin: true, max: MAX_TIME_MS }),
    cycles: number('whole cycles in a window; 0: fixed windows', { unit: 'cycles', min: 0, max: 65535, integer: true, preset: 0 }),
    hysteresis_A: number('distance from the mean that a crossing must reach', { unit: 'A', min: 0, max: 1e6, preset: 0.1 }),
  },
  custom: {
    name: text('name of a stage of your own'),
    version: number('its version', { unit: '', min: 1, max: 65535, integer: true }),
    words: list('its constants', number('one constant', { unit: '', min: -2147483648, max: 2147483647, integer: true }), { max: 256, optional: true }),
    make: code('function (words, unit) that returns the stage; only in a probe file written in JavaScript'),
  },
}, {
  intake: 'raw codes to signed counts',
  overRange: 'over-range, rail and stuck-code watch on undisturbed samples; directly behind intake',
  despike: 'running median',
  demodulate: 'demodulation of a switched bias',
  decimate: 'integrator-comb decimator',
  thermometer: 'temperature code to temperature, for the trims behind it',
  offsetTrim: 'offset correction over temperature',
  zero: 'zero at start-up, on the button, and tracking',
  gainTrim: 'gain correction, with temperature',
  linearise: 'piecewise-linear correction',
  sections: 'second-order sections',
  average: 'running mean',
  scale: 'counts to µA or mA',
  meter: 'mean, RMS and peaks over windows; leaves the samples unchanged',
  custom: 'a stage of your own',
});
