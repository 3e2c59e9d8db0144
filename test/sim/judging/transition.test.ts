import { describe, expect, test } from 'vitest';
import { RandomStream } from '../../../sim/hardware/random.ts';
import type { Measured } from '../../../sim/judging/measures.ts';
import { play } from '../../../sim/judging/play.ts';
import { Overshoot, TransitionDuration } from '../../../sim/judging/transition.ts';
import { tune } from '../../../sim/tuning/tune.ts';
import { probeOf, quietProbe, type Given } from '../probes.ts';
import { hearReadings, scenarioOf } from './heard.ts';

const JUMP = { name: 'way', current: { shape: 'step', from_A: 0, to_A: 10, at_ms: 20, edge_us: 0 }, duration_ms: 100 };
const DURATION = { measure: 'transition', scenario: 'way', limit_ms: 5 } as const;
const OVERSHOOT = { measure: 'overshoot', scenario: 'way', limit_percent: 5 } as const;
const PERIOD = 25e-6;

type Response = (secondsBehind: number) => number;

function durationOf(response: Response, current: Given = {}, period = PERIOD): Measured | string {
  const scenario = scenarioOf({ ...JUMP, current: { ...JUMP.current, ...current } });
  const measure = new TransitionDuration(DURATION, scenario);
  hearReadings(measure, scenario, period, (seconds) => ({ amperes: response(seconds - 0.020) }));
  return measure.result();
}

function overshootOf(response: Response): Measured | string {
  const scenario = scenarioOf(JUMP);
  const measure = new Overshoot(OVERSHOOT, scenario);
  hearReadings(measure, scenario, PERIOD, (seconds) => ({ amperes: response(seconds - 0.020) }));
  return measure.result();
}

const onePole = (tau: number): Response => (t) => (t < 0 ? 0 : 10 * (1 - Math.exp(-t / tau)));
/** Second-order Butterworth: damping 1/sqrt 2. */
const butterworth = (cornerHz: number): Response => {
  const a = (2 * Math.PI * cornerHz) / Math.SQRT2;
  return (t) => (t < 0 ? 0 : 10 * (1 - Math.exp(-a * t) * (Math.cos(a * t) + Math.sin(a * t))));
};

describe('transition duration', () => {
  test('of one pole is ln 9 tau, both ways', () => {
    const tau = 1e-3;
    for (const sign of [1, -1]) {
      const { value } = durationOf((t) => sign * onePole(tau)(t)) as Measured;
      // straight lines between readings: y'' h^2 / 8 over the slope y', so h^2 / (8 tau) at each crossing
      expect(Math.abs(value - Math.log(9) * tau * 1e3)).toBeLessThan((2 * PERIOD ** 2 * 1e3) / (8 * tau) + 1e-9);
    }
  });

  test('of an ideal ramp is 0.8 of its length', () => {
    const { value, shape } = durationOf((t) => Math.max(0, Math.min(10, 10 * t / 4e-3)), { edge_us: 4000 }) as Measured;
    expect(value).toBeCloseTo(3.2, 9);
    expect(shape).toContain('the current itself 3.200 ms');
  });

  test('between two readings is given as their distance, not as less', () => {
    const measured = durationOf((t) => (t < 0 ? 0 : 10), {}, 0.5e-3) as Measured;
    expect(measured.value).toBeCloseTo(0.5, 9);
    expect(measured.where).toContain('within one reading');
  });

  test('is blind to what happens in the first half of the time before the step', () => {
    const tau = 1e-3;
    const started = durationOf((t) => (t < -0.0101 ? 4 : onePole(tau)(t))) as Measured;
    expect(started.value).toBe((durationOf(onePole(tau)) as Measured).value);
  });

  test('takes the crossings nearest to the middle when a ripple crosses the levels often', () => {
    // ramp of 10 ms with a dip back below 10 % between 2 and 3 ms: the second crossing of 10 % counts
    const dipped: Response = (t) => (t < 0 ? 0 : t > 2e-3 && t < 3e-3 ? 0.5 : Math.min(10, t * 1e3));
    const { value } = durationOf(dipped) as Measured;
    // up again within one reading before 3 ms, 90 % at 9 ms
    expect(Math.abs(value - 6)).toBeLessThan(PERIOD * 1e3 + 1e-6);
  });

  test('through bench and chain, of an amplifier pole', () => {
    const probe = probeOf(quietProbe({
      amplifier: { gain: 2, virtualGround_V: 2.5, bandwidth_kHz: 0.2 }, scenarios: [JUMP], requirements: [DURATION],
    }));
    const measure = new TransitionDuration(DURATION, probe.scenarios[0]);
    play(probe, probe.scenarios[0], tune(probe), { seed: 1, trial: 0, folder: '.' }, [measure]);
    const tauMs = 1e3 / (2 * Math.PI * 200);
    // a code of 0.8 mA at slopes of 1 and 9 A/tau, and the straight lines between readings
    const bound = tauMs * 0.0008 * (1 / 9 + 1) + 2 * 0.025 ** 2 / (8 * tauMs);
    expect(Math.abs((measure.result() as Measured).value - Math.log(9) * tauMs)).toBeLessThan(bound);
  });
});

