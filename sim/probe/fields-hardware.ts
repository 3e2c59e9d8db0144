/**
 * Fields of the hardware: core, sensor, its leads, amplifier, converter, thermometer, and the front ends to weigh against
 * them. See fields.ts for how names end.
 */
import { choice, flag, group, number, text } from './describe.ts';

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

export const core = group('gapped magnetic core around the conductor', {
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

export const sensor = group('linear Hall sensor in the gap', {
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

export const amplifier = group('amplifier between sensor and A/D converter, around a virtual ground', {
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

export const converter = group('A/D converter', {
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

export const thermometer = group('thermometer beside the sensor, read by the firmware', {
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

export const coupling = group('what reaches the sensor leads beside the Hall voltage', {
  loop_mm2: number('area between the leads that the field in the gap crosses', { unit: 'mm²', min: -1000, max: 1000, toleranced: true, preset: 0 }),
  slew_mV_per_V_per_ns: number('voltage in the leads for a conductor voltage that changes by a volt a nanosecond', { unit: 'mV per V/ns', min: -1000, max: 1000, toleranced: true, preset: 0 }),
}, 'absent');

/** Beside the probe, on the same currents; a shunt is in the circuit, so jaw, turning over and supply leave it alone. */
export const shunt = group('shunt in series with the conductor, to weigh against the probe', {
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

export const transformer = group('current transformer around the conductor, to weigh against the probe', {
  turns: number('turns of its winding; the conductor is one turn', { unit: '', min: 1, max: 100000, integer: true }),
  burden_ohm: number('burden resistor', { unit: 'Ω', min: 0, aboveMin: true, max: 1e6, toleranced: true }),
  winding_ohm: number('resistance of the winding', { unit: 'Ω', min: 0, max: 1e6, toleranced: true, preset: 0 }),
  magnetising_mH: number('magnetising inductance of the winding', { unit: 'mH', min: 0, aboveMin: true, max: 1e9, toleranced: true }),
  saturation_V_ms: number('volt-seconds in the winding at which the core saturates; left out: never', { unit: 'V·ms', min: 0, aboveMin: true, max: 1e9, toleranced: true, preset: null }),
  saturatedShare_percent: number('magnetising inductance that is left beyond that', { unit: '%', min: 0, aboveMin: true, max: 100, toleranced: true, preset: 1 }),
  bandwidth_kHz: number('-3 dB corner by leakage and winding capacitance (one pole)', { unit: 'kHz', min: 0, aboveMin: true, max: 1e5, toleranced: true }),
}, 'absent');
