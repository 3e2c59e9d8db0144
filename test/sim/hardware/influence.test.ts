/** What the bench says of clipping's after-effects, against the same hardware without limits. */
import { describe, expect, test } from 'vitest';
import type { CurrentSpec, Probe } from '../../../sim/probe/fields.ts';
import { outcomeOf } from './outcome.ts';
import { exact, standCoupling, standProbe, standScenario } from './stand.ts';

/** 120 A for a millisecond: four times the range. */
const PULSE: CurrentSpec = { shape: 'pulse', base_A: 5, peak_A: 120, at_ms: 3, width_us: 1000, edge_us: 10 };

/** The amplifier behind it clips, the converter does not. */
function clipping(change: (probe: Probe) => void): { limited: Probe; free: Probe } {
  const [limited, free] = [standProbe(), standProbe()];
  for (const probe of [limited, free]) {
    probe.sensor.swingLow_V = exact(0);
    probe.sensor.swingHigh_V = exact(100);
    probe.converter.reference_V = exact(20);
    probe.converter.bits = 16;
    change(probe);
  }
  free.amplifier.railLow_V = exact(-100);
  free.amplifier.railHigh_V = exact(100);
  return { limited, free };
}

const FILTERS: [string, (probe: Probe) => void][] = [
  ['an RC', () => {}],
  ['a slow RC', (probe) => { probe.amplifier.bandwidth_kHz = exact(0.5); }],
  ['Butterworth of order 2', (probe) => { probe.amplifier.filterOrder = 2; probe.amplifier.bandwidth_kHz = exact(2); }],
  ['Butterworth of order 4', (probe) => { probe.amplifier.filterOrder = 4; probe.amplifier.bandwidth_kHz = exact(1); }],
  ['a slow amplifier and an RC of the same corner', (probe) => {
    probe.amplifier.gainBandwidth_MHz = exact(1.5e-3);
    probe.amplifier.bandwidth_kHz = exact(1);
  }],
];

describe.each(FILTERS)('behind %s', (_, change) => {
  const { limited, free } = clipping(change);
  const scenario = standScenario(PULSE, { duration_ms: 20 });
  const one = outcomeOf(limited, scenario);
  const other = outcomeOf(free, scenario);

  test('a sample that is not marked has the code that it would have had without the limit', () => {
    expect(Math.max(...other.clipped)).toBe(0);
    let marked = 0;
    one.code.forEach((code, k) => {
      // less than half a code moves the rounding by one at most
      if (one.influenced[k] === 0) expect(Math.abs(code - other.code[k])).toBeLessThanOrEqual(1);
      else marked++;
    });
    expect(marked).toBeGreaterThan(49);
    expect(one.influenced.at(-1)).toBe(0);
    expect(one.influenced[0]).toBe(0);
  });

  test('the mark does not last much longer than the difference', () => {
    const last = (list: number[]) => list.lastIndexOf(1);
    const differs = one.code.map((code, k) => (Math.abs(code - other.code[k]) > 1 ? 1 : 0));
    const { bandwidth_kHz, filterOrder, gainBandwidth_MHz } = limited.amplifier;
    const slowest_kHz = bandwidth_kHz.nominal * (filterOrder === 1 ? 1 : Math.sin(Math.PI / 2 / filterOrder));
    // the bound counts both sides of every swing, the whole rails and half a code instead of one and a half: a factor
    // of 60 is far more, ln 60 = 4.1 time constants; and the slow poles of two equal corners
    const constants = gainBandwidth_MHz === null ? 4.1 : 8;
    const samples = (constants / (2 * Math.PI * slowest_kHz)) * limited.converter.rate_kHz;
    expect(last(one.influenced) - last(differs)).toBeLessThan(2 + samples);
    expect(last(one.influenced)).toBeGreaterThanOrEqual(last(differs));
  });
});

test('every clipped sample is marked; with a fast filter few others are', () => {
  const { code, clipped, influenced } = outcomeOf(standProbe(), standScenario(PULSE));
  clipped.forEach((bits, k) => { if (bits !== 0) expect(influenced[k]).toBe(1); });
  const behind = influenced.filter((one, k) => one === 1 && clipped[k] === 0).length;
  // at most (1.5 * 50 V/T * 76 mT + 5 V)/(0.6 mV) = 1.8e4 half codes: ln of it is 9.8 time constants of 0.4 samples
  expect(behind).toBeGreaterThan(0);
  expect(behind).toBeLessThanOrEqual(Math.ceil(9.8 * 0.398) + 1);
  expect(code.length).toBe(500);
});

test('a clip of the converter alone leaves nothing behind', () => {
  const probe = standProbe();
  probe.amplifier.gain = exact(1);
  probe.converter.reference_V = exact(4);
  const { clipped, influenced } = outcomeOf(probe, standScenario({ ...PULSE, peak_A: 70 }));
  expect(Math.max(...clipped)).toBe(4);
  clipped.forEach((bits, k) => expect(influenced[k]).toBe(bits === 0 ? 0 : 1));
});

test('spikes in the leads that clip the amplifier count with their size', () => {
  const { limited, free } = clipping((probe) => {
    probe.coupling = { ...standCoupling(), slew_mV_per_V_per_ns: exact(2000) };
    probe.amplifier.bandwidth_kHz = exact(2);
  });
  const edges: CurrentSpec = {
    shape: 'pwm', low_A: 0, high_A: 5, frequency_Hz: 200, duty_percent: 50, edge_us: 2, swing_V: 50_000,
  };
  const scenario = standScenario(edges, { duration_ms: 12 });
  const one = outcomeOf(limited, scenario);
  const other = outcomeOf(free, scenario);
  expect(Math.max(...one.clipped)).toBe(2);
  let worst = 0;
  one.code.forEach((code, k) => {
    const difference = Math.abs(code - other.code[k]);
    worst = Math.max(worst, difference);
    if (one.influenced[k] === 0) expect(difference).toBeLessThanOrEqual(1);
  });
  expect(worst).toBeGreaterThan(10);
  expect(one.influenced).toContain(0);
});
