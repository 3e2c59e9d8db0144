import { describe, expect, test } from 'vitest';
import { told } from '../../../sim/judging/shortcomings.ts';
import { weigh, type Weighed, type WeighOptions } from '../../../sim/judging/weigh.ts';
import { verdictJson } from '../../../sim/report/json.ts';
import { paintFor, summaryLines } from '../../../sim/report/terminal.ts';
import { weighedLines } from '../../../sim/report/weigh.ts';
import { probeOf, quietProbe, type Given } from '../probes.ts';
import { verdictOf } from './proving.ts';

const OPTIONS: WeighOptions = { seed: 1, trial: 0, folder: '.' };
/** 2.5 mΩ and a gain of 20: 50 mV/A; 16 bits over 5 V: 1.526 mA a code. */
const SHUNT = { resistance_mOhm: 2.5, gain: 20, bandwidth_kHz: 1e5 };
const CODE_AMPERES = 5 / 65536 / 0.05;
/** R = 50 Ω, L = 3 H: tau = 60 ms. */
const TRANSFORMER = { turns: 1000, burden_ohm: 10, winding_ohm: 40, magnetising_mH: 3000, bandwidth_kHz: 1e5 };

const scenario = (name: string, current: Given, duration_ms: number, more: Given = {}): Given =>
  ({ name, current, duration_ms, ...more });

function weighedOf(scenarios: Given[], change: Given = {}, options: Partial<WeighOptions> = {}): Weighed[] {
  const probe = probeOf(quietProbe({
    shunt: SHUNT, transformer: TRANSFORMER, scenarios,
    requirements: [{ measure: 'reading', scenario: scenarios[0]['name'], amperes: 1000 }], ...change,
  }));
  return weigh(probe, { ...OPTIONS, ...options });
}

const STEADY = scenario('steady', { shape: 'dc', level_A: 10 }, 20);
const STEP = scenario('step', { shape: 'step', from_A: 0, to_A: 10, at_ms: 5, edge_us: 1 }, 35);
const SINE = scenario('mains', { shape: 'sine', peak_A: 14, frequency_Hz: 50 }, 1000, { judgeFrom_ms: 800 });

describe('a transformer', () => {
  test('shows nothing of a direct current, and says so with both numbers', () => {
    const [, transformer] = weighedOf([STEADY]);
    const [steady] = transformer.scenarios;
    // it starts in steady state: its reading is 0 but for rounding
    expect(steady.worstAmperes).toBeCloseTo(-10, 9);
    expect(steady.rmsAmperes).toBeCloseTo(10, 9);
    expect(steady.sentences).toEqual(['shows nothing of the 10 A direct current: it reads 0 A']);
  });

  test('droops within a step by 1 - exp(-t R/L)', () => {
    const [, transformer] = weighedOf([STEP]);
    // from the edge to the last sample, 30 ms and a sample period at most: three digits do not see 25 µs of 60 ms
    expect(transformer.scenarios[0].sentences).toContain(
      `droops by ${Number((-100 * Math.expm1(-30 / 60)).toPrecision(3))} % in the 30 ms after the step`);
  });

  test('droops within a pulse by the same law, judged at its end and not at that of the run', () => {
    const pulse = scenario('pulse', { shape: 'pulse', peak_A: 10, at_ms: 5, width_us: 6000, edge_us: 1 }, 35);
    const [, transformer] = weighedOf([pulse]);
    const [droop] = transformer.scenarios[0].sentences.filter((sentence) => sentence.startsWith('droops'));
    const [, percent] = /^droops by ([\d.]+) % within the pulse of 6 ms$/.exec(droop)!;
    // one sample of 25 µs before the end and three digits
    expect(Math.abs(Number(percent) - -100 * Math.expm1(-6 / 60))).toBeLessThan(100 * (0.025 / 60) + 0.005);
  });

  test('of a sine it is off by the high-pass minus one: 1/sqrt(1 + (w tau)^2) of its peak', () => {
    const [, transformer] = weighedOf([SINE]);
    // the offset of the start has decayed by exp(-800/60) of 14 A * 0.053 at the first time judged
    const share = 1 / Math.hypot(1, 2 * Math.PI * 50 * 0.06);
    const left = 14 * share * Math.exp(-800 / 60);
    const { worstAmperes, rmsAmperes, clippedShare } = transformer.scenarios[0];
    // ten whole periods; 800 samples a period miss a peak by (pi/800)^2/2 = 8e-6; leakage adds w * 1.6 ns of 14 A
    const limit = left + 14 * share * 1e-5 + 14 * 2 * Math.PI * 50 * 1.6e-9;
    expect(Math.abs(Math.abs(worstAmperes!) - 14 * share)).toBeLessThan(limit);
    expect(Math.abs(rmsAmperes! - (14 * share) / Math.SQRT2)).toBeLessThan(limit);
    expect(clippedShare).toBe(0);
    expect(transformer.scenarios[0].sentences).toEqual([]);
  });

  test('saturates after V t = S, and says when and how long', () => {
    // 10 A: 0.5 V in the loop; 5 V·ms with droop after 60 ms * -ln(1 - 5/30)
    const [, transformer] = weighedOf([STEP], { transformer: { ...TRANSFORMER, saturation_V_ms: 5 } });
    const milliseconds = 5 - 60 * Math.log(1 - 5 / 30);
    const { clippedShare, sentences } = transformer.scenarios[0];
    // a sample of 25 µs and the edge of 1 µs
    expect(Math.abs(clippedShare! - (35 - milliseconds) / 35)).toBeLessThan(0.03 / 35);
    expect(sentences).toContain(`saturates at 5 mV·s, for the first time at ${told(milliseconds / 1e3, 's')}, in ` +
      `${Number((100 * clippedShare!).toPrecision(3))} % of the judged samples`);
  });

  test('says what it does in any scenario, from closed forms', () => {
    const [, { sentences }] = weighedOf([STEADY], { transformer: { ...TRANSFORMER, saturation_V_ms: 30 } });
    // 50 Ω/1000^2 seen from the conductor; R/(2 pi L); N S/L; (R/(2 pi L)) sqrt((30 A/10 A)^2 - 1)
    expect(sentences).toEqual([
      'takes 1.5 mV and 45 mW from the circuit at 30 A',
      'shows half the power at 2.65 Hz, less below, and nothing at 0 Hz: a step droops with a time constant of 60 ms',
      'saturates by a direct current of 10 A', 'saturates below 7.5 Hz by a sine of 30 A peak',
    ]);
  });
});

