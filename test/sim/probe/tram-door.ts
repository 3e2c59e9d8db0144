/**
 * A valid probe for the tests of the probe file: a test stand for the drives of tram doors, ±30 A. All numbers are
 * invented. It has every kind of stage except `demodulate` and `custom`, every shape of current and every measure;
 * `switchedBias` is the same probe with those two stages. Each call gives a new object.
 */
export type Loose = Record<string, any>;

export function tramDoor(): Loose {
  return {
    name: 'door drive',
    range_A: 30,
    supply_V: { nominal: 5, tolerance: 0.1 },
    core: {
      gap_mm: { nominal: 2, tolerance: 0.05 },
      path_mm: 80,
      permeability: { nominal: 2000, tolerance: 500 },
      play: { coercivity_A_per_m: 15, remanence_T: 0.12, saturation_T: 0.45 },
      coilTurns: 20,
    },
    sensor: {
      sensitivity_mV_per_mT: { nominal: 50, tolerance: 2 },
      rest_V: 2.5,
      bandwidth_kHz: 120,
      noise_uT_per_rtHz: 0.1,
      noiseCorner_Hz: 10,
      count: 2,
      mismatch_percent: 3,
    },
    amplifier: { gain: 1.5, virtualGround_V: 2.5, bandwidth_kHz: 20, railLow_V: 0.05, railHigh_V: 4.95 },
    converter: { bits: 12, rate_kHz: 50, reference_V: { nominal: 5, tolerance: 0.02 } },
    thermometer: { element: 'thermistor' },
    calibration: { span_A: 25 },
    chain: chain(),
    scenarios: scenarios(),
    requirements: requirements(),
  };
}

function chain(): Loose[] {
  return [
    { stage: 'intake', midCode: 2048 },
    { stage: 'overRange', lowCode: 20, highCode: 4075, limit_A: 45 },
    { stage: 'despike' },
    { stage: 'decimate', ratio: 5 },
    { stage: 'thermometer', timeConstant_s: 1 },
    { stage: 'offsetTrim', table: [{ at_C: -20, offset_A: 0.2 }, { at_C: 25, offset_A: 0 }] },
    { stage: 'zero', span_A: 0.2, window_A: 0.5, tracking: true },
    { stage: 'gainTrim' },
    {
      stage: 'linearise',
      table: [{ reads_A: -30, is_A: -30.2 }, { reads_A: 0, is_A: 0 }, { reads_A: 30, is_A: 30.1 }],
    },
    { stage: 'sections', corner_Hz: 400 },
    { stage: 'sections', filter: 'notch', corner_Hz: 50, width_Hz: 4 },
    { stage: 'average', length_ms: 2 },
    { stage: 'scale' },
    { stage: 'meter', name: 'door', window_ms: 100 },
  ];
}

