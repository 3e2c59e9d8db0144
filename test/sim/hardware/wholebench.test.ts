/** Surroundings, magnetic memory and what is done to the probe, through the whole bench. */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { CurrentSpec, Probe, Scenario } from '../../../sim/probe/fields.ts';
import { MAGNETIC_CONSTANT } from '../../../sim/hardware/core.ts';
import { nominalTransfer } from '../../../sim/hardware/transfer.ts';
import { probeOf, quietProbe } from '../probes.ts';
import { outcomeOf } from './outcome.ts';
import { exact, standCoupling, standProbe, standScenario, standThermometer } from './stand.ts';

const dc = (level_A: number): CurrentSpec => ({ shape: 'dc', level_A });
const PLAY = { coercivity_A_per_m: exact(15), remanence_T: exact(0.2), saturation_T: exact(0.45), loopFile: '' };

/** Half a code of rounding, and what the sum of the arithmetic leaves. */
const ROUNDING = 0.5 + 1e-6;

describe('surroundings', () => {
  const ambient = [{ at_ms: 10, temperature_C: 25 }, { at_ms: 60, temperature_C: 75 }];

  test('the temperature code is read anew every every_ms and stays in between', () => {
    const probe = standProbe();
    probe.thermometer = { ...standThermometer(), every_ms: 3 };
    const { temperatureCode } = outcomeOf(probe, standScenario(dc(0), { duration_ms: 80, ambient }));
    temperatureCode.forEach((code, k) => {
      // sample k stands 1.25 us before (k + 1) * 0.02 ms
      const read_ms = 3 * Math.floor(((k + 1) * 0.02 - 0.00125 + 1e-9) / 3);
      const celsius = Math.max(25, Math.min(75, 15 + read_ms));
      // 10 mV/K and 0.75 V at 25 °C on 3.3 V at 12 bits
      expect(code).toBe(Math.floor((4096 * (0.75 + 0.01 * (celsius - 25))) / 3.3 + 0.5));
    });
    expect(new Set(temperatureCode).size).toBe(18);
  });

  test('the thermometer lags by its own time constant, the sensor by its own', () => {
    const probe = standProbe();
    probe.thermometer = { ...standThermometer(), every_ms: 0.02, timeConstant_s: exact(0.02) };
    probe.sensor.restDrift_mV_per_K = exact(1);
    probe.sensor.timeConstant_s = exact(0.005);
    const { code, temperatureCode } = outcomeOf(probe, standScenario(dc(0), { duration_ms: 60, ambient }));
    // response to a ramp of 1 K/ms that began 50 ms ago: 50 - tau + tau e^(-50/tau)
    const behind = (tau: number) => 50 - tau + tau * Math.exp(-50 / tau);
    // a thermometer code is 0.08 K; a sample 0.02 K
    expect(Math.abs(((temperatureCode.at(-1)! * 3.3) / 4096 - 0.75) * 100 - behind(20))).toBeLessThan(0.06);
    // 1 mV/K * 1.5 * 4096/5 V = 1.2288 codes a kelvin; steps of 1 ms are 0.5 K off their middle, poles are far faster
    expect(Math.abs(code.at(-1)! - 2048 - 1.2288 * behind(5))).toBeLessThan(ROUNDING + 0.5 * 1.2288);
  });

  test('drift of amplifier and reference follow the amplifier', () => {
    const probe = standProbe();
    probe.amplifier.offsetDrift_uV_per_K = exact(200);
    probe.converter.referenceDrift_ppm_per_K = exact(400);
    const { code } = outcomeOf(probe, standScenario(dc(0), { temperature_C: 85 }));
    // (2.5 V + 1.5 * 200 uV/K * 60 K)/(5 V * (1 + 400 ppm/K * 60 K)) * 4096
    expect(Math.abs(code[0] - (4096 * 2.518) / (5 * 1.024))).toBeLessThan(ROUNDING);
    probe.amplifier.timeConstant_s = exact(1e4);
    const jump = [{ at_ms: 0, temperature_C: 25 }, { at_ms: 0.001, temperature_C: 85 }];
    // 10 ms of 10000 s: 6e-5 K
    expect(outcomeOf(probe, standScenario(dc(0), { ambient: jump })).code.at(-1)).toBe(2048);
  });

  test('a falling battery takes a ratiometric sensor with it', () => {
    const probe = standProbe();
    probe.sensor.ratiometric = true;
    probe.amplifier.gain = exact(1);
    const { code } = outcomeOf(probe, standScenario(dc(0), { duration_ms: 500, supplySag_mV_per_s: 500 }));
    // 2.5 V at 5 V; within an epoch of 1 ms 0.25 mV at most, a fifth of a code
    code.forEach((one, k) => {
      const supply = 5 - 0.5 * (k + 1) * 20e-6;
      expect(Math.abs(one - (4096 * supply) / 2 / 5)).toBeLessThan(ROUNDING + 0.25);
    });
    expect(code[0] - code.at(-1)!).toBeGreaterThan(100);
  });
});

