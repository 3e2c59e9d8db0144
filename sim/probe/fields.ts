/**
 * Every field of a probe file, described once. A name ends in its unit (`bandwidth_kHz`); a number without a unit in
 * its name is a pure number. `Probe` is the type of a file after validation, with every default filled in.
 */
import { choice, code, flag, group, list, number, text, variant, type Of } from './describe.ts';

const MAX_TIME_MS = 3_600_000;

const play = group('magnetic memory of the core: play operators in H behind one another and a saturating curve', {
  coercivity_A_per_m: number('coercivity of the material without gap, from saturation', { unit: 'A/m', min: 0, aboveMin: true, max: 10000, toleranced: true, preset: null }),
  remanence_T: number('remanence of the material without gap, from saturation', { unit: 'T', min: 0, aboveMin: true, max: 3, toleranced: true, preset: null }),
  saturation_T: number('flux density that the material cannot exceed', { unit: 'T', min: 0.01, max: 3, toleranced: true, preset: null }),
  loopFile: text('CSV file of a measured loop (A/m, T), beside the probe file, to which the model is fitted instead', ''),
}, 'absent');

const jilesAtherton = group('magnetic memory of the core: Jiles-Atherton, M = c Man + (1 - c) Mirr, dMirr/dH', {
  saturation_kA_per_m: number('saturation magnetisation Ms', { unit: 'kA/m', min: 0, aboveMin: true, max: 3000, toleranced: true }),
  shape_A_per_m: number('shape of the anhysteretic curve, a', { unit: 'A/m', min: 0, aboveMin: true, max: 100000, toleranced: true }),
  coupling: number('coupling between domains, alpha', { unit: '', min: 0, max: 0.1, toleranced: true }),
  pinning_A_per_m: number('pinning, k', { unit: 'A/m', min: 0, aboveMin: true, max: 100000, toleranced: true }),
  reversibility: number('reversible share, c', { unit: '', min: 0, max: 0.999, toleranced: true }),
}, 'absent');

const core = group('gapped magnetic core around the conductor', {
  gap_mm: number('length of the air gap that holds the sensor', { unit: 'mm', min: 0, aboveMin: true, max: 100, toleranced: true }),
  path_mm: number('length of the magnetic path inside the core', { unit: 'mm', min: 0, aboveMin: true, max: 2000, toleranced: true }),
  permeability: number('relative permeability of the core material', { unit: '', min: 1, max: 1e6, toleranced: true }),
  turns: number('how often the conductor passes through the core', { unit: '', min: 1, max: 1000, integer: true, preset: 1 }),
  play,
  jilesAtherton,
  eddy_kHz: number('corner of the lag by eddy currents (one pole); left out: no lag', { unit: 'kHz', min: 0, aboveMin: true, max: 1e5, toleranced: true, preset: null }),
  position_percent: number('change of sensitivity by where the conductor lies in the window', { unit: '%', min: -20, max: 20, toleranced: true, preset: 0 }),
  jointGap_um: number('gap at the joint of the jaw, beyond gap_mm; drawn anew within its tolerance at each closing', { unit: 'µm', min: 0, max: 10000, toleranced: true, preset: 0 }),
  openJaw_percent: number('sensitivity that is left while the jaw is open', { unit: '%', min: 0, max: 100, toleranced: true, preset: 2 }),
  concentration: number('field in the gap for each tesla of an outer field along the sensitive axis', { unit: '', min: -100, max: 100, toleranced: true, preset: 0 }),
  neighbour_ppm: number('sensitivity to a neighbour conductor, share of that to the own', { unit: 'ppm', min: -1e5, max: 1e5, toleranced: true, preset: 0 }),
  coilTurns: number('turns of a coil on the core for degaussing', { unit: '', min: 0, max: 10000, integer: true, preset: 0 }),
});

