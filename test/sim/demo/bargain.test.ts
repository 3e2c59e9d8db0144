/** The second demo falls short in each trial for the reasons that it is there to show, and its rows say them. */
import { beforeAll, describe, expect, test } from 'vitest';
import { BARGAIN_PROBE } from '../../../sim/demo/bargainprobe.ts';
import { prove, type Verdict } from '../../../sim/judging/prove.ts';
import { probeOf } from '../probes.ts';

describe.each([0, 1, 2])('the bargain probe, trial %i', (trial) => {
  let verdict: Verdict;
  beforeAll(() => {
    const proving = prove(probeOf(BARGAIN_PROBE), { seed: 1, trial, folder: '.' });
    let step = proving.next();
    while (!step.done) step = proving.next();
    verdict = step.value;
  });
  const rowOf = (id: string) => verdict.rows.find((row) => row.id === id)!;

  test('holds at a steady drive current, so what follows is not its gain', () => {
    expect(rowOf('mean/fast@drive').holds).toBe(true);
  });

  test('clips ahead of the filter: too low by what the rail cuts off the peaks, and no reading says so', () => {
    const row = rowOf('mean/fast@chopped drive');
    expect(row.holds).toBe(false);
    expect(row.value!).toBeLessThan(0);
    expect(row.because).toContain('the amplifier reached its rail');
    const hidden = rowOf('hiddenClipping');
    expect(hidden.holds).toBe(false);
    expect(hidden.because).toContain('"chopped drive"');
  });

  test('tracking swallows a small steady current, as its constants said it may', () => {
    const row = rowOf('mean/fast@lamp left on');
    expect(row.holds).toBe(false);
    // all of 0.4 A is within its authority of 0.6 A; it hunts by the noise of the code
    expect(row.value!).toBeLessThan(-0.3);
    expect(row.because).toContain('tracking moved the zero from');
    expect(rowOf('swallowed').holds).toBe(false);
  });

  test('an overload moves the zero, and nothing says so', () => {
    const row = rowOf('zeroAfterOverload@short circuit');
    expect(row.holds).toBe(false);
    // remanence of a gapped core: at the most Hc * path (19 A/m * 80 mm)
    expect(Math.abs(row.value!)).toBeLessThan(1.52);
    expect(row.because).toContain('no reading was flagged during the pulse');
    expect(rowOf('overRangeDelay@short circuit').because).toContain('no reading is flagged from then on');
  });

  test('a sensor that follows the supply against a reference that does not: off by a steady current', () => {
    const row = rowOf('mean/fast@tired battery');
    expect(row.holds).toBe(false);
    expect(row.because).toContain('the supply is 4.8 V in place of 5 V, followed by the sensor but not by the virtual ground and the reference');
  });
});