describe('a shunt', () => {
  test('reads a steady current within half a code, and tells what it takes', () => {
    const [shunt] = weighedOf([STEADY]);
    expect(Math.abs(shunt.scenarios[0].worstAmperes!)).toBeLessThanOrEqual(CODE_AMPERES / 2 + 1e-12);
    expect(shunt.scenarios[0].sentences).toEqual(['takes up to 25 mV and 250 mW from the circuit']);
    expect(shunt.sentences).toEqual([
      'takes 75 mV and 2.25 W from the circuit at 30 A', `cannot tell less than ${told(CODE_AMPERES, 'A')}, one code`,
    ]);
  });

  test('follows the ambient with its resistance, behind its thermal lag', () => {
    const shunt = { ...SHUNT, tempco_ppm_per_K: 1000, timeConstant_s: 0.2 };
    const warming = scenario('warming', { shape: 'dc', level_A: 10 }, 200, {
      ambient: [{ at_ms: 0, temperature_C: 25 }, { at_ms: 100, temperature_C: 75 }],
    });
    const [{ scenarios: [result] }] = weighedOf([warming], { shunt });
    // ramp response of a first-order lag for 100 ms, then a decay towards 75 °C for 100 ms; 10 mA a kelvin
    const ramped = 500 * (0.1 + 0.2 * Math.expm1(-0.1 / 0.2));
    const kelvin = 50 + (ramped - 50) * Math.exp(-0.1 / 0.2);
    // half an epoch of 1 ms at 150 K/s in the end, and half a code
    expect(Math.abs(result.worstAmperes! - 0.01 * kelvin)).toBeLessThan(0.01 * 0.075 + CODE_AMPERES / 2);
    // it still warms by (50 K - kelvin)/0.2 s: one code of 1.5 mA takes 1.3 ms, and an epoch takes 1 ms
    expect(result.worstSeconds).toBeGreaterThan(0.2 - 0.0024);
  });

  test('self-heating moves its gain by tempco P Rth', () => {
    const shunt = { ...SHUNT, tempco_ppm_per_K: 50, thermalResistance_K_per_W: 20, timeConstant_s: 0.001 };
    const [weighed] = weighedOf([scenario('range', { shape: 'dc', level_A: 30 }, 20)], { shunt });
    // 2.25 W * 20 K/W = 45 K, 0.23 % more by its own warming
    const kelvin = 45 / (1 - 45 * 50e-6);
    const words = `self-heating by ${told(kelvin, 'K')} moves its gain by ${Number((kelvin * 5e-3).toPrecision(3))} %`;
    expect(weighed.sentences).toContain(`${words} at a steady 30 A`);
    expect(weighed.scenarios[0].sentences).toContain(words);
  });

  test('says from where it clips, and how often it did', () => {
    const half = scenario('half', { shape: 'step', from_A: 0, to_A: 30, at_ms: 10, edge_us: 0.001 }, 20);
    const [weighed] = weighedOf([half], { shunt: { ...SHUNT, gain: 40 } });
    expect(weighed.sentences).toContain('is at a rail from 25 A on, short of the range of 30 A');
    const { clippedShare, sentences } = weighed.scenarios[0];
    // 800 samples, of which one may see the edge
    expect(Math.abs(clippedShare! - 0.5)).toBeLessThanOrEqual(1 / 800);
    const percent = Number((100 * clippedShare!).toPrecision(3));
    expect(sentences).toContain(`is at a rail in ${percent} % of the judged samples`);
  });

  test('tells noise and offset as currents', () => {
    const shunt = { ...SHUNT, bandwidth_kHz: 50, noise_nV_per_rtHz: 20, offset_mV: 0.1 };
    const [{ sentences }] = weighedOf([STEADY], { shunt });
    const noise = (20e-9 * Math.sqrt((Math.PI / 2) * 50e3)) / 2.5e-3;
    expect(sentences).toContain(`cannot tell less than 1.53 mA, one code; its noise is ${told(noise, 'A')} RMS`);
    expect(sentences).toContain('its offset reads as 40 mA without current');
  });
});