const sensor = group('linear Hall sensor in the gap', {
  sensitivity_mV_per_mT: number('output change per field at 25 °C and nominal supply', { unit: 'mV/mT', min: 0, aboveMin: true, max: 1e5, toleranced: true }),
  sensitivityDrift_ppm_per_K: number('change of sensitivity with temperature', { unit: 'ppm/K', min: -20000, max: 20000, toleranced: true, preset: 0 }),
  rest_V: number('output without field at 25 °C and nominal supply', { unit: 'V', min: 0, max: 100, toleranced: true }),
  restDrift_mV_per_K: number('change of the rest output with temperature', { unit: 'mV/K', min: -100, max: 100, toleranced: true, preset: 0 }),
  ratiometric: flag('rest output and sensitivity scale with the supply', false),
  swingLow_V: number('lowest output the sensor reaches', { unit: 'V', min: 0, max: 100, toleranced: true, preset: 0.2 }),
  swingHigh_V: number('highest output the sensor reaches', { unit: 'V', min: 0, aboveMin: true, max: 100, toleranced: true, preset: 4.8 }),
  bandwidth_kHz: number('-3 dB corner of the sensor (one pole)', { unit: 'kHz', min: 0, aboveMin: true, max: 1e5, toleranced: true }),
  noise_uT_per_rtHz: number('white noise density referred to the field', { unit: 'µT/√Hz', min: 0, max: 1000, toleranced: true, preset: 0 }),
  noiseCorner_Hz: number('frequency below which 1/f noise exceeds the white noise', { unit: 'Hz', min: 0, max: 1e6, toleranced: true, preset: 0 }),
  wander_uT_per_rth: number('slow random walk of the rest output, referred to the field', { unit: 'µT/√h', min: 0, max: 1e5, toleranced: true, preset: 0 }),
  nonlinearity_percent: number('third-order deviation at linearTo_mT, share of linearTo_mT', { unit: '%', min: -20, max: 20, toleranced: true, preset: 0 }),
  linearTo_mT: number('field at which nonlinearity_percent is given', { unit: 'mT', min: 0, aboveMin: true, max: 1e4, preset: 100 }),
  count: number('sensors in the gap whose outputs are averaged', { unit: '', min: 1, max: 16, integer: true, preset: 1 }),
  mismatch_percent: number('how far the sensitivity of each of several sensors may be off', { unit: '%', min: 0, max: 50, preset: 0 }),
  timeConstant_s: number('thermal time constant towards the ambient', { unit: 's', min: 0, max: 1e5, toleranced: true, preset: 0 }),
  bias: choice('how the bias of the Hall plate is switched, for a chain that demodulates', ['steady', 'reversal', 'quarter turn'], 'steady'),
  biasPhase_samples: number('A/D samples in one phase of a switched bias', { unit: 'samples', min: 2, max: 65536, integer: true, preset: 32 }),
  plateOffset_mT: number('offset of the plate itself, referred to the field; part of rest_V when the bias is steady', { unit: 'mT', min: -100, max: 100, toleranced: true, preset: 0 }),
});

