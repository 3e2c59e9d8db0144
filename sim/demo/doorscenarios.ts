/**
 * What else the demo probe of the depot stand has to stand: small currents, overloads with and without degaussing,
 * warm-up, turning over, ripple near the sample rate, short clips, steps, spikes from the cable, a falling supply; with
 * what must hold there. Times that a stand would count in minutes are shortened where nothing new happens in them.
 */
const OVERLOAD = { shape: 'pulse', base_A: 0, peak_A: 150, at_ms: 300, width_us: 20_000, edge_us: 200 };

export const DOOR_SCENARIOS = [
  {
    name: 'small steady current', about: 'a lamp of 0.25 A stays on; without tracking ten minutes are like ten seconds',
    current: { shape: 'step', from_A: 0, to_A: 0.25, at_ms: 100, edge_us: 200 }, duration_ms: 3000, judgeFrom_ms: 250,
  },
  {
    name: 'overload', about: 'a short circuit of five times the range, then no current', current: OVERLOAD,
    duration_ms: 900, judgeFrom_ms: 100, settle_ms: 60,
  },
  {
    name: 'overload, degaussed', about: 'the same, then a decaying current in the coil; the firmware is told',
    current: OVERLOAD, duration_ms: 1600, judgeFrom_ms: 100, settle_ms: 60,
    coil: { at_ms: 500, peak_A: 2, frequency_Hz: 100, decay_ms: 80 }, events: [{ at_ms: 1250, for_ms: 10, event: 'degaussed' }],
  },
  {
    name: 'warm-up', about: 'from the cold yard into the hall: sensor and thermometer follow at their own speeds',
    current: { shape: 'dc', level_A: 0 }, duration_ms: 10_000, judgeFrom_ms: 100,
    ambient: [{ at_ms: 500, temperature_C: 5 }, { at_ms: 1500, temperature_C: 25 }],
  },
  {
    name: 'turned over', about: 'the probe is put on the other way round in a static field of the stand',
    current: { shape: 'dc', level_A: 5 }, duration_ms: 900, judgeFrom_ms: 600, outerField_uT: 50,
    events: [{ at_ms: 400, for_ms: 500, event: 'polarity' }],
  },
  {
    name: 'ripple near the sample rate', about: 'inductor ripple of 39.9 kHz folds to 100 Hz',
    current: { shape: 'ripple', mean_A: 10, peakToPeak_A: 3, frequency_Hz: 39_900, duty_percent: 40 },
    duration_ms: 800, judgeFrom_ms: 150,
  },
  {
    name: 'short clips', about: 'contacts touch for one, two and three samples',
    current: {
      shape: 'sum', parts: [
        { shape: 'dc', level_A: 5 },
        { shape: 'pulse', peak_A: 55, at_ms: 200, width_us: 25, edge_us: 1 },
        { shape: 'pulse', peak_A: 55, at_ms: 300, width_us: 50, edge_us: 1 },
        { shape: 'pulse', peak_A: 55, at_ms: 400, width_us: 75, edge_us: 1 },
      ],
    },
    duration_ms: 600, judgeFrom_ms: 100,
  },
  {
    name: 'quarter step', about: 'a step of a quarter of the range',
    current: { shape: 'step', from_A: 0, to_A: 7.5, at_ms: 200, edge_us: 20 }, duration_ms: 500, judgeFrom_ms: 100,
  },
  {
    name: 'cable spikes', about: 'the conductor swings by 24 V in 40 ns at each edge of the PWM',
    current: { shape: 'pwm', low_A: 6, high_A: 14, frequency_Hz: 8000, duty_percent: 40, edge_us: 0.04, swing_V: 24 },
    duration_ms: 600, judgeFrom_ms: 150,
  },
  {
    name: 'falling supply', about: 'the battery of the stand gives way', current: { shape: 'dc', level_A: 10 },
    duration_ms: 2000, judgeFrom_ms: 100, supply_V: 5, supplySag_mV_per_s: 100,
  },
  {
    name: 'long rest', about: 'no current, for the Allan deviation', current: { shape: 'dc', level_A: 0 },
    duration_ms: 6000, judgeFrom_ms: 100,
  },
  {
    name: 'slow sine', about: 'for gain, phase, distortion and effective bits of the reading',
    current: { shape: 'sine', peak_A: 25, frequency_Hz: 5 }, duration_ms: 1600, judgeFrom_ms: 200,
  },
  {
    name: 'dimmed lamp', about: 'phase-cut mains', current: { shape: 'phaseCut', peak_A: 14, frequency_Hz: 50, firing_deg: 90, edge_us: 100 },
    duration_ms: 1600, judgeFrom_ms: 300,
  },
  {
    name: 'distorted mains', about: 'the rectifiers of the depot',
    current: { shape: 'harmonics', peak_A: 14, frequency_Hz: 50, percents: [0, 20, 0, 15, 0, 10] }, duration_ms: 1600, judgeFrom_ms: 300,
  },
  {
    name: 'small steady current for ten minutes', about: 'the lamp stays on while the probe wanders', long: true,
    current: { shape: 'step', from_A: 0, to_A: 0.25, at_ms: 100, edge_us: 200 }, duration_ms: 600_000, judgeFrom_ms: 250,
  },
];

