import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  EVENT_CLEAR, EVENT_DEGAUSSED, EVENT_QUARTER, EVENT_REVERSED, EVENT_ZERO,
} from '../../../lib/status.ts';
import type { CurrentSpec, Probe, Scenario } from '../../../sim/probe/fields.ts';
import { Bench, newCodeBlock } from '../../../sim/hardware/bench.ts';
import { CLIP_AMPLIFIER, CLIP_CONVERTER, CLIP_SENSOR } from '../../../sim/hardware/clip.ts';
import { nominalGain, nominalOffsetCodes, nominalTransfer } from '../../../sim/hardware/transfer.ts';
import { outcomeOf } from './outcome.ts';
import { exact, standProbe, standScenario, standThermometer } from './stand.ts';

const DC: CurrentSpec = { shape: 'dc', level_A: 0 };
const SINE: CurrentSpec = { shape: 'sine', peak_A: 20, frequency_Hz: 1230, offset_A: 2, phase_deg: 30 };

function noisyProbe(): Probe {
  const probe = standProbe();
  probe.sensor.noise_uT_per_rtHz = exact(0.5);
  probe.converter.noise_codes = exact(0.7);
  probe.core.gap_mm = { nominal: 2, tolerance: 0.1 };
  return probe;
}

describe('the doorway', () => {
  test('a steady current gives the code of the nominal straight line, over temperature too', () => {
    const probe = standProbe();
    probe.sensor.restDrift_mV_per_K = exact(0.3);
    probe.sensor.sensitivityDrift_ppm_per_K = exact(-400);
    probe.amplifier.offset_mV = exact(-4);
    const transfer = nominalTransfer(probe);
    for (const level_A of [-30, -1, 0, 0.01, 30]) {
      for (const temperature_C of [-40, 25, 85]) {
        const { code, clipped } = outcomeOf(probe, standScenario({ shape: 'dc', level_A }, { temperature_C }));
        const expected = transfer.restCode + nominalOffsetCodes(probe, temperature_C) +
          transfer.codesPerAmpere * nominalGain(probe, temperature_C) * level_A;
        // rounding to a code is half a code; 1e-9 for a tie
        for (const one of code) expect(Math.abs(one - expected)).toBeLessThan(0.5 + 1e-9);
        expect(Math.max(...clipped)).toBe(0);
      }
    }
  });

  test('with the reference from the supply a ratiometric sensor does not see it; with a fixed one it does', () => {
    const probe = standProbe();
    probe.sensor.ratiometric = true;
    probe.amplifier.gain = exact(1);
    const codeAt = (supply_V: number) =>
      outcomeOf(probe, standScenario({ shape: 'dc', level_A: 10 }, { supply_V })).code[0];
    const fixed = codeAt(5);
    expect(codeAt(4.5)).toBeLessThan(fixed - 200);
    probe.converter.reference = 'supply';
    expect(codeAt(4.5)).toBe(fixed);
  });

  test('number of samples, grid and instants follow from rate and duration', () => {
    const bench = new Bench(standProbe(), standScenario(DC, { duration_ms: 0.3 }), { seed: 1, trial: 0, folder: '.' });
    expect(bench.totalSamples).toBe(15);
    expect(bench.gridFactor).toBe(16);
    expect(bench.stepSeconds).toBe(1 / 800e3);
    // sample k ends its period: one grid step before (k + 1)/rate
    expect(bench.instantSeconds(4)).toBeCloseTo(5 / 50e3 - 1 / 800e3, 15);
    bench.close();
    expect(() => new Bench(standProbe(), standScenario(DC, { duration_ms: 0.01 }), { seed: 1, trial: 0, folder: '.' }))
      .toThrow(/duration_ms: found 0.01, allowed at least one A\/D sample of 0.02 ms/);
  });

  test('a duration of whole samples loses none by rounding', () => {
    const probe = standProbe();
    probe.converter.rate_kHz = 100;
    // 0.29 * 100 is 28.999999999999996 in doubles
    expect(outcomeOf(probe, standScenario(DC, { duration_ms: 0.29 })).code.length).toBe(29);
  });

  test('the temperature code is that of the thermometer; without one it is 0', () => {
    const probe = standProbe();
    expect(outcomeOf(probe, standScenario(DC)).temperatureCode[0]).toBe(0);
    probe.thermometer = standThermometer();
    // (0.75 + 0.6) V/3.3 V * 4096
    expect(outcomeOf(probe, standScenario(DC, { temperature_C: 85 })).temperatureCode[0]).toBe(1676);
  });
});