describe('around the conductor', () => {
  test('turned over, the probe and the truth see the current with the other sign', () => {
    const sine: CurrentSpec = { shape: 'sine', peak_A: 20, frequency_Hz: 100, offset_A: 3, phase_deg: 0 };
    const straight = outcomeOf(standProbe(), standScenario(sine));
    const events: Scenario['events'] = [{ event: 'polarity', at_ms: 4, for_ms: 3 }];
    const turned = outcomeOf(standProbe(), standScenario(sine, { events }));
    turned.amperes.forEach((amperes, k) => {
      const within = k >= 200 && k < 350;
      expect(amperes).toBe((within ? -1 : 1) * straight.amperes[k]);
      expect(turned.mean[k]).toBe((within ? -1 : 1) * straight.mean[k]);
      expect(turned.meanSquare[k]).toBe(straight.meanSquare[k]);
      // 20 samples are 2 pi 0.4 * 20 = 50 time constants of the slower pole
      const settled = k < 200 || (k >= 220 && k < 350) || k >= 370;
      if (!settled) return;
      const mirrored = within ? 4096 - straight.code[k] : straight.code[k];
      expect(Math.abs(turned.code[k] - mirrored)).toBeLessThanOrEqual(1);
    });
  });

  test('an outer field and a neighbour turn over too', () => {
    const probe = standProbe();
    probe.core.concentration = exact(8);
    probe.core.neighbour_ppm = exact(5000);
    const events: Scenario['events'] = [{ event: 'polarity', at_ms: 5, for_ms: 100 }];
    const { code } = outcomeOf(probe, standScenario(dc(0), { outerField_uT: 200, neighbour_A: -100, events }));
    const { codesPerAmpere } = nominalTransfer(probe);
    // 8 * 200 uT * 50 V/T * 1.5 * 4096/5 V, and -0.5 A
    const away = 8 * 200e-6 * 50 * 1.5 * 819.2 - 0.5 * codesPerAmpere;
    expect(Math.abs(code[0] - (2048 + away))).toBeLessThan(ROUNDING);
    expect(Math.abs(code.at(-1)! - (2048 - away))).toBeLessThan(ROUNDING);
  });

  test('an open jaw leaves its share, in trial 0 a closed one is as before', () => {
    const probe = standProbe();
    probe.core.openJaw_percent = exact(10);
    probe.core.jointGap_um = { nominal: 50, tolerance: 30 };
    const events: Scenario['events'] = [{ event: 'jaw opened', at_ms: 3, for_ms: 3 }];
    const { code, amperes } = outcomeOf(probe, standScenario(dc(20), { events }));
    const { codesPerAmpere } = nominalTransfer(probe);
    expect(Math.abs(code[149] - 2048 - 20 * codesPerAmpere)).toBeLessThan(ROUNDING);
    expect(Math.abs(code[299] - 2048 - 2 * codesPerAmpere)).toBeLessThan(ROUNDING);
    expect(code.at(-1)).toBe(code[0]);
    for (const one of amperes) expect(one).toBe(20);
  });

  test('each closing of a drawn unit has a joint gap of its own, within the tolerance', () => {
    const probe = standProbe();
    probe.core.jointGap_um = { nominal: 50, tolerance: 30 };
    probe.converter.bits = 16;
    const events: Scenario['events'] = [3, 6].map((at_ms) => ({ event: 'jaw opened' as const, at_ms, for_ms: 1 }));
    const gapAt = (code: number) => {
      // 2048 codes of 12 bits are 32768; B = mu0 I/(gap + path/permeability)
      const tesla = ((code - 32768) * 5) / 65536 / 1.5 / 50;
      return ((MAGNETIC_CONSTANT * 20) / tesla - 2e-3 - 80e-3 / 2200) * 1e6;
    };
    const gaps = new Set<number>();
    for (let trial = 1; trial <= 20; trial++) {
      const { code } = outcomeOf(probe, standScenario(dc(20), { events }), { trial });
      const three = [code[140], code[290], code[490]].map(gapAt);
      // half a code of 12000 is 0.09 um of 2.1 mm
      for (const gap of three) expect(Math.abs(gap - 50)).toBeLessThan(30 + 0.1);
      expect(new Set(three).size).toBe(3);
      three.forEach((gap) => gaps.add(gap));
      expect(code[299]).toBe(code[250]);
    }
    expect(Math.max(...gaps) - Math.min(...gaps)).toBeGreaterThan(45);
  });

  test('a current in the coil counts with its turns', () => {
    const probe = standProbe();
    probe.core.coilTurns = 40;
    const coil = { at_ms: 2, peak_A: 0.25, frequency_Hz: 100, decay_ms: 1e4 };
    const { code, amperes } = outcomeOf(probe, standScenario(dc(0), { coil }));
    const { codesPerAmpere } = nominalTransfer(probe);
    // 0.2519 of a period later, 0.2508 behind the poles: 40 * 0.25 A, less 2.5 ms/10 s and 1 - cos(2 pi 0.0019)
    const less = 10 * codesPerAmpere * (2.6e-4 + 8e-5);
    expect(Math.abs(code[225] - 2048 - 10 * codesPerAmpere)).toBeLessThan(ROUNDING + less);
    expect(code.slice(0, 99).every((one) => one === 2048)).toBe(true);
    for (const one of amperes) expect(one).toBe(0);
  });

  test('the change of the field shows in the leads: their area adds up to area times change', () => {
    const probe = standProbe();
    probe.converter.bits = 16;
    const step: CurrentSpec = { shape: 'step', from_A: 0, to_A: 10, at_ms: 4, edge_us: 100 };
    const without = outcomeOf(probe, standScenario(step)).code;
    probe.coupling = { ...standCoupling(), loop_mm2: exact(100) };
    const withLoop = outcomeOf(probe, standScenario(step)).code;
    const codeSeconds = withLoop.reduce((sum, one, k) => sum + one - without[k], 0) * 20e-6;
    // 1e-4 m^2 * change of the field * gain; ten samples around the edge each carry up to a code of rounding, and the
    // samples of the response do not meet its mean: a hundredth
    const expected = 1e-4 * 10 * nominalTransfer(probe).fieldTeslaPerAmpere * 1.5 * (65536 / 5);
    expect(Math.abs(codeSeconds / expected - 1)).toBeLessThan(0.01 + (20 * 20e-6) / expected);
  });
});