describe('weighing', () => {
  test('how the grid is cut changes no result', () => {
    const noisy = {
      shunt: {
        ...SHUNT, bandwidth_kHz: 50, noise_nV_per_rtHz: 50, tempco_ppm_per_K: 400, thermalResistance_K_per_W: 20,
      },
      transformer: { ...TRANSFORMER, saturation_V_ms: 5 },
    };
    const warming = scenario('warming', { shape: 'sine', peak_A: 30, frequency_Hz: 17, offset_A: 5 }, 60, {
      ambient: [{ at_ms: 0, temperature_C: 0 }, { at_ms: 50, temperature_C: 60 }],
    });
    const whole = weighedOf([STEP, warming], noisy);
    for (const capacity of [8, 56, 100_000]) {
      expect(weighedOf([STEP, warming], noisy, { capacity })).toEqual(whole);
    }
  });

  test('a drawn unit is within its tolerances, and the same for the same seed and trial', () => {
    const shunt = { ...SHUNT, resistance_mOhm: { nominal: 2.5, tolerance: 0.05 } };
    const worst = [1, 2, 3].map((trial) => weighedOf([STEADY], { shunt }, { trial })[0].scenarios[0].worstAmperes!);
    for (const error of worst) expect(Math.abs(error)).toBeLessThanOrEqual(10 * 0.02 + CODE_AMPERES / 2);
    expect(new Set(worst).size).toBe(3);
    expect(weighedOf([STEADY], { shunt }, { trial: 2 })[0].scenarios[0].worstAmperes).toBe(worst[1]);
  });

  test('plays what is asked for: long scenarios only with all, or by name', () => {
    const scenarios = [STEADY, { ...STEP, long: true }];
    const names = (options: Partial<WeighOptions>): string[] =>
      weighedOf(scenarios, {}, options)[0].scenarios.map((one) => one.scenario);
    expect(names({})).toEqual(['steady']);
    expect(names({ all: true })).toEqual(['steady', 'step']);
    expect(names({ only: 'step' })).toEqual(['step']);
  });

  test('nothing judged is no error of zero', () => {
    const [{ scenarios: [result] }] = weighedOf([{ ...STEADY, judgeFrom_ms: 19.999 }]);
    expect(result).toMatchObject({ readings: 0, worstAmperes: null, rmsAmperes: null, clippedShare: null });
  });
});

describe('in the verdict', () => {
  const paint = paintFor({});

  test('each front end of the file stands on the terminal and in the JSON', () => {
    const verdict = verdictOf(quietProbe({ shunt: SHUNT, transformer: TRANSFORMER }));
    const text = summaryLines(verdict, paint).join('\n');
    for (const line of weighedLines(verdict.summary.weighed)) expect(text).toContain(line);
    expect(text).toContain('shows nothing of the 10 A direct current: it reads 0 A');
    expect(JSON.parse(verdictJson(verdict)).summary.weighed.map((one: Weighed) => one.frontEnd))
      .toEqual(['shunt', 'transformer']);
  });

  test('nothing is weighed and nothing printed where the file has neither', () => {
    const verdict = verdictOf(quietProbe({}));
    expect(verdict.summary.weighed).toEqual([]);
    expect(weighedLines([])).toEqual([]);
    expect(summaryLines(verdict, paint).join('\n')).not.toContain('Weighed');
  });

  test('a front end alone is weighed alone, and changes no row of the probe', () => {
    const alone = verdictOf(quietProbe({ transformer: TRANSFORMER }));
    expect(alone.summary.weighed.map((one) => one.frontEnd)).toEqual(['transformer']);
    expect(alone.rows).toEqual(verdictOf(quietProbe({})).rows);
  });
});

test('numbers are told with three digits and the prefix that fits', () => {
  expect([0, 1e-10, 4.7e-9, 999.6e-6, 0.075, 1, 12.345, 999.96, -2250, 3e9].map((value) => told(value, 'V'))).toEqual([
    '0 V', '0 V', '4.7 nV', '1 mV', '75 mV', '1 V', '12.3 V', '1 kV', '-2.25 kV', '3 GV',
  ]);
  expect(told(0.0242, 'K')).toBe('0.0242 K');
});
