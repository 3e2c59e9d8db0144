/**
 * The probe file that `hallproof new` writes: short, in datasheet units, and it holds. Everything left out has a
 * default that the verdict lists.
 */
const TEXT = `// A probe file: hardware from its datasheets, the firmware chain, and what must hold.
export default {
  name: 'My probe',
  range_A: 30,
  core: { gap_mm: 2, path_mm: 80, permeability: 2200 },
  sensor: { sensitivity_mV_per_mT: 50, rest_V: 2.5, restDrift_mV_per_K: 0.1, bandwidth_kHz: 20, noise_uT_per_rtHz: 0.3 },
  amplifier: { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 8 },
  converter: { bits: 12, rate_kHz: 40, reference_V: 5, noise_codes: 0.5 },
  chain: [ // in this order; every field is explained by: hallproof fields chain
    { stage: 'intake', guardBits: 8 },
    { stage: 'overRange', hold_ms: 1 },
    { stage: 'decimate', order: 2, ratio: 8 },
    { stage: 'zero', onButton: true, mean_ms: 20, span_A: 2, window_A: 0.5 },
    { stage: 'sections', filter: 'low-pass', corner_Hz: 400, order: 2 },
    { stage: 'scale' },
    { stage: 'meter', window_ms: 100 },
  ],
  scenarios: [
    { name: 'steady', current: { shape: 'dc', level_A: 10 }, duration_ms: 1000, judgeFrom_ms: 20 },
    { name: 'mains', current: { shape: 'sine', peak_A: 20, frequency_Hz: 50 }, duration_ms: 1000, judgeFrom_ms: 20 },
  ],
  requirements: [
    { measure: 'mean', scenario: 'steady', percentOfReading: 1, percentOfRange: 0.2 },
    { measure: 'noise', scenario: 'steady', limit_A: 0.1 },
    { measure: 'trueRms', scenario: 'mains', percentOfReading: 2, percentOfRange: 0.2 },
  ],
};
`;

export function starterText(): string {
  return TEXT;
}