const amplifier = group('amplifier between sensor and A/D converter, around a virtual ground', {
  gain: number('voltage gain', { unit: '', min: -1e4, max: 1e4, toleranced: true }),
  ground: choice('whether the virtual ground stays or is a share of the supply', ['fixed', 'supply'], 'fixed'),
  virtualGround_V: number('the voltage that the amplifier keeps in place, at nominal supply', { unit: 'V', min: 0, max: 100, toleranced: true }),
  offset_mV: number('input offset voltage', { unit: 'mV', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  offsetDrift_uV_per_K: number('change of the input offset with temperature', { unit: 'µV/K', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  gainBandwidth_MHz: number('gain-bandwidth product; left out: no limit', { unit: 'MHz', min: 0, aboveMin: true, max: 1e5, toleranced: true, preset: null }),
  slew_V_per_us: number('fastest change of the output; left out: no limit', { unit: 'V/µs', min: 0, aboveMin: true, max: 1e5, toleranced: true, preset: null }),
  recovery_us: number('time that the output stays at its rail after an overload', { unit: 'µs', min: 0, max: 1e6, toleranced: true, preset: 0 }),
  timeConstant_s: number('thermal time constant towards the ambient', { unit: 's', min: 0, max: 1e5, toleranced: true, preset: 0 }),
  railLow_V: number('lowest output', { unit: 'V', min: -100, max: 100, toleranced: true, preset: 0 }),
  railHigh_V: number('highest output', { unit: 'V', min: -100, max: 100, toleranced: true, preset: 5 }),
  bandwidth_kHz: number('-3 dB corner of the anti-alias filter', { unit: 'kHz', min: 0, aboveMin: true, max: 1e5, toleranced: true }),
  filterOrder: number('order of the anti-alias filter: 1 is an RC, more is Butterworth', { unit: '', min: 1, max: 4, integer: true, preset: 1 }),
});

const converter = group('A/D converter', {
  bits: number('resolution', { unit: 'bits', min: 6, max: 24, integer: true }),
  rate_kHz: number('samples a second', { unit: 'kHz', min: 0.001, max: 10000 }),
  reference: choice('what sets its full scale', ['fixed', 'supply'], 'fixed'),
  reference_V: number('full scale at nominal supply', { unit: 'V', min: 0.1, max: 100, toleranced: true }),
  format: choice('how a code is written', ['offset binary', "two's complement"], 'offset binary'),
  justified: choice('where the code stands in its word', ['right', 'left'], 'right'),
  word_bits: number('width of the word that holds a code', { unit: 'bits', min: 8, max: 32, integer: true, preset: 16 }),
  noise_codes: number('noise of the converter, standard deviation', { unit: 'codes', min: 0, max: 1000, toleranced: true, preset: 0 }),
  referenceDrift_ppm_per_K: number('change of a fixed reference with temperature', { unit: 'ppm/K', min: -10000, max: 10000, toleranced: true, preset: 0 }),
  offset_codes: number('offset error', { unit: 'codes', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  gainError_percent: number('gain error', { unit: '%', min: -10, max: 10, toleranced: true, preset: 0 }),
  inl_codes: number('integral nonlinearity: height of a bow that is zero at both ends', { unit: 'codes', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  dnl_codes: number('differential nonlinearity: standard deviation of the code widths, the same for a unit for ever', { unit: 'codes', min: 0, max: 0.5, preset: 0 }),
  jitter_ns: number('jitter of the sampling instant, standard deviation', { unit: 'ns', min: 0, max: 1e6, preset: 0 }),
});

const thermometer = group('thermometer beside the sensor, read by the firmware', {
  element: choice('what senses the temperature', ['thermistor', 'platinum', 'linear'], 'thermistor'),
  resistance_ohm: number('resistance at 25 °C of a thermistor, at 0 °C of a platinum element', { unit: 'Ω', min: 1, max: 1e7, toleranced: true, preset: 10000 }),
  beta_K: number('beta of a thermistor', { unit: 'K', min: 1000, max: 10000, toleranced: true, preset: 3435 }),
  series_ohm: number('resistor from the reference to the element', { unit: 'Ω', min: 1, max: 1e7, toleranced: true, preset: 10000 }),
  slope_mV_per_K: number('slope of a linear element', { unit: 'mV/K', min: -1000, max: 1000, toleranced: true, preset: 10 }),
  at25_V: number('output of a linear element at 25 °C', { unit: 'V', min: 0, max: 100, toleranced: true, preset: 0.75 }),
  reference_V: number('full scale of its converter', { unit: 'V', min: 0.1, max: 100, toleranced: true, preset: 3.3 }),
  bits: number('resolution of its converter', { unit: 'bits', min: 6, max: 24, integer: true, preset: 12 }),
  timeConstant_s: number('thermal time constant towards the ambient', { unit: 's', min: 0, max: 1e5, toleranced: true, preset: 0 }),
  every_ms: number('time between two temperature codes', { unit: 'ms', min: 0.01, max: 60000, preset: 100 }),
}, 'absent');

const coupling = group('what reaches the sensor leads beside the Hall voltage', {
  loop_mm2: number('area between the leads that the field in the gap crosses', { unit: 'mm²', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  slew_mV_per_V_per_ns: number('voltage in the leads for a conductor voltage that changes by a volt a nanosecond', { unit: 'mV per V/ns', min: -1000, max: 1000, toleranced: true, preset: 0 }),
}, 'absent');

/** Beside the probe, on the same currents; a shunt is in the circuit, so jaw, turning over and supply leave it alone. */
const shunt = group('shunt in series with the conductor, to weigh against the probe', {
  resistance_mOhm: number('resistance at 25 °C', { unit: 'mΩ', min: 0, aboveMin: true, max: 1e6, toleranced: true }),
  tempco_ppm_per_K: number('change of the resistance with its temperature', { unit: 'ppm/K', min: -1000, max: 10000, toleranced: true, preset: 0 }),
  thermalResistance_K_per_W: number('self-heating for each watt in it', { unit: 'K/W', min: 0, max: 10000, toleranced: true, preset: 0 }),
  timeConstant_s: number('thermal time constant towards the ambient', { unit: 's', min: 0, max: 1e5, toleranced: true, preset: 0 }),
  gain: number('voltage gain of its amplifier', { unit: '', min: -1e5, max: 1e5, toleranced: true }),
  rest_V: number('output of its amplifier without current', { unit: 'V', min: -100, max: 100, toleranced: true, preset: 2.5 }),
  offset_mV: number('input offset voltage of its amplifier', { unit: 'mV', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  offsetDrift_uV_per_K: number('change of the input offset with temperature', { unit: 'µV/K', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  noise_nV_per_rtHz: number('white noise density at the input of its amplifier', { unit: 'nV/√Hz', min: 0, max: 1e6, toleranced: true, preset: 0 }),
  bandwidth_kHz: number('-3 dB corner of its amplifier (one pole)', { unit: 'kHz', min: 0, aboveMin: true, max: 1e5, toleranced: true }),
  railLow_V: number('lowest output, and the lower end of an ideal converter of converter.bits', { unit: 'V', min: -100, max: 100, toleranced: true, preset: 0 }),
  railHigh_V: number('highest output, and the upper end of that converter', { unit: 'V', min: -100, max: 100, toleranced: true, preset: 5 }),
}, 'absent');

const transformer = group('current transformer around the conductor, to weigh against the probe', {
  turns: number('turns of its winding; the conductor is one turn', { unit: '', min: 1, max: 100000, integer: true }),
  burden_ohm: number('burden resistor', { unit: 'Ω', min: 0, aboveMin: true, max: 1e6, toleranced: true }),
  winding_ohm: number('resistance of the winding', { unit: 'Ω', min: 0, max: 1e6, toleranced: true, preset: 0 }),
  magnetising_mH: number('magnetising inductance of the winding', { unit: 'mH', min: 0, aboveMin: true, max: 1e9, toleranced: true }),
  saturation_V_ms: number('volt-seconds in the winding at which the core saturates; left out: never', { unit: 'V·ms', min: 0, aboveMin: true, max: 1e9, toleranced: true, preset: null }),
  saturatedShare_percent: number('magnetising inductance that is left beyond that', { unit: '%', min: 0, aboveMin: true, max: 100, toleranced: true, preset: 1 }),
  bandwidth_kHz: number('-3 dB corner by leakage and winding capacitance (one pole)', { unit: 'kHz', min: 0, aboveMin: true, max: 1e5, toleranced: true }),
}, 'absent');

const start = choice('state at the first sample: as if that sample had always been there, or all zero', ['primed', 'zero'], 'primed');

const stage = variant('one stage of the chain, in engineering units', 'stage', {
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

const currentLevel = (meaning: string) => number(meaning, { unit: 'A', min: -1e6, max: 1e6 });
const currentLevelOr = (meaning: string, preset: number) => number(meaning, { unit: 'A', min: -1e6, max: 1e6, preset });
const frequency = number('frequency', { unit: 'Hz', min: 0, aboveMin: true, max: 1e7 });
const edge = number('duration of an edge from level to level', { unit: 'µs', min: 0, max: 1e9, preset: 1 });

const atMs = (meaning: string) => number(meaning, { unit: 'ms', min: 0, max: MAX_TIME_MS });

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

const current = variant('the current in the conductor', 'shape', {
  ...simpleCurrents,
  sum: {
    parts: list('the parts', part, { min: 1, max: 20 }),
    times: number('factor on the sum', { unit: '', min: -1e6, max: 1e6, preset: 1 }),
  },
}, { ...currentMeanings, sum: 'parts added, and scaled' });

/** jaw opened: for that long, then closed; polarity: for that long the probe is around the conductor the other way. */
const event = group('something that happens during a scenario', {
  at_ms: number('when it begins', { unit: 'ms', min: 0, max: MAX_TIME_MS }),
  for_ms: number('how long it lasts', { unit: 'ms', min: 0, max: MAX_TIME_MS, preset: 10 }),
  event: choice('what', ['zero button', 'sticky clear', 'degaussed', 'power cycle', 'jaw opened', 'polarity']),
});

const scenario = group('one run of the probe', {
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

const scenarioName = text('the scenario it is measured in');
const meterName = text('the meter it is read from', 'meter');
const allowance = {
  percentOfReading: number('allowed error, share of the true value', { unit: '%', min: 0, max: 1000, preset: 0 }),
  percentOfRange: number('allowed error, share of the nominal range', { unit: '%', min: 0, max: 1000, preset: 0 }),
  amperes: number('allowed error, fixed part', { unit: 'A', min: 0, max: 1e6, preset: 0 }),
};

const requirement = variant('what the probe must hold', 'measure', {
  reading: { scenario: scenarioName, ...allowance },
  mean: { scenario: scenarioName, meter: meterName, ...allowance },
  trueRms: { scenario: scenarioName, meter: meterName, ...allowance },
  acRms: { scenario: scenarioName, meter: meterName, ...allowance },
  noise: { scenario: scenarioName, limit_A: number('allowed standard deviation of the reading at a steady current', { unit: 'A', min: 0, max: 1e6 }) },
  settling: {
    scenario: scenarioName,
    band_percent: number('settled within this share of the step', { unit: '%', min: 0, aboveMin: true, max: 100, preset: 1 }),
    limit_ms: number('allowed time from the middle of the step', { unit: 'ms', min: 0, max: MAX_TIME_MS }),
  },
  band: {
    meter: meterName,
    from_Hz: number('lower end of the band; 0: direct current', { unit: 'Hz', min: 0, max: 1e7 }),
    to_Hz: number('upper end of the band', { unit: 'Hz', min: 0, max: 1e7 }),
    points: number('frequencies tried, evenly in octaves', { unit: '', min: 1, max: 100, integer: true, preset: 5 }),
    peak_A: number('amplitude, or direct current', { unit: 'A', min: 0, aboveMin: true, max: 1e6 }),
    lowest_C: number('coldest temperature tried', { unit: '°C', min: -100, max: 200, preset: 25 }),
    highest_C: number('warmest temperature tried', { unit: '°C', min: -100, max: 200, preset: 25 }),
    ...allowance,
  },
  bandwidth: {
    atLeast_Hz: number('-3 dB bandwidth of hardware and chain together that must be reached', { unit: 'Hz', min: 0, aboveMin: true, max: 1e7 }),
    peak_A: number('amplitude', { unit: 'A', min: 0, aboveMin: true, max: 1e6 }),
  },
  transition: { scenario: scenarioName, limit_ms: number('allowed transition duration, 10 % to 90 % (IEC 60469)', { unit: 'ms', min: 0, max: MAX_TIME_MS }) },
  overshoot: { scenario: scenarioName, limit_percent: number('allowed overshoot, share of the step (IEC 60469)', { unit: '%', min: 0, max: 1000 }) },
  zeroOverTemperature: {
    lowest_C: number('coldest temperature tried', { unit: '°C', min: -100, max: 200 }),
    highest_C: number('warmest temperature tried', { unit: '°C', min: -100, max: 200 }),
    limit_A: number('allowed reading at zero current', { unit: 'A', min: 0, max: 1e6 }),
  },
  zeroAfterOverload: { scenario: scenarioName, limit_A: number('allowed change of the zero by the pulse', { unit: 'A', min: 0, max: 1e6 }) },
  zeroOverTime: {
    scenario: scenarioName,
    tau_s: number('averaging time of the Allan deviation', { unit: 's', min: 0, aboveMin: true, max: 3600 }),
    limit_A: number('allowed Allan deviation', { unit: 'A', min: 0, max: 1e6 }),
  },
  overRangeDelay: { scenario: scenarioName, limit_ms: number('allowed time from the current leaving the range to the first flagged reading', { unit: 'ms', min: 0, max: MAX_TIME_MS }) },
  overRangeRecovery: { scenario: scenarioName, limit_ms: number('allowed time from the current being back in the range to the first good reading', { unit: 'ms', min: 0, max: MAX_TIME_MS }) },
  gain: { scenario: scenarioName, limit_percent: number('allowed gain error at the frequency of the sine', { unit: '%', min: 0, max: 100 }) },
  phase: { scenario: scenarioName, limit_deg: number('allowed phase error beyond the stated delay', { unit: '°', min: 0, max: 180 }) },
  sinad: { scenario: scenarioName, atLeast_dB: number('signal to noise and distortion that must be reached', { unit: 'dB', min: 0, max: 200 }) },
  effectiveBits: { scenario: scenarioName, atLeast_bits: number('effective bits that must be reached, of twice the range', { unit: 'bits', min: 0, max: 32 }) },
  swallowed: { limit_A: number('largest direct current that all automatic zeroing together may remove', { unit: 'A', min: 0, max: 1e6 }) },
}, {
  reading: 'every unflagged reading against the true current, delayed as the chain states',
  mean: 'mean of each meter window against the mean of the true current',
  trueRms: 'true RMS of each meter window against that of the true current',
  acRms: 'AC RMS of each meter window against that of the true current',
  noise: 'standard deviation of the reading',
  settling: 'time after a step until the reading stays within a band around its end value',
  band: 'true RMS (mean at direct current) of a meter at the worst frequency of a band and the worst of its temperatures',
  bandwidth: '-3 dB bandwidth, by sines',
  transition: 'transition duration of a step',
  overshoot: 'overshoot of a step',
  zeroOverTemperature: 'reading at zero current at the worst of the temperatures',
  zeroAfterOverload: 'change of the zero by a pulse of current',
  zeroOverTime: 'Allan deviation of the reading at a steady current',
  overRangeDelay: 'time until an over-range is told',
  overRangeRecovery: 'time until readings are good again after an over-range',
  gain: 'gain at the frequency of a sine, by four-parameter fit (IEEE 1057)',
  phase: 'phase at the frequency of a sine, by four-parameter fit (IEEE 1057)',
  sinad: 'signal to noise and distortion, by four-parameter fit (IEEE 1057)',
  effectiveBits: 'effective bits, by four-parameter fit (IEEE 1057)',
  swallowed: 'direct current that zeroing may remove, from the constants',
});

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