describe('magnetic memory', () => {
  const overload: CurrentSpec = { shape: 'pulse', base_A: 0, peak_A: 3000, at_ms: 2, width_us: 2000, edge_us: 100 };

  function remanentProbe(): Probe {
    const probe = standProbe();
    probe.core.play = structuredClone(PLAY);
    probe.converter.bits = 16;
    return probe;
  }

  test('an overload moves the zero, by at most coercivity times path, until the core is degaussed', () => {
    const events: Scenario['events'] = [{ event: 'degaussed', at_ms: 7, for_ms: 1 }];
    const probe = remanentProbe();
    const { code, events: marked } = outcomeOf(probe, standScenario(overload, { events }));
    const { codesPerAmpere } = nominalTransfer(probe);
    expect(code[0]).toBe(32768);
    const amperes = (code[340] - 32768) / codesPerAmpere;
    expect(amperes).toBeGreaterThan(0.05);
    // at zero current B gap/mu0 = -H path with |H| below the coercivity: 15 A/m * 80 mm, referred to the current by
    // codesPerAmpere, which counts the material's share of the circuit; and half a code
    expect(amperes).toBeLessThan(15 * 0.08 * (1 + 80 / 2200 / 2) + 0.5 / codesPerAmpere);
    expect(code[349]).toBe(code[340]);
    expect(code.at(-1)).toBe(32768);
    expect(marked.findIndex((bits) => bits !== 0)).toBe(350);
  });

  test('what is left turns over with the sense of the overload', () => {
    const probe = remanentProbe();
    const zeroAfter = (peak_A: number) => outcomeOf(probe, standScenario({ ...overload, peak_A })).code.at(-1)! - 32768;
    expect(Math.abs(zeroAfter(-3000) + zeroAfter(3000))).toBeLessThanOrEqual(1);
    const events: Scenario['events'] = [{ event: 'polarity', at_ms: 0, for_ms: 5 }];
    const turned = outcomeOf(probe, standScenario(overload, { events })).code.at(-1)! - 32768;
    expect(Math.abs(turned + zeroAfter(3000))).toBeLessThanOrEqual(1);
  });

  test('small currents meet the nominal straight line', () => {
    const probe = remanentProbe();
    const { codesPerAmpere } = nominalTransfer(probe);
    for (const level of [-1, 1]) {
      const { code } = outcomeOf(probe, standScenario({ shape: 'step', from_A: 0, to_A: level, at_ms: 2, edge_us: 1 }));
      // on the initial curve the permeability only rises from its start; the material is below 2 % of the circuit
      const shown = (code.at(-1)! - 32768) * level;
      expect(shown).toBeGreaterThan(codesPerAmpere - 1);
      expect(shown).toBeLessThan(codesPerAmpere * 1.02 + 1);
    }
  });
});

