/**
 * The demo probe: it measures the current of door drives on the test stand of a tram depot, ±30 A, 24 V drives with
 * pulse-width modulation, -10 to 40 °C. Stand, probe and numbers are invented for this project.
 */
import { DOOR_REQUIREMENTS, DOOR_SCENARIOS } from './doorscenarios.ts';

export const DOOR_STAND = {
  name: 'Door drive probe',
  about: 'test stand for the door drives of a tram depot: 24 V drives with PWM, inrush and stall, -10 to 40 °C',
  range_A: 30,
  supply_V: { nominal: 5, tolerance: 0.05 },
  core: {
    gap_mm: { nominal: 2, tolerance: 0.05 }, path_mm: 80, permeability: { nominal: 2200, tolerance: 400 },
    play: { coercivity_A_per_m: { nominal: 6, tolerance: 1.5 }, remanence_T: 0.06, saturation_T: 0.45 },
    position_percent: { nominal: 0, tolerance: 0.1 }, concentration: 0.6, coilTurns: 100,
  },
  sensor: {
    sensitivity_mV_per_mT: { nominal: 50, tolerance: 1.5 }, sensitivityDrift_ppm_per_K: { nominal: 350, tolerance: 60 },
    rest_V: { nominal: 2.5, tolerance: 0.02 }, restDrift_mV_per_K: { nominal: 0.12, tolerance: 0.04 },
    bandwidth_kHz: { nominal: 20, tolerance: 2 }, noise_uT_per_rtHz: 0.3, noiseCorner_Hz: 20, wander_uT_per_rth: 5,
    timeConstant_s: 2,
  },
  coupling: { loop_mm2: 2, slew_mV_per_V_per_ns: 0.5 },
  amplifier: {
    gain: { nominal: 2, tolerance: 0.01 }, virtualGround_V: 2.5, offset_mV: { nominal: 0, tolerance: 1 },
    offsetDrift_uV_per_K: { nominal: 0, tolerance: 2 }, slew_V_per_us: 0.5, recovery_us: 2, timeConstant_s: 5,
    railLow_V: 0.05, railHigh_V: 4.95, bandwidth_kHz: { nominal: 8, tolerance: 0.4 },
  },
  converter: { bits: 12, rate_kHz: 40, reference: 'fixed', reference_V: { nominal: 5, tolerance: 0.02 }, noise_codes: 0.6 },
  thermometer: { element: 'thermistor', resistance_ohm: { nominal: 10000, tolerance: 100 }, beta_K: { nominal: 3435, tolerance: 20 }, timeConstant_s: 3 },
  calibration: { at_C: 23, span_A: 25, samples: 8192 },
  chain: [
    { stage: 'intake', guardBits: 8 },
    // inside the rails of the amplifier; a change by 12.5 A from sample to sample is no drive
    { stage: 'overRange', highCode: 4000, lowCode: 95, slew_A_per_ms: 500, hold_ms: 1, stuckAfter_samples: 64 },
    { stage: 'decimate', order: 2, ratio: 8 },
    { stage: 'thermometer', timeConstant_s: 2 },
    { stage: 'offsetTrim' },
    { stage: 'zero', atStart: true, settle_ms: 5, mean_ms: 20, span_A: 2, window_A: 0.4, onButton: true },
    { stage: 'gainTrim' },
    { stage: 'sections', filter: 'low-pass', corner_Hz: 400, order: 2 },
    { stage: 'scale', unit: 'auto' },
    { stage: 'meter', name: 'fast', window_ms: 20 },
    { stage: 'meter', name: 'mains', window_ms: 400, cycles: 10, hysteresis_A: 1 },
    { stage: 'average', length_ms: 20 },
  ],
  scenarios: [
    {
      name: 'rest', about: 'no current, after the zero at start-up', current: { shape: 'dc', level_A: 0 },
      duration_ms: 1500, judgeFrom_ms: 100, temperature_C: 25,
    },
    {
      name: 'staircase', about: 'both directions, up to the range',
      current: { shape: 'staircase', levels_A: [0, 2, 10, 20, 30, 0, -2, -10, -20, -30], hold_ms: 200 },
      duration_ms: 2000, judgeFrom_ms: 100, settle_ms: 60, temperature_C: 25,
    },
    {
      name: 'cold drive', about: 'a steady drive current in the cold',
      current: { shape: 'step', from_A: 0, to_A: 20, at_ms: 100 }, duration_ms: 800, judgeFrom_ms: 250, temperature_C: -10,
    },
    {
      name: 'warm drive', about: 'a steady drive current in the heat',
      current: { shape: 'step', from_A: 0, to_A: 20, at_ms: 100 }, duration_ms: 800, judgeFrom_ms: 250, temperature_C: 40,
    },
    {
      name: 'door cycle', about: 'the motor is switched on',
      current: { shape: 'step', from_A: 0, to_A: 12, at_ms: 100, edge_us: 200 }, duration_ms: 400, judgeFrom_ms: 60,
    },
    {
      name: 'PWM drive', about: 'motor current chopped at 8 kHz',
      current: { shape: 'pwm', low_A: 6, high_A: 14, frequency_Hz: 8000, duty_percent: 40, edge_us: 5 },
      duration_ms: 1200, judgeFrom_ms: 150,
    },
    {
      name: 'mains heater', about: '50 Hz through the stand', current: { shape: 'sine', peak_A: 14.142, frequency_Hz: 50 },
      duration_ms: 1600, judgeFrom_ms: 300,
    },
    {
      name: 'stall', about: 'a stalled motor drives the probe beyond its range, then lets go',
      current: { shape: 'step', from_A: 60, to_A: 5, at_ms: 200, edge_us: 100 }, duration_ms: 600, judgeFrom_ms: 300,
    },
    ...DOOR_SCENARIOS,
  ],
  requirements: [
    { measure: 'noise', scenario: 'rest', limit_A: 0.01 },
    { measure: 'reading', scenario: 'rest', amperes: 0.06 },
    { measure: 'mean', scenario: 'staircase', meter: 'fast', percentOfReading: 1, percentOfRange: 0.3 },
    { measure: 'reading', scenario: 'cold drive', percentOfReading: 1, percentOfRange: 0.5 },
    { measure: 'reading', scenario: 'warm drive', percentOfReading: 1, percentOfRange: 0.5 },
    { measure: 'settling', scenario: 'door cycle', band_percent: 1, limit_ms: 30 },
    { measure: 'mean', scenario: 'PWM drive', meter: 'fast', percentOfReading: 1, percentOfRange: 0.3 },
    { measure: 'trueRms', scenario: 'mains heater', meter: 'mains', percentOfReading: 1.5, percentOfRange: 0.3 },
    { measure: 'reading', scenario: 'stall', percentOfReading: 1, percentOfRange: 0.5 },
    { measure: 'swallowed', limit_A: 0.5 },
    ...DOOR_REQUIREMENTS,
  ],
};