describe('truth', () => {
  test('is the current at the instant, and its means over the grid points of the period that ends there', () => {
    const { amperes, mean, meanSquare } = outcomeOf(standProbe(), standScenario(SINE));
    const current = (seconds: number) => 2 + 20 * Math.sin(2 * Math.PI * 1230 * seconds + Math.PI / 6);
    for (let k = 0; k < amperes.length; k++) {
      const points = Array.from({ length: 16 }, (_, i) => current((16 * k + i) / 800e3));
      // rounding of the phase: 12 periods are 77 rad, 2^-53 of them, times 20 A
      expect(Math.abs(amperes[k] - points[15])).toBeLessThan(1e-11);
      expect(Math.abs(mean[k] - points.reduce((sum, x) => sum + x, 0) / 16)).toBeLessThan(1e-11);
      expect(Math.abs(meanSquare[k] - points.reduce((sum, x) => sum + x * x, 0) / 16)).toBeLessThan(1e-9);
    }
  });

  test('codes follow the true current with the delay of the two poles', () => {
    // a ramp comes out late by the sum of the time constants, exactly, once both have settled
    const probe = standProbe();
    const ramp: CurrentSpec = { shape: 'step', from_A: -20, to_A: 20, at_ms: 0, edge_us: 10_000 };
    const { code, amperes } = outcomeOf(probe, standScenario(ramp));
    const transfer = nominalTransfer(probe);
    const lateSeconds = 1 / (2 * Math.PI * 50e3) + 1 / (2 * Math.PI * 20e3);
    for (let k = 20; k < 500; k++) {
      const expected = transfer.restCode + transfer.codesPerAmpere * (amperes[k] - 4000 * lateSeconds);
      // half a code, and e^(-20 periods * 2 pi 20 kHz/50 kHz) of the start
      expect(Math.abs(code[k] - expected)).toBeLessThan(0.5 + 1e-6);
    }
  });
});

describe('clipping', () => {
  const overload: CurrentSpec = { shape: 'step', from_A: 0, to_A: 200, at_ms: 5, edge_us: 1 };

  test('is told by the node that clips', () => {
    const bits = (change: (probe: Probe) => void) => {
      const probe = standProbe();
      change(probe);
      return outcomeOf(probe, standScenario(overload)).clipped;
    };
    // swing +-2.3 V, times 1.5: the amplifier rails too, and its rail of 5 V is one code beyond the converter
    expect(bits(() => {}).at(-1)).toBe(CLIP_SENSOR | CLIP_AMPLIFIER | CLIP_CONVERTER);
    expect(bits((probe) => { probe.amplifier.gain = exact(1); }).at(-1)).toBe(CLIP_SENSOR);
    expect(bits((probe) => { probe.sensor.swingHigh_V = exact(100); probe.converter.reference_V = exact(6); }).at(-1))
      .toBe(CLIP_AMPLIFIER);
    expect(bits((probe) => { probe.amplifier.gain = exact(1); probe.converter.reference_V = exact(4); }).at(-1))
      .toBe(CLIP_SENSOR | CLIP_CONVERTER);
    for (const clipped of bits(() => {}).slice(0, 250)) expect(clipped).toBe(0);
  });

  test('ends with the overload', () => {
    const { clipped } = outcomeOf(standProbe(), standScenario({ ...overload, from_A: 200, to_A: 0 }));
    expect(clipped[249]).not.toBe(0);
    // 10 samples are 25 time constants of the slower pole
    for (const one of clipped.slice(260)) expect(one).toBe(0);
  });

  test('a peak between samples that clips ahead of the anti-alias filter is told although codes look good', () => {
    const probe = standProbe();
    probe.sensor.bandwidth_kHz = exact(1000);
    probe.amplifier.bandwidth_kHz = exact(2);
    const peaks: CurrentSpec = {
      shape: 'pwm', low_A: 0, high_A: 90, frequency_Hz: 50_000, duty_percent: 10, edge_us: 0.1, swing_V: 0,
    };
    const { code, clipped } = outcomeOf(probe, standScenario(peaks));
    // the start is steady at the first value, maybe a peak: 2 ms are 25 time constants of the filter; then a tenth of
    // the peak is its mean, 205 of 2048 codes, and a peak of 2 us adds up to 2048 * 2/80 = 51
    expect(Math.max(...code.slice(100))).toBeLessThan(2048 + 205 + 51 + 1);
    for (const one of clipped.slice(1)) expect(one & CLIP_AMPLIFIER).toBe(CLIP_AMPLIFIER);
    expect(Math.max(...clipped) & CLIP_CONVERTER).toBe(0);
  });
});

