/** Fields of what a probe must hold. See fields.ts for how names end. */
import { number, text, variant } from './describe.ts';
import { MAX_TIME_MS } from './longest.ts';

const scenarioName = text('the scenario it is measured in');
const meterName = text('the meter it is read from', 'meter');
const allowance = {
  percentOfReading: number('allowed error, share of the true value', { unit: '%', min: 0, max: 1000, preset: 0 }),
  percentOfRange: number('allowed error, share of the nominal range', { unit: '%', min: 0, max: 1000, preset: 0 }),
  amperes: number('allowed error, fixed part', { unit: 'A', min: 0, max: 1e6, preset: 0 }),
};

export const requirement = variant('what the probe must hold', 'measure', {
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