function scenarios(): Loose[] {
  return [
    {
      name: 'still',
      current: { shape: 'dc', level_A: 0 },
      duration_ms: 400,
      events: [{ at_ms: 50, event: 'zero button' }],
    },
    { name: 'stairs', current: { shape: 'staircase', levels_A: [-30, 0, 30], hold_ms: 100 }, duration_ms: 300 },
    { name: 'mains', current: { shape: 'sine', peak_A: 20, frequency_Hz: 50 }, duration_ms: 400, judgeFrom_ms: 100 },
    { name: 'chopper', current: { shape: 'pwm', high_A: 12, frequency_Hz: 18000, duty_percent: 40 }, duration_ms: 400 },
    { name: 'start', current: { shape: 'step', to_A: 15, at_ms: 20 }, duration_ms: 200, temperature_C: -20 },
    { name: 'ride', current: { shape: 'file', path: 'ride.csv' }, duration_ms: 2000, supply_V: 4.9 },
    {
      name: 'lamp',
      current: { shape: 'inrush', peak_A: 40, steady_A: 4, timeConstant_ms: 20, at_ms: 50, frequency_Hz: 50 },
      duration_ms: 400,
      ambient: [{ at_ms: 0, temperature_C: 20 }, { at_ms: 300, temperature_C: 25 }],
      supplySag_mV_per_s: 5,
      coil: { at_ms: 250, peak_A: 1, frequency_Hz: 80, decay_ms: 30 },
      events: [{ at_ms: 250, for_ms: 150, event: 'degaussed' }],
    },
    {
      name: 'jam',
      current: { shape: 'motor', stall_A: 45, run_A: 8, runUp_ms: 60, at_ms: 20, stallAt_ms: 300 },
      duration_ms: 400,
      events: [
        { at_ms: 200, for_ms: 50, event: 'polarity' },
        { at_ms: 380, for_ms: 20, event: 'jaw opened' },
        { at_ms: 370, event: 'jaw opened' },
      ],
    },
    {
      name: 'short',
      current: { shape: 'pulse', peak_A: 90, at_ms: 100, width_us: 5000, edge_us: 100 },
      duration_ms: 400,
      judgeFrom_ms: 20,
    },
    { name: 'climb', current: { shape: 'ramp', to_A: 60, at_ms: 20, rise_ms: 100 }, duration_ms: 400 },
    { name: 'tones', current: { shape: 'sweep', peak_A: 9, from_Hz: 1, to_Hz: 2000, over_ms: 300 }, duration_ms: 400 },
    {
      name: 'dimmer',
      current: { shape: 'phaseCut', peak_A: 20, frequency_Hz: 50, firing_deg: 90, edge_us: 20 },
      duration_ms: 400,
    },
    { name: 'choke', current: { shape: 'ripple', mean_A: 5, peakToPeak_A: 2, frequency_Hz: 20_000 }, duration_ms: 400 },
    {
      name: 'rectifier',
      current: { shape: 'harmonics', peak_A: 15, frequency_Hz: 50, percents: [0, 30, 0, 10], phases_deg: [0, 180] },
      duration_ms: 400,
    },
    {
      name: 'together',
      current: {
        shape: 'sum',
        parts: [
          { shape: 'pwm', high_A: 4, frequency_Hz: 18000, duty_percent: 40, swing_V: 24 },
          { shape: 'sine', peak_A: 5, frequency_Hz: 50 },
        ],
        times: -2,
      },
      duration_ms: 400,
    },
    { name: 'shut', current: { shape: 'step', to_A: -12, at_ms: 100 }, duration_ms: 400 },
    { name: 'hum', current: { shape: 'sine', peak_A: 20, frequency_Hz: 50 }, duration_ms: 400, judgeFrom_ms: 100 },
  ];
}

function requirements(): Loose[] {
  return [
    { measure: 'reading', scenario: 'stairs', percentOfReading: 1, percentOfRange: 0.2 },
    { measure: 'mean', scenario: 'chopper', meter: 'door', amperes: 0.1 },
    { measure: 'trueRms', scenario: 'mains', meter: 'door', percentOfReading: 2 },
    { measure: 'acRms', scenario: 'mains', meter: 'door', percentOfReading: 2 },
    { measure: 'noise', scenario: 'still', limit_A: 0.02 },
    { measure: 'settling', scenario: 'start', limit_ms: 50 },
    { measure: 'swallowed', limit_A: 0.6 },
    { measure: 'transition', scenario: 'shut', limit_ms: 5 },
    { measure: 'overshoot', scenario: 'shut', limit_percent: 8 },
    { measure: 'zeroAfterOverload', scenario: 'short', limit_A: 0.1 },
    { measure: 'zeroOverTime', scenario: 'still', tau_s: 0.1, limit_A: 0.01 },
    { measure: 'overRangeDelay', scenario: 'climb', limit_ms: 20 },
    { measure: 'overRangeRecovery', scenario: 'short', limit_ms: 20 },
    { measure: 'gain', scenario: 'hum', limit_percent: 2 },
    { measure: 'phase', scenario: 'hum', limit_deg: 2 },
    { measure: 'sinad', scenario: 'hum', atLeast_dB: 40 },
    { measure: 'effectiveBits', scenario: 'hum', atLeast_bits: 7 },
    { measure: 'band', meter: 'door', from_Hz: 0, to_Hz: 1000, peak_A: 20, lowest_C: -10, highest_C: 40, amperes: 1 },
    { measure: 'bandwidth', atLeast_Hz: 300, peak_A: 10 },
    { measure: 'zeroOverTemperature', lowest_C: -10, highest_C: 40, limit_A: 0.3 },
  ];
}

export function switchedBias(): Loose {
  const probe = tramDoor();
  probe.sensor.bias = 'quarter turn';
  probe.chain.splice(3, 0, { stage: 'demodulate', bias: 'quarter turn' });
  probe.chain.splice(-2, 0, { stage: 'custom', name: 'halve', version: 1, words: [1, -2], make: () => null });
  return probe;
}