describe('events', () => {
  test('mark the samples whose instant they cover; power cycles cut blocks', () => {
    const scenario = standScenario(DC, {
      events: [
        { event: 'zero button', at_ms: 1, for_ms: 2 }, { event: 'degaussed', at_ms: 2, for_ms: 0.001 },
        { event: 'sticky clear', at_ms: 9.9, for_ms: 50 }, { event: 'power cycle', at_ms: 4, for_ms: 10 },
        { event: 'power cycle', at_ms: 0, for_ms: 10 },
      ],
    });
    for (const capacity of [1, 7, 100, 1000]) {
      const { events, powerCycles } = outcomeOf(standProbe(), scenario, { capacity });
      const spans = (bit: number) => {
        const marked = events.map((event, k) => (event & bit ? k : -1)).filter((k) => k >= 0);
        return [marked[0], marked.at(-1), marked.length];
      };
      // sample k stands 1.25 us before (k + 1) * 20 us: 1 ms is met first by sample 50, 3 ms no more by sample 149
      expect(spans(EVENT_ZERO)).toEqual([50, 149, 100]);
      expect(spans(EVENT_DEGAUSSED)).toEqual([100, 100, 1]);
      expect(spans(EVENT_CLEAR)).toEqual([495, 499, 5]);
      expect(powerCycles).toEqual([0, 200]);
    }
  });

  test('an event on the very instant of a sample belongs to it', () => {
    const probe = standProbe();
    probe.gridFactor = 1; // sample k stands at k/rate
    for (const rate_kHz of [50, 30, 7, 0.3]) {
      probe.converter.rate_kHz = rate_kHz;
      for (let k = 0; k < 60; k++) {
        const events: Scenario['events'] = [{ event: 'zero button', at_ms: k / rate_kHz, for_ms: 1.5 / rate_kHz }];
        const outcome = outcomeOf(probe, standScenario(DC, { duration_ms: 70 / rate_kHz, events }));
        const marked = outcome.events.map((event, i) => (event & EVENT_ZERO ? i : -1)).filter((i) => i >= 0);
        expect(marked).toEqual([k, k + 1]);
      }
    }
  });

  test('tell the phase of a switched bias, and the codes obey them', () => {
    const probe = standProbe();
    probe.sensor.bias = 'quarter turn';
    probe.sensor.biasPhase_samples = 10;
    probe.sensor.plateOffset_mT = exact(3);
    probe.amplifier.bandwidth_kHz = exact(50);
    const { code, events } = outcomeOf(probe, standScenario({ shape: 'dc', level_A: 10 }), { capacity: 37 });
    const expected = [0, EVENT_QUARTER, EVENT_REVERSED, EVENT_REVERSED | EVENT_QUARTER];
    events.forEach((event, k) => expect(event).toBe(expected[Math.floor(k / 10) % 4]));
    const [v0, v90, v180, v270] = [9, 19, 29, 39].map((k) => code[k]);
    // each code is half a code off at most; 10 samples are 63 time constants
    const { codesPerAmpere } = nominalTransfer(probe);
    expect(Math.abs((v0 + v90 - v180 - v270) / 4 - 10 * codesPerAmpere)).toBeLessThan(0.5);
    // the other sum is the plate: 3 mT * 50 mV/mT * 1.5 * 4096/5 V
    expect(Math.abs((v0 - v90 - v180 + v270) / 4 - 184.32)).toBeLessThan(0.5);
  });
});