export const DOOR_REQUIREMENTS = [
  { measure: 'reading', scenario: 'small steady current', amperes: 0.1 },
  { measure: 'zeroAfterOverload', scenario: 'overload', limit_A: 0.5 },
  { measure: 'overRangeDelay', scenario: 'overload', limit_ms: 1 },
  { measure: 'overRangeRecovery', scenario: 'overload', limit_ms: 60 },
  { measure: 'zeroAfterOverload', scenario: 'overload, degaussed', limit_A: 0.06 },
  { measure: 'reading', scenario: 'warm-up', amperes: 0.25 },
  { measure: 'reading', scenario: 'turned over', percentOfReading: 1, percentOfRange: 0.7 },
  { measure: 'mean', scenario: 'ripple near the sample rate', meter: 'fast', percentOfReading: 1, percentOfRange: 0.5 },
  { measure: 'reading', scenario: 'short clips', percentOfReading: 1, percentOfRange: 0.5 },
  { measure: 'transition', scenario: 'quarter step', limit_ms: 20 },
  { measure: 'overshoot', scenario: 'quarter step', limit_percent: 1 },
  { measure: 'mean', scenario: 'cable spikes', meter: 'fast', percentOfReading: 1, percentOfRange: 0.5 },
  { measure: 'reading', scenario: 'falling supply', percentOfReading: 1, percentOfRange: 0.5 },
  { measure: 'zeroOverTemperature', lowest_C: -10, highest_C: 40, limit_A: 0.1 },
  { measure: 'zeroOverTime', scenario: 'long rest', tau_s: 1, limit_A: 0.01 },
  { measure: 'gain', scenario: 'slow sine', limit_percent: 4 },
  { measure: 'phase', scenario: 'slow sine', limit_deg: 2 },
  { measure: 'sinad', scenario: 'slow sine', atLeast_dB: 45 },
  { measure: 'effectiveBits', scenario: 'slow sine', atLeast_bits: 7 },
  { measure: 'trueRms', scenario: 'dimmed lamp', meter: 'mains', percentOfReading: 3, percentOfRange: 0.3 },
  { measure: 'trueRms', scenario: 'distorted mains', meter: 'mains', percentOfReading: 1.5, percentOfRange: 0.5 },
  { measure: 'reading', scenario: 'small steady current for ten minutes', amperes: 0.1 },
  { measure: 'bandwidth', atLeast_Hz: 15, peak_A: 10 },
  {
    measure: 'band', meter: 'mains', from_Hz: 45, to_Hz: 65, points: 3, peak_A: 20, lowest_C: -10, highest_C: 40,
    percentOfReading: 1.5, percentOfRange: 0.3,
  },
];
