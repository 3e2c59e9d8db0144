import { describe, expect, test } from 'vitest';
import { limitOf } from '../../../sim/judging/measures.ts';
import { prove } from '../../../sim/judging/prove.ts';
import { studyFor } from '../../../sim/judging/study.ts';
import { rowLines } from '../../../sim/report/terminal.ts';
import { PROBE, type Requirement } from '../../../sim/probe/fields.ts';
import { probeOf, quietProbe, type Given } from '../probes.ts';
import { verdictOf } from './proving.ts';

const METER = { stage: 'meter', window_ms: 20 };
const CHAIN = [{ stage: 'intake', guardBits: 4 }, { stage: 'scale' }, METER];
const SINE = { name: 'sine', current: { shape: 'sine', peak_A: 10, frequency_Hz: 100 }, duration_ms: 100 };
const STEP = { name: 'step', current: { shape: 'step', to_A: 10, at_ms: 20 }, duration_ms: 60 };
const PLAIN = { good: (t: string) => t, bad: (t: string) => t, faint: (t: string) => t };

describe('a verdict', () => {
  const requirements = [
    { measure: 'zeroOverTemperature', lowest_C: 0, highest_C: 40, limit_A: 0.1 },
    { measure: 'gain', scenario: 'sine', limit_percent: 1 },
    { measure: 'settling', scenario: 'step', limit_ms: 5 },
    { measure: 'trueRms', scenario: 'sine', amperes: 0.1 },
    { measure: 'band', from_Hz: 100, to_Hz: 100, peak_A: 5, amperes: 0.1 },
    { measure: 'sinad', scenario: 'sine', atLeast_dB: 40 },
    { measure: 'swallowed', limit_A: 1 },
  ];
  const given = quietProbe({ chain: CHAIN, scenarios: [SINE, STEP], requirements });

  test('plays a scenario once for all that ask for it, as often as the longest of them needs', () => {
    const heard: string[] = [];
    const passes = new Set<number>();
    const proving = prove(probeOf(given), {
      seed: 1, trial: 0, folder: '.',
      observer: (name) => {
        heard.push(name);
        return { passes: 3, readings: (_, pass) => { if (name === 'sine') passes.add(pass); }, record: () => {} };
      },
    });
    while (!proving.next().done) { /* until the verdict */ }
    expect(heard).toEqual(['sine', 'step']);
    expect([...passes]).toEqual([1, 2, 3]);
  });

  test('has its rows scenario by scenario, then what requirements make for themselves, then the whole run', () => {
    expect(verdictOf(given).rows.map(({ id }) => id)).toEqual([
      'swallowed', 'gain@sine', 'trueRms@sine', 'sinad@sine', 'settling@step', 'zeroOverTemperature@0 to 40 °C',
      'band@5 A, 100 Hz, 25 °C', 'hiddenClipping', 'unexplainedFlags',
    ]);
  });

  test('gives an id of its own to a requirement that asks the same once more with another limit', () => {
    const twice = [1, 2].map((limit_percent) => ({ measure: 'gain', scenario: 'sine', limit_percent }));
    const ids = verdictOf(quietProbe({ chain: CHAIN, scenarios: [SINE], requirements: twice })).rows.map(({ id }) => id);
    expect(ids.slice(0, 2)).toEqual(['gain@sine', 'gain@sine#2']);
  });

  test('says of a least value that it is one', () => {
    const { rows } = verdictOf(given);
    const [line] = rowLines(rows.find(({ id }) => id === 'sinad@sine')!, PLAIN);
    expect(line).toMatch(/^holds .* SINAD: sine .* dB +≥ 40.00 dB/);
    const [less] = rowLines(rows.find(({ id }) => id === 'gain@sine')!, PLAIN);
    expect(less).toMatch(/ %  +1.000 %/);
  });

  test('has no share of an allowance of nothing that was used', () => {
    const requirement = { measure: 'noise', scenario: 'sine', limit_A: 0 };
    const dc = { name: 'sine', current: { shape: 'dc', level_A: 1 }, duration_ms: 50 };
    const row = verdictOf(quietProbe({
      chain: CHAIN, scenarios: [dc], requirements: [requirement], converter: { bits: 12, rate_kHz: 40, reference_V: 5, noise_codes: 3 },
    })).rows[0];
    expect(row).toMatchObject({ share: null, holds: false });
    expect(row.value).toBeGreaterThan(0);
  });
});

describe('every measure that a probe file can name', () => {
  const allowance = { percentOfReading: 0, percentOfRange: 0, amperes: 0.25 };
  const pulse = { name: 'pulse', current: { shape: 'pulse', peak_A: 40, at_ms: 20, width_us: 5000 }, duration_ms: 60 };
  const dc = { name: 'dc', current: { shape: 'dc', level_A: 1 }, duration_ms: 60 };
  const asked: { [measure: string]: Given } = {
    reading: { scenario: 'dc', ...allowance }, mean: { scenario: 'dc', ...allowance }, trueRms: { scenario: 'dc', ...allowance },
    acRms: { scenario: 'sine', ...allowance }, noise: { scenario: 'dc', limit_A: 0.25 },
    settling: { scenario: 'step', limit_ms: 0.25 }, band: { from_Hz: 50, to_Hz: 100, peak_A: 5, ...allowance },
    bandwidth: { atLeast_Hz: 0.25, peak_A: 5 }, transition: { scenario: 'step', limit_ms: 0.25 },
    overshoot: { scenario: 'step', limit_percent: 0.25 }, zeroOverTemperature: { lowest_C: 0, highest_C: 40, limit_A: 0.25 },
    zeroAfterOverload: { scenario: 'pulse', limit_A: 0.25 }, zeroOverTime: { scenario: 'dc', tau_s: 0.01, limit_A: 0.25 },
    overRangeDelay: { scenario: 'pulse', limit_ms: 0.25 }, overRangeRecovery: { scenario: 'pulse', limit_ms: 0.25 },
    gain: { scenario: 'sine', limit_percent: 0.25 }, phase: { scenario: 'sine', limit_deg: 0.25 },
    sinad: { scenario: 'sine', atLeast_dB: 0.25 }, effectiveBits: { scenario: 'sine', atLeast_bits: 0.25 }, swallowed: { limit_A: 0.25 },
  };

  test('is among these', () => {
    expect(Object.keys(asked).sort()).toEqual(Object.keys(PROBE.fields.requirements.item.variants).sort());
  });

  const names = Object.keys(asked);
  const probe = probeOf(quietProbe({
    chain: CHAIN, scenarios: [dc, SINE, STEP, pulse], requirements: names.map((measure) => ({ measure, ...asked[measure] })),
  }));

  test.each(names)('%s has a limit, and a study whose plays it can tell beforehand are of its scenario', (measure) => {
    const requirement: Requirement = probe.requirements[names.indexOf(measure)];
    expect(limitOf(requirement).limit).toBe(0.25);
    expect(limitOf(requirement).better).toBe(Object.keys(asked[measure]).some((field) => field.startsWith('atLeast')) ? 'more' : 'less');
    if (requirement.measure === 'swallowed') {
      expect(() => studyFor(requirement, probe)).toThrow(TypeError);
      return;
    }
    const [first] = studyFor(requirement, probe).plays;
    const named = 'scenario' in requirement ? requirement.scenario : null;
    // the very object: that is how a scenario asked for several times is known to be one
    expect(probe.scenarios.includes(first.scenario)).toBe(named !== null);
    if (named !== null) expect(first.scenario.name).toBe(named);
  });
});