describe('counted randomness', () => {
  test('same seed and trial: same codes and truth, whatever the blocks, outside and inside', () => {
    const scenario = standScenario(SINE, {
      duration_ms: 4, events: [{ event: 'power cycle', at_ms: 1.7, for_ms: 1 }],
    });
    const probe = noisyProbe();
    probe.sensor.bias = 'reversal';
    const sizes = fc.integer({ min: 1, max: 300 });
    fc.assert(fc.property(fc.integer(), fc.nat(20), sizes, sizes, (seed, trial, capacity, inside) => {
      const one = outcomeOf(probe, scenario, { seed, trial, capacity, inside });
      expect(one).toEqual(outcomeOf(probe, scenario, { seed, trial, capacity: 200 }));
    }), { numRuns: 40, examples: [[1, 1, 1, 1], [0, 0, 300, 1], [-1, 3, 1, 300]] });
  });

  test('another seed or another trial gives other codes; a trial does not depend on those before it', () => {
    const scenario = standScenario(SINE, { duration_ms: 2 });
    const codes = (seed: number, trial: number) => outcomeOf(noisyProbe(), scenario, { seed, trial }).code.join();
    const alone = codes(1, 3);
    const all = [codes(1, 0), codes(1, 1), codes(1, 2), codes(1, 3), codes(2, 3)];
    expect(new Set(all).size).toBe(5);
    expect(all[3]).toBe(alone);
  });

  test('noise of the sensor and noise of the converter have nothing in common', () => {
    const noiseOf = (change: (probe: Probe) => void) => {
      const probe = standProbe();
      probe.gridFactor = 1;
      probe.amplifier.bandwidth_kHz = exact(1e5);
      change(probe);
      const { code } = outcomeOf(probe, standScenario(DC, { duration_ms: 400 }), { capacity: 4096 });
      return code.map((one) => one - 2048);
    };
    const sensor = noiseOf((probe) => { probe.sensor.noise_uT_per_rtHz = exact(3); });
    const converter = noiseOf((probe) => { probe.converter.noise_codes = exact(3); });
    const product = (a: number[], b: number[]) => a.reduce((sum, x, k) => sum + x * b[k], 0);
    const correlation = product(sensor, converter) / Math.sqrt(product(sensor, sensor) * product(converter, converter));
    expect(Math.abs(correlation)).toBeLessThan(5 / Math.sqrt(sensor.length));
  });

  test('noise in the codes is that of sensor and converter together', () => {
    const probe = standProbe();
    probe.sensor.noise_uT_per_rtHz = exact(3);
    probe.converter.noise_codes = exact(2);
    const { code } = outcomeOf(probe, standScenario(DC, { duration_ms: 2000 }), { capacity: 4096 });
    const mean = code.reduce((sum, x) => sum + x, 0) / code.length;
    const variance = code.reduce((sum, x) => sum + (x - mean) ** 2, 0) / code.length;
    // density through 50 kHz and 20 kHz in codes, plus converter noise, plus 1/12 of rounding
    const density = 3e-6 * 50 * 1.5 * 4096 / 5;
    const expected = density ** 2 * (Math.PI / 2) * (50e3 * 20e3 / 70e3) + 4 + 1 / 12;
    // neighbours 20 us apart are correlated by less than (50 e^(-2.51) - 20 e^(-6.28))/30 = 0.134, squared 0.018 and
    // fading: the number of independent samples is 0.96 N at least. 1.3 %: bound of the grid of 16 steps
    const statistical = 5 * Math.sqrt(2 / (0.96 * code.length));
    expect(Math.abs(variance / expected - 1)).toBeLessThan(statistical + 0.013);
  });
});

test('a block needs room for one sample', () => {
  expect(() => newCodeBlock(0)).toThrow(/capacity/);
  expect(() => newCodeBlock(1.5)).toThrow(/capacity/);
});
