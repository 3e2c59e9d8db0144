import { describe, expect, test } from 'vitest';
import { quietProbe, type Given } from '../probes.ts';
import { rowOf } from './proving.ts';

/**
 * Closed forms of waveforms (R. W. Erickson, D. Maksimovic, Fundamentals of Power Electronics, appendix A: RMS of
 * segments and their sums), the true values computed here from the formulas, not taken from the bench.
 */
const cut = (degrees: number): number => {
  const angle = (degrees * Math.PI) / 180;
  return Math.sqrt((Math.PI - angle + Math.sin(2 * angle) / 2) / (2 * Math.PI));
};

const CASES: [string, Given, number][] = [
  ['sine', { shape: 'sine', peak_A: 10, frequency_Hz: 50 }, 10 / Math.SQRT2],
  ['direct current and sine', { shape: 'sine', peak_A: 10, frequency_Hz: 50, offset_A: 3 }, 7.681145747868608],
  ['PWM of duty 0.1', { shape: 'pwm', high_A: 10, frequency_Hz: 50, duty_percent: 10, edge_us: 0 }, 3.16227766017],
  ['PWM of duty 0.8', { shape: 'pwm', high_A: 10, frequency_Hz: 50, duty_percent: 80, edge_us: 0 }, 8.94427191],
  ['triangle ripple on direct current', { shape: 'ripple', mean_A: 10, peakToPeak_A: 4, frequency_Hz: 50 }, 10.066445913694333],
  ['deep triangle ripple', { shape: 'ripple', mean_A: 10, peakToPeak_A: 20, frequency_Hz: 50, duty_percent: 30 }, 11.547005383792516],
  ['phase-cut mains at 30 degrees', { shape: 'phaseCut', peak_A: 10, frequency_Hz: 50, firing_deg: 30, edge_us: 0 }, 10 * cut(30)],
  ['phase-cut mains at 90 degrees', { shape: 'phaseCut', peak_A: 10, frequency_Hz: 50, firing_deg: 90, edge_us: 0 }, 5],
  ['phase-cut mains at 135 degrees', { shape: 'phaseCut', peak_A: 10, frequency_Hz: 50, firing_deg: 135, edge_us: 0 }, 2.13125616607],
  // amplitudes of the example of IEEE Std 1459-2010: RMS of the current is 1.0356157588603989 of its fundamental
  ['distorted mains', { shape: 'harmonics', peak_A: 10, frequency_Hz: 50, percents: [0, 20, 0, 15, 0, 10] }, 7.071067811865475 * 1.0356157588603989],
  ['two sines', {
    shape: 'sum', parts: [{ shape: 'sine', peak_A: 10, frequency_Hz: 50 }, { shape: 'sine', peak_A: 4, frequency_Hz: 150 }],
  }, 7.615773105863909],
];

describe('true RMS through hardware, chain and meter', () => {
  test.each(CASES)('of %s', (_, current, rms) => {
    const given = quietProbe({
      chain: [{ stage: 'intake', guardBits: 4 }, { stage: 'scale' }, { stage: 'meter', window_ms: 100 }],
      scenarios: [{ name: 'way', current, duration_ms: 450, judgeFrom_ms: 20 }],
      requirements: [{ measure: 'trueRms', scenario: 'way', amperes: 1 }],
    });
    const row = rowOf(given, 'trueRms@way');
    const truth = Number(/true ([\d.]+) A/.exec(row.where)![1]);
    // Five whole periods of 800 samples. Samples tell the width of a pulse of 10 A to one of them: 100 A^2 / 800 in the
    // mean square, by 1 / (2 rms) in the RMS. The row prints the true value with four digits.
    expect(Math.abs(truth + row.value! - rms)).toBeLessThan(0.125 / (2 * rms) + 0.006);
    expect(row.share).toBeLessThan(1);
  });

  test('a window shorter than a period is refused, also for one part of a sum', () => {
    const requirements = [{ measure: 'trueRms', scenario: 'way', amperes: 1 }];
    const parts = [{ shape: 'dc', level_A: 2 }, { shape: 'sine', peak_A: 10, frequency_Hz: 50 }];
    for (const current of [parts[1], { shape: 'sum', parts }]) {
      const row = rowOf(quietProbe({
        chain: [{ stage: 'intake', guardBits: 4 }, { stage: 'scale' }, { stage: 'meter', window_ms: 19 }],
        scenarios: [{ name: 'way', current, duration_ms: 450 }], requirements,
      }), 'trueRms@way');
      expect(row).toMatchObject({ value: null, holds: false });
      expect(row.because).toContain('(19.00 ms) is shorter than a period of the current of "way" (20.00 ms)');
    }
  });
});
