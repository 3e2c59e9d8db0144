/**
 * A second demo: the same depot stand, measured with a cheaper amplifier and a careless chain. It falls short, each time
 * for a reason that the verdict names:
 *   the amplifier clips the peaks of a chopped current ahead of the filter, so no code ever shows it;
 *   over-range is looked for at end codes that the amplifier cannot reach;
 *   tracking takes a small steady current for drift;
 *   an overload moves the zero and nothing says so;
 *   the sensor follows the supply and the A/D reference does not.
 * Stand, probe and numbers are invented for this project.
 */
export const BARGAIN_PROBE = {
  name: 'Bargain door drive probe',
  about: 'the depot stand with a cheaper amplifier and a careless chain: falls short, and says why',
  range_A: 30,
  supply_V: 5,
  core: {
    gap_mm: { nominal: 2, tolerance: 0.05 }, path_mm: 80, permeability: { nominal: 2200, tolerance: 400 },
    play: { coercivity_A_per_m: { nominal: 15, tolerance: 4 }, remanence_T: 0.12, saturation_T: 0.45 },
  },
  sensor: {
    sensitivity_mV_per_mT: { nominal: 50, tolerance: 1.5 }, rest_V: { nominal: 2.5, tolerance: 0.02 },
    ratiometric: true, bandwidth_kHz: 20, noise_uT_per_rtHz: 0.4, noiseCorner_Hz: 20,
  },
  amplifier: {
    gain: { nominal: 2, tolerance: 0.02 }, virtualGround_V: 2.5, offset_mV: { nominal: 0, tolerance: 3 },
    railLow_V: 1.1, railHigh_V: 3.9, gainBandwidth_MHz: 0.06, bandwidth_kHz: 2,
  },
  converter: { bits: 12, rate_kHz: 20, reference_V: { nominal: 5, tolerance: 0.02 }, noise_codes: 0.6 },
  calibration: { at_C: 23, span_A: 20, samples: 8192 },
  chain: [
    { stage: 'intake', guardBits: 8 },
    { stage: 'overRange', hold_ms: 1 },
    {
      stage: 'zero', onButton: true, mean_ms: 20, span_A: 2, window_A: 1,
      tracking: true, trackWindow_A: 0.8, trackHold_s: 1,
      trackRate_A_per_s: 0.1, trackAuthority_A: 0.6, suspectAfterOverload: false,
    },
    { stage: 'gainTrim' },
    { stage: 'sections', filter: 'low-pass', corner_Hz: 400, order: 2 },
    { stage: 'scale' },
    { stage: 'meter', name: 'fast', window_ms: 20 },
  ],
  scenarios: [
    {
      name: 'drive', about: 'a steady drive current: this much it can do', current: { shape: 'dc', level_A: 10 },
      duration_ms: 500, judgeFrom_ms: 50,
    },
    {
      name: 'chopped drive', about: 'peaks of 29 A that the amplifier cannot pass; behind the filter no code is near its end',
      current: { shape: 'pwm', low_A: 0, high_A: 29, frequency_Hz: 8000, duty_percent: 40, edge_us: 4 },
      duration_ms: 500, judgeFrom_ms: 100,
    },
    {
      name: 'lamp left on', about: 'a small steady current; ten minutes show nothing that ten seconds do not',
      current: { shape: 'step', from_A: 0, to_A: 0.4, at_ms: 100 }, duration_ms: 10_000, judgeFrom_ms: 8000,
    },
    {
      name: 'lamp left on for ten minutes', about: 'the same at its full length', long: true,
      current: { shape: 'step', from_A: 0, to_A: 0.4, at_ms: 100 }, duration_ms: 600_000, judgeFrom_ms: 590_000,
    },
    {
      name: 'short circuit', about: 'a pulse of ten times the range, then no current',
      current: { shape: 'pulse', base_A: 0, peak_A: 300, at_ms: 200, width_us: 20_000, edge_us: 200 },
      duration_ms: 800, judgeFrom_ms: 50, settle_ms: 40,
    },
    {
      name: 'tired battery', about: 'the supply is 4 % low', current: { shape: 'dc', level_A: 10 },
      duration_ms: 500, judgeFrom_ms: 50, supply_V: 4.8,
    },
  ],
  requirements: [
    { measure: 'swallowed', limit_A: 0.1 },
    { measure: 'mean', scenario: 'drive', meter: 'fast', percentOfReading: 1, percentOfRange: 0.5 },
    { measure: 'mean', scenario: 'chopped drive', meter: 'fast', percentOfReading: 1, percentOfRange: 0.5 },
    { measure: 'mean', scenario: 'lamp left on', meter: 'fast', percentOfReading: 1, percentOfRange: 0.5 },
    { measure: 'mean', scenario: 'lamp left on for ten minutes', meter: 'fast', percentOfReading: 1, percentOfRange: 0.5 },
    { measure: 'overRangeDelay', scenario: 'short circuit', limit_ms: 1 },
    { measure: 'zeroAfterOverload', scenario: 'short circuit', limit_A: 0.15 },
    { measure: 'mean', scenario: 'tired battery', meter: 'fast', percentOfReading: 1, percentOfRange: 0.5 },
  ],
};
