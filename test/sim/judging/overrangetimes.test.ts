import { describe, expect, test } from 'vitest';
import fc from 'fast-check';
import { OVER_RANGE } from '../../../lib/index.ts';
import type { Measured } from '../../../sim/judging/measures.ts';
import { Excursions, OverRangeDelay, OverRangeRecovery } from '../../../sim/judging/overrangetimes.ts';
import { play } from '../../../sim/judging/play.ts';
import { tune } from '../../../sim/tuning/tune.ts';
import { probeOf, quietProbe, type Given } from '../probes.ts';
import { hearReadings, type MadeReading } from './heard.ts';

const STEP = 1 / 320e3; // 40 kHz, 8 grid points a sample
const DELAY = { measure: 'overRangeDelay', scenario: 'way', limit_ms: 1 } as const;
const RECOVERY = { measure: 'overRangeRecovery', scenario: 'way', limit_ms: 1 } as const;

function probeWith(current: Given, duration_ms: number, more: Given = {}) {
  return probeOf(quietProbe({
    scenarios: [{ name: 'way', current, duration_ms }], requirements: [{ measure: 'swallowed', limit_A: 1 }], ...more,
  }));
}

function listOf(current: Given, duration_ms = 100) {
  const probe = probeWith(current, duration_ms);
  const excursions = new Excursions(probe, probe.scenarios[0], '.');
  const list = [];
  for (let next = excursions.next(); next !== null; next = excursions.next()) list.push(next);
  return list;
}

function resultsOf(current: Given, at: (seconds: number, n: number) => MadeReading, duration_ms = 100) {
  const probe = probeWith(current, duration_ms);
  const [scenario] = probe.scenarios;
  const delay = new OverRangeDelay(DELAY, probe, scenario, '.');
  const recovery = new OverRangeRecovery(RECOVERY, probe, scenario, '.');
  for (const measure of [delay, recovery]) hearReadings(measure, scenario, 0.2e-3, at);
  return { delay: delay.result(), recovery: recovery.result() };
}

const PULSE = { shape: 'pulse', peak_A: 60, at_ms: 20.05, width_us: 10_000, edge_us: 0 };

describe('excursions', () => {
  test('of a sine lie where its arc sine says', () => {
    const list = listOf({ shape: 'sine', peak_A: 60, frequency_Hz: 50 });
    // |60 sin| > 30 from 30 to 150 degrees of each half period of 10 ms
    expect(list.length).toBe(10);
    list.forEach(({ fromSeconds, toSeconds, peakAmperes }, i) => {
      expect(Math.abs(fromSeconds - (i + 1 / 6) * 0.01)).toBeLessThanOrEqual(STEP);
      expect(Math.abs(toSeconds - (i + 5 / 6) * 0.01)).toBeLessThanOrEqual(STEP);
      expect(Math.abs(peakAmperes)).toBeCloseTo(60, 3);
    });
  });

  test('a clip far shorter than an A/D sample is not missed', () => {
    const list = listOf({ shape: 'pulse', peak_A: -60, at_ms: 50, width_us: 7, edge_us: 0 });
    expect(list.length).toBe(1);
    expect(list[0].toSeconds - list[0].fromSeconds).toBeLessThan(3 * STEP);
  });

  test('the range itself is inside; from the start to the end is one', () => {
    expect(listOf({ shape: 'dc', level_A: 30 })).toEqual([]);
    expect(listOf({ shape: 'dc', level_A: 30.001 })).toEqual([{ fromSeconds: 0, toSeconds: Infinity, peakAmperes: 30.001 }]);
  });
});

