import { describe, expect, test } from 'vitest';
import { ProbeError } from '../../../sim/probe/problem.ts';
import { probeOf, quietProbe, type Given } from '../probes.ts';

const SHUNT = { resistance_mOhm: 2.5, gain: 20, bandwidth_kHz: 50 };
const TRANSFORMER = { turns: 1000, burden_ohm: 10, magnetising_mH: 3000, bandwidth_kHz: 100 };

function faults(change: Given): string[] {
  try {
    probeOf(quietProbe(change));
    return [];
  } catch (error) {
    if (!(error instanceof ProbeError)) throw error;
    return error.problems.map((problem) => problem.path);
  }
}

describe('front ends in a probe file', () => {
  test('are null when left out, and have their defaults when given', () => {
    const without = probeOf(quietProbe({}));
    expect([without.shunt, without.transformer]).toEqual([null, null]);
    const probe = probeOf(quietProbe({ shunt: SHUNT, transformer: TRANSFORMER }));
    expect(probe.shunt!.rest_V).toEqual({ nominal: 2.5, tolerance: 0 });
    expect(probe.transformer!.saturation_V_ms).toBeNull();
  });

  test.each([
    ['rails in the wrong order', { shunt: { ...SHUNT, railLow_V: 5, railHigh_V: 0 } }, 'shunt.railLow_V'],
    ['rails that meet within tolerances',
      { shunt: { ...SHUNT, railLow_V: { nominal: 2, tolerance: 2 }, railHigh_V: { nominal: 5, tolerance: 1 } } },
      'shunt.railLow_V'],
    ['a rest outside the rails', { shunt: { ...SHUNT, rest_V: 6 } }, 'shunt.rest_V'],
    ['no gain', { shunt: { ...SHUNT, gain: 0 } }, 'shunt.gain'],
    ['a gain of either sign', { shunt: { ...SHUNT, gain: { nominal: 1, tolerance: 2 } } }, 'shunt.gain'],
    ['no resistance', { shunt: { ...SHUNT, resistance_mOhm: 0 } }, 'shunt.resistance_mOhm'],
    ['half a turn', { transformer: { ...TRANSFORMER, turns: 0.5 } }, 'transformer.turns'],
    ['more inductance in saturation than before it',
      { transformer: { ...TRANSFORMER, saturatedShare_percent: { nominal: 99, tolerance: 2 } } },
      'transformer.saturatedShare_percent'],
  ])('%s is refused', (_, change, path) => {
    expect(faults(change)).toEqual([path]);
  });
});