/** Every field of the hardware does something here. */
function busyProbe(core: object): Probe {
  const near = (nominal: number, tolerance: number) => ({ nominal, tolerance });
  return probeOf(quietProbe({
    gridFactor: 5,
    chain: [{ stage: 'intake' }, { stage: 'demodulate', bias: 'quarter turn' }, { stage: 'scale' }],
    core: {
      gap_mm: near(2, 0.1), path_mm: 80, permeability: 2200, eddy_kHz: 60, position_percent: near(0, 1),
      jointGap_um: near(40, 20), openJaw_percent: 3, concentration: 5, neighbour_ppm: 3000, coilTurns: 30, ...core,
    },
    sensor: {
      sensitivity_mV_per_mT: 50, sensitivityDrift_ppm_per_K: 300, rest_V: 2.5, restDrift_mV_per_K: 0.2,
      ratiometric: true, bandwidth_kHz: 40, noise_uT_per_rtHz: 0.4, noiseCorner_Hz: 800, wander_uT_per_rth: 200,
      nonlinearity_percent: -2, count: 2, mismatch_percent: 2, timeConstant_s: 0.004, bias: 'quarter turn',
      biasPhase_samples: 12, plateOffset_mT: 1,
    },
    coupling: { loop_mm2: 20, slew_mV_per_V_per_ns: 50 },
    amplifier: {
      gain: 1.8, virtualGround_V: 2.5, offset_mV: near(0, 2), offsetDrift_uV_per_K: 8, gainBandwidth_MHz: 0.3,
      slew_V_per_us: 0.3, recovery_us: 40, timeConstant_s: 0.01, bandwidth_kHz: 15, filterOrder: 3,
    },
    converter: {
      bits: 14, rate_kHz: 40, reference_V: 5, noise_codes: 0.8, referenceDrift_ppm_per_K: 40, offset_codes: 3,
      gainError_percent: 0.2, inl_codes: 3, dnl_codes: 0.2, jitter_ns: 20,
    },
    thermometer: { element: 'thermistor', timeConstant_s: 0.003, every_ms: 0.7 },
  }));
}

const BUSY_SCENARIO = standScenario(
  { shape: 'pwm', low_A: -10, high_A: 45, frequency_Hz: 1700, duty_percent: 40, edge_us: 3, swing_V: 48 },
  {
    duration_ms: 9, supplySag_mV_per_s: 900,
    ambient: [{ at_ms: 1, temperature_C: 20 }, { at_ms: 5, temperature_C: 60 }],
    outerField_uT: 50, neighbour_A: 30, coil: { at_ms: 6.3, peak_A: 3, frequency_Hz: 900, decay_ms: 0.6 },
    events: [
      { event: 'jaw opened', at_ms: 2.13, for_ms: 0.9 }, { event: 'polarity', at_ms: 4.41, for_ms: 1.3 },
      { event: 'degaussed', at_ms: 7.2, for_ms: 0.2 }, { event: 'power cycle', at_ms: 3.3, for_ms: 1 },
    ],
  });

const MATERIALS: [string, object][] = [
  ['play', { play: { coercivity_A_per_m: 15, remanence_T: 0.2, saturation_T: 0.45 } }],
  ['Jiles-Atherton', { jilesAtherton: {
    saturation_kA_per_m: 380, shape_A_per_m: 27, coupling: 5e-5, pinning_A_per_m: 30, reversibility: 0.55,
  } }],
];

describe.each(MATERIALS)('with everything on, and %s', (_, core) => {
  const probe = busyProbe(core);

  test('how blocks are cut, outside and inside, changes nothing', () => {
    const sizes = fc.integer({ min: 1, max: 400 });
    fc.assert(fc.property(fc.integer(), fc.nat(5), sizes, sizes, (seed, trial, capacity, inside) => {
      const one = outcomeOf(probe, BUSY_SCENARIO, { seed, trial, capacity, inside });
      expect(one).toEqual(outcomeOf(probe, BUSY_SCENARIO, { seed, trial, capacity: 200 }));
    }), { numRuns: 25, examples: [[1, 1, 1, 1], [0, 0, 400, 1], [-1, 3, 1, 400]] });
  });

  test('each thing that happens changes codes', () => {
    const all = outcomeOf(probe, BUSY_SCENARIO).code.join();
    const without: Partial<Scenario>[] = [
      { ambient: [] }, { supplySag_mV_per_s: 0 }, { outerField_uT: 0 }, { neighbour_A: 0 }, { coil: null },
      ...['jaw opened', 'polarity', 'degaussed'].map((name) => ({
        events: BUSY_SCENARIO.events.filter(({ event }) => event !== name),
      })),
    ];
    for (const change of without) expect(outcomeOf(probe, { ...BUSY_SCENARIO, ...change }).code.join()).not.toBe(all);
  });
});