describe('overshoot', () => {
  test('of a second-order Butterworth is exp(-pi)', () => {
    const measured = overshootOf(butterworth(200)) as Measured;
    // the peak may fall between readings: y'' = w^2 e^-pi there, (h / 2)^2 / 2 of it
    const w = 2 * Math.PI * 200;
    const bound = 100 * Math.exp(-Math.PI) * (w * PERIOD) ** 2 / 8 + 1e-6;
    expect(Math.abs(measured.value - 100 * Math.exp(-Math.PI))).toBeLessThan(bound);
    expect(measured.share).toBeCloseTo(measured.value / 5, 12);
  });

  test('of one pole is none', () => {
    // what is left of the pole in the last tenth, 72 to 80 tau: e^-72
    expect((overshootOf(onePole(1e-3)) as Measured).value).toBeLessThan(1e-9);
  });

  test('of the integer low-pass in the chain is that of its design', () => {
    const probe = probeOf(quietProbe({
      chain: [{ stage: 'intake', guardBits: 4 }, { stage: 'sections', filter: 'low-pass', corner_Hz: 200, order: 2 }, { stage: 'scale' }],
      scenarios: [JUMP], requirements: [OVERSHOOT],
    }));
    const measure = new Overshoot(OVERSHOOT, probe.scenarios[0]);
    play(probe, probe.scenarios[0], tune(probe), { seed: 1, trial: 0, folder: '.' }, [measure]);
    // bilinear: the design differs from the analog one by (w h)^2 / 12 and less, the peak lies between samples by
    // (w h)^2 / 8; w h = 0.0314. A code of 0.8 mA in each state: 0.016 % of the step.
    expect(Math.abs((measure.result() as Measured).value - 100 * Math.exp(-Math.PI))).toBeLessThan(0.016 + 100 * 0.0314 ** 2 * (1 / 12 + 1 / 8) * 0.05);
  });
});

describe('refused, not guessed', () => {
  test('a step that is not there', () => {
    expect(durationOf(() => 3)).toContain('cannot be told from noise');
  });

  test('a step of the height of its noise', () => {
    const random = new RandomStream(1, 0, 'transition test');
    expect(durationOf((t) => (t < 0 ? 0 : 1) + 0.3 * random.normal())).toContain('cannot be told from noise');
  });

  test('a step that still moves at the end', () => {
    // one pole of 40 ms over 80 ms: within the last tenth it moves by several percent
    expect(durationOf(onePole(40e-3))).toContain('still moves');
  });

  test('a step at the very beginning', () => {
    expect(durationOf(onePole(1e-3), { at_ms: 0 })).toContain('before the step');
  });

  test('flagged readings behind the step', () => {
    const scenario = scenarioOf(JUMP);
    const measure = new TransitionDuration(DURATION, scenario);
    hearReadings(measure, scenario, PERIOD, (seconds) => ({ amperes: onePole(1e-3)(seconds - 0.020), status: seconds > 0.021 && seconds < 0.0215 ? 1 : 0 }));
    expect(measure.result()).toMatch(/^(19|20) readings behind the step are flagged/);
  });

  test('a current that is no step', () => {
    expect(new Overshoot(OVERSHOOT, scenarioOf({ current: { shape: 'dc', level_A: 1 } })).result()).toContain('allowed "step"');
  });
});
