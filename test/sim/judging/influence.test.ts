import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { StageConstants } from '../../../lib/index.ts';
import { Influence } from '../../../sim/judging/influence.ts';
import { tune } from '../../../sim/tuning/tune.ts';
import { probeOf, quietProbe, type Given } from '../probes.ts';
import { rowOf, verdictOf } from './proving.ts';

const INTAKE = { stage: 'intake', guardBits: 4 };
const SCALE = { stage: 'scale' };

function influenceOf(chain: Given[], change: Given = {}): { influence: Influence; design: readonly StageConstants[] } {
  const probe = probeOf(quietProbe({ chain, ...change }));
  const { constants, ratios } = tune(probe);
  return { influence: new Influence(constants.design, ratios, probe.sensor.biasPhase_samples), design: constants.design };
}

const flags = fc.array(fc.boolean(), { minLength: 1, maxLength: 400 });

describe('a clipped sample has a part in', () => {
  test('every reading whose filters still hold it: decimator and mean behind one another', () => {
    const { influence } = influenceOf([INTAKE, { stage: 'decimate', order: 2, ratio: 4 }, { stage: 'average', length_ms: 0.5 }, SCALE]);
    fc.assert(fc.property(flags, (clipped) => {
      influence.forget();
      clipped.forEach((now, at) => {
        // order 2 of ratio 4 holds 2 * 3 older samples; a mean of 5 at a quarter of the rate 4 * 4 more
        const from = Math.max(0, at - 22);
        expect(influence.hear(at, now)).toBe(clipped.slice(from, at + 1).some(Boolean));
      });
    }));
  });

  test('nothing while a running median has a majority of good samples', () => {
    const { influence } = influenceOf([INTAKE, { stage: 'despike', window_samples: 5 }, SCALE]);
    fc.assert(fc.property(flags, (clipped) => {
      influence.forget();
      clipped.forEach((now, at) => {
        const held = clipped.slice(Math.max(0, at - 4), at + 1).filter(Boolean).length;
        expect(influence.hear(at, now)).toBe(held >= 3);
      });
    }));
  });

  test.each([['reversal', 2], ['quarter turn', 4]] as const)('the mean of its phase of a switched bias (%s), unless it was blanked', (bias, phases) => {
    const { influence } = influenceOf([INTAKE, { stage: 'demodulate', bias, blank_samples: 3 }, SCALE], {
      sensor: { sensitivity_mV_per_mT: 50, rest_V: 2.5, bandwidth_kHz: 2000, bias, biasPhase_samples: 8 },
    });
    fc.assert(fc.property(flags, (clipped) => {
      influence.forget();
      // the means that make up the output, each with the clipping of its own phase
      const bad = new Array<boolean>(phases).fill(false);
      clipped.forEach((now, at) => {
        const phase = Math.floor(at / 8);
        if (at % 8 === 0 && phase > 0) bad[(phase - 1) % phases] = clipped.slice(at - 5, at).some(Boolean);
        expect(influence.hear(at, now)).toBe(bad.some(Boolean));
      });
    }));
  });
});

describe('the row on clipping behind a clean status', () => {
  // the amplifier ends at 4.5 V, the converter at 5 V: the end codes are never reached
  const amplifier = { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 2000, railHigh_V: 4.5 };
  const scenarios = [{ name: 'surge', current: { shape: 'step', from_A: 60, to_A: 0, at_ms: 10 }, duration_ms: 40 }];
  const requirements = [{ measure: 'reading', scenario: 'surge', amperes: 100 }];
  const given = (overRange: Given[], change: Given = {}): Given => quietProbe({
    amplifier, scenarios, requirements, chain: [INTAKE, ...overRange, { stage: 'average', length_ms: 5 }, SCALE], ...change,
  });

  test('counts the readings that an unseen rail has a part in: while it lasts and for the length of the mean', () => {
    const row = rowOf(given([{ stage: 'overRange', hold_ms: 0 }]), 'hiddenClipping');
    // sample k is taken at (8 k + 7) / 320 kHz; the edge begins at 10 ms, the first grid point of sample 400 is still
    // 60 A and so clips, but no more at its instant: 400 or 401 samples, and 199 more readings that the mean holds them in
    expect(row.value).toBeGreaterThanOrEqual(400 + 199);
    // the bench reports in whole samples how long a clip moves the converter's input, here 1 us: one more
    expect(row.value).toBeLessThanOrEqual(402 + 199);
    expect(row).toMatchObject({ limit: 0, unit: 'readings', holds: false, scenario: 'surge' });
    expect(row.because).toContain('influenced by clipping and their status is clean');
  });

  test('is 0 when over-range stands inside the rail and holds on for the recovery', () => {
    // 4.5 V of 5 V is code 58982
    const row = rowOf(given([{ stage: 'overRange', highCode: 58900, hold_ms: 0.1 }]), 'hiddenClipping');
    expect(row).toMatchObject({ value: 0, holds: true, share: 0 });
  });

  test('and the status of the chain agree where every clipped sample is seen, behind every kind of filter', () => {
    const filters: Given[][] = [
      [{ stage: 'decimate', order: 3, ratio: 8 }, { stage: 'sections', corner_Hz: 300, order: 3 }],
      [{ stage: 'despike', window_samples: 5 }, { stage: 'decimate', order: 2, ratio: 4 }, { stage: 'average', length_ms: 2 }],
      [{ stage: 'sections', filter: 'notch', corner_Hz: 400, width_Hz: 100 }, { stage: 'despike' }],
    ];
    for (const filter of filters) {
      for (const at_ms of [10, 10.03, 10.11]) {
        const row = rowOf(given([], {
          chain: [INTAKE, { stage: 'overRange', highCode: 58900, hold_ms: 0.1 }, ...filter, SCALE],
          scenarios: [{ name: 'surge', current: { shape: 'step', from_A: 60, to_A: 0, at_ms }, duration_ms: 60 }],
        }), 'hiddenClipping');
        expect(row.value).toBe(0);
      }
    }
  });

  test('stands in every verdict, beside flags without a cause, also for scenarios that a requirement makes itself', () => {
    const { rows } = verdictOf(given([], {
      requirements: [{ measure: 'bandwidth', atLeast_Hz: 100, peak_A: 50 }],
    }));
    expect(rows.map(({ id }) => id)).toEqual(['bandwidth@50 A', 'hiddenClipping', 'unexplainedFlags']);
    expect(rows[1].value).toBeGreaterThan(0);
    expect(rows[1].because).toMatch(/of "sine of [\d.]+ Hz"/);
  });
});