describe('delay and recovery', () => {
  test('run from the current itself to the reading, whenever that comes', () => {
    fc.assert(fc.property(fc.integer({ min: 101, max: 140 }), fc.integer({ min: 151, max: 499 }), (first, good) => {
      // reading n at (n + 1) * 0.2 ms; the pulse lasts from 20.05 to 30.05 ms
      const { delay, recovery } = resultsOf(PULSE, (_, n) => ({ amperes: 0, status: n >= first && n < good ? OVER_RANGE : 0 })) as { [name: string]: Measured };
      expect(Math.abs(delay.value - ((first + 1) * 0.2 - 20.05))).toBeLessThanOrEqual(STEP * 1e3 + 1e-9);
      expect(Math.abs(recovery.value - ((good + 1) * 0.2 - 30.05))).toBeLessThanOrEqual(STEP * 1e3 + 1e-9);
      expect(delay.share).toBeCloseTo(delay.value, 12);
    }));
  });

  test('of several excursions the worst counts', () => {
    const levels = { shape: 'staircase', levels_A: [0, 60, 0, -60, 0], hold_ms: 20, edge_us: 0 };
    // flagged [20.6, 43) and [60.2, 81.4) ms
    const flagged = (ms: number): boolean => (ms > 20.5 && ms < 42.9) || (ms > 60.1 && ms < 81.3);
    const { delay, recovery } = resultsOf(levels, (seconds) => ({ amperes: 0, status: flagged(seconds * 1e3) ? OVER_RANGE : 0 })) as { [name: string]: Measured };
    expect(Math.abs(delay.value - 0.6)).toBeLessThanOrEqual(STEP * 1e3 + 1e-9);
    expect(Math.abs(recovery.value - 3)).toBeLessThanOrEqual(STEP * 1e3 + 1e-9);
    expect(delay.where).toContain('worst of 2');
  });

  test('excursions that follow before readings are good again are one', () => {
    const sine = { shape: 'sine', peak_A: 60, frequency_Hz: 500 };
    const { delay, recovery } = resultsOf(sine, (seconds) => ({ amperes: 0, status: seconds > 0.0009 ? OVER_RANGE : 0 }), 20) as { [name: string]: Measured | string };
    expect((delay as Measured).value).toBeCloseTo(1 - 1 / 6, 2);
    expect((delay as Measured).where).toContain('worst of 1');
    expect(recovery).toContain('not good again');
  });

  test('a good reading while the current is still beyond the range is no recovery', () => {
    const { recovery } = resultsOf(PULSE, (seconds) => ({ amperes: 0, status: seconds < 0.025 ? OVER_RANGE : 0 }));
    // flagged up to 25 ms, back in the range at 30.05 ms, the next reading at 30.2 ms
    expect(Math.abs((recovery as Measured).value - 0.15)).toBeLessThanOrEqual(STEP * 1e3 + 1e-9);
  });

  test('of excursions that are one, recovery counts from the end of the last', () => {
    const levels = { shape: 'staircase', levels_A: [0, 60, 0, -60, 0], hold_ms: 20, edge_us: 0 };
    const { recovery } = resultsOf(levels, (seconds) => ({ amperes: 0, status: seconds > 0.02 && seconds < 0.0839 ? OVER_RANGE : 0 }));
    // flagged through from 20 to 84 ms, back in the range at 80 ms for good
    expect(Math.abs((recovery as Measured).value - 4)).toBeLessThanOrEqual(STEP * 1e3 + 1e-9);
  });

  test('what cannot be told is refused with the reason', () => {
    const never = resultsOf({ shape: 'dc', level_A: 10 }, () => ({ amperes: 10 }));
    expect(never.delay).toContain('never leaves the range of ±30 A');
    expect(never.recovery).toContain('never leaves the range of ±30 A');
    const silent = resultsOf(PULSE, () => ({ amperes: 0 }));
    expect(silent.delay).toContain('no reading is flagged from then on');
    expect(silent.recovery).toContain('nothing to recover from');
    const always = resultsOf({ shape: 'dc', level_A: 60 }, () => ({ amperes: 0, status: OVER_RANGE }));
    expect(always.delay).toContain('from the start');
    expect(always.recovery).toContain('still beyond the range');
  });

  test('through bench and chain: one decimated reading to tell, hold and memory to recover', () => {
    const chain = [
      { stage: 'intake', guardBits: 4 }, { stage: 'overRange', hold_ms: 2 }, { stage: 'decimate', order: 1, ratio: 8 },
      { stage: 'average', length_ms: 4 }, { stage: 'scale' },
    ];
    const probe = probeWith(PULSE, 60, { chain });
    const [scenario] = probe.scenarios;
    const delay = new OverRangeDelay(DELAY, probe, scenario, '.');
    const recovery = new OverRangeRecovery(RECOVERY, probe, scenario, '.');
    play(probe, scenario, tune(probe), { seed: 1, trial: 0, folder: '.' }, [delay, recovery]);
    const told = (delay.result() as Measured).value;
    const good = (recovery.result() as Measured).value;
    // a reading ends every 0.2 ms; the first that holds a railed code is the next one
    expect(told).toBeGreaterThan(0);
    expect(told).toBeLessThanOrEqual(0.2 + 0.025);
    // 2 ms of hold and 4 ms of average minus one reading, each up to one period of 0.2 ms late, and a sample
    expect(good).toBeGreaterThanOrEqual(2 + 4 - 0.2 - 0.025);
    expect(good).toBeLessThanOrEqual(2 + 4 + 0.4 + 0.025);
  });
});
