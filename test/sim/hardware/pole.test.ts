import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Pole, poleWeights } from '../../../sim/hardware/pole.ts';
import { RandomStream } from '../../../sim/hardware/random.ts';

/** tau in steps; the corner that has it at a step of 1 s. */
function poleOf(tauSteps: number): Pole {
  return new Pole(1 / (2 * Math.PI * tauSteps), 1);
}

/** Rounding of a recursion with weights that sum to 1: each step adds at most a few 2^-53 of the largest value. */
const ROUNDING = 1e-13;

describe('first-order hold is exact', () => {
  const taus = [1e-6, 0.01, 0.3, 1, 2.5, 9.9, 10.1, 60, 1e4];

  test.each(taus)('for a step that is a ramp of one grid step, tau %s steps', (tau) => {
    const values = Float64Array.from({ length: 200 }, (_, n) => (n >= 1 ? 1 : 0));
    poleOf(tau).process(values, values.length);
    expect(values[0]).toBe(0);
    // ramp 0..1 within one step, then steady: y(n) = 1 - tau (1 - e^(-1/tau)) e^(-(n-1)/tau)
    for (let n = 1; n < 200; n++) {
      const left = -tau * Math.expm1(-1 / tau);
      expect(Math.abs(values[n] - (1 - left * Math.exp(-(n - 1) / tau)))).toBeLessThan(ROUNDING);
    }
  });

  test.each([1e-6, 0.01, 1, 60, 1e5])('for a ramp, tau %s steps', (tau) => {
    const values = Float64Array.from({ length: 500 }, (_, n) => n);
    poleOf(tau).process(values, values.length);
    // from rest: y(t) = t - tau (1 - e^(-t/tau))
    for (let n = 0; n < 500; n++) {
      expect(Math.abs(values[n] - (n + tau * Math.expm1(-n / tau)))).toBeLessThan(500 * ROUNDING + 1e-15 * tau);
    }
  });

  test.each([0.001, 0.05, 0.2, 0.45])('for a sine at %s of the grid rate, with sinc^2 of each image', (share) => {
    const tau = 3;
    // straight lines through samples of a sine hold the images m + share, each weighted by sinc^2
    const wave = [0, 0];
    for (let m = -4000; m <= 4000; m++) {
      const f = share + m;
      const weight = (Math.sin(Math.PI * f) / (Math.PI * f)) ** 2;
      const x = 2 * Math.PI * f * tau;
      wave[0] += weight / (1 + x * x);
      wave[1] -= weight * x / (1 + x * x);
    }
    const values = Float64Array.from({ length: 400 }, (_, n) => Math.sin(2 * Math.PI * share * n));
    poleOf(tau).process(values, values.length);
    // the images left out fall as 1/m^3 in pairs: below 1e-9; the transient of the start has decayed by e^(-100)
    for (let n = 300; n < 400; n++) {
      const angle = 2 * Math.PI * share * n;
      expect(Math.abs(values[n] - (wave[0] * Math.sin(angle) + wave[1] * Math.cos(angle)))).toBeLessThan(1e-9);
    }
  });

  test('at a low frequency the gain is that of an analog pole: -3 dB and -45° at the corner', () => {
    const values = Float64Array.from({ length: 40_000 }, (_, n) => Math.sin(2 * Math.PI * n / 2000));
    new Pole(1 / 2000, 1).process(values, values.length);
    // straight lines lose sinc^2(1/2000) = 1 - 8e-7; the start has decayed by e^(-2 pi 18)
    for (let n = 36_000; n < 40_000; n += 7) {
      const expected = Math.SQRT1_2 * Math.sin(2 * Math.PI * n / 2000 - Math.PI / 4);
      expect(Math.abs(values[n] - expected)).toBeLessThan(1e-6);
    }
  });
});

describe('state', () => {
  test('starts in steady state, and a constant stays exactly that constant', () => {
    const levels = fc.double({ min: -1e6, max: 1e6, noNaN: true });
    fc.assert(fc.property(levels, fc.double({ min: 1e-6, max: 1e8, noNaN: true }),
      (level, tau) => {
        const values = new Float64Array(50).fill(level);
        poleOf(tau).process(values, 50);
        for (const value of values) expect(value + 0).toBe(level + 0); // + 0: -0 is 0
      }));
  });

  test('goes on across any cut of the input, with noise and without; reset equals fresh', () => {
    const numbers = fc.array(fc.double({ min: -1e3, max: 1e3, noNaN: true }), { minLength: 1, maxLength: 40 });
    fc.assert(fc.property(numbers, fc.nat(40), fc.double({ min: 1e-3, max: 1e3, noNaN: true }), fc.boolean(),
      (given, cut, tau, noisy) => {
        const normals = new Float64Array(given.length);
        new RandomStream(1, 0, 'cut').fillNormals(normals, given.length);
        const through = (pole: Pole, values: Float64Array, draws: Float64Array) => {
          if (noisy) pole.processNoisy(values, values.length, 0.3, draws);
          else pole.process(values, values.length);
        };
        const whole = Float64Array.from(given);
        const pole = poleOf(tau);
        through(pole, whole, normals);
        pole.reset();
        const parts = Float64Array.from(given);
        through(pole, parts.subarray(0, cut), normals.subarray(0, cut));
        through(pole, parts.subarray(cut), normals.subarray(cut));
        expect([...parts]).toEqual([...whole]);
      }));
  });
});

describe('noise', () => {
  // 64 and 16 steps for one period of the corner, one step, and a quarter of a step
  test.each([64, 16, 1, 0.25])('at %s steps for one corner period power is density^2 * pi/2 * corner', (steps) => {
    const cornerHz = 1000;
    const density = 3e-6;
    const count = 400_000;
    const values = new Float64Array(count);
    const normals = new Float64Array(count);
    new RandomStream(5, 0, 'noise power').fillNormals(normals, count);
    new Pole(cornerHz, 1 / (cornerHz * steps)).processNoisy(values, count, density, normals);
    const expected = density ** 2 * (Math.PI / 2) * cornerHz;
    const power = values.reduce((sum, x) => sum + x * x, 0) / count;
    // the squares of a first-order process are correlated by rho^2n: variance of the mean 2/N (1 + rho^2)/(1 - rho^2)
    const rho2 = Math.exp(-4 * Math.PI / steps);
    const error = Math.sqrt((2 / count) * ((1 + rho2) / (1 - rho2)));
    expect(Math.abs(power / expected - 1)).toBeLessThan(5 * error);
    // correlation of neighbours is exp(-h/tau); an estimate of it is off by less than the power is, and by 1/sqrt N
    const neighbours = values.subarray(1).reduce((sum, x, i) => sum + x * values[i], 0) / count;
    expect(Math.abs(neighbours / expected - Math.sqrt(rho2))).toBeLessThan(5 * (error + 1 / Math.sqrt(count)));
  });

  test('noise is stationary from the first point on', () => {
    const count = 20_000;
    let power = 0;
    const values = new Float64Array(1);
    const normals = new Float64Array(1);
    const stream = new RandomStream(5, 1, 'first');
    for (let i = 0; i < count; i++) {
      values[0] = 2;
      stream.fillNormals(normals, 1);
      new Pole(1000, 1e-6).processNoisy(values, 1, 1, normals);
      power += (values[0] - 2) ** 2 / count;
    }
    expect(Math.abs(power / (Math.PI / 2 * 1000) - 1)).toBeLessThan(5 * Math.sqrt(2 / count));
  });

  test.each([64, 16])('at %s steps, fed to the input, only 1 - r/2 + r^2/6 of its power is left', (steps) => {
    // one point of white noise of density e has variance e^2 rate/2; power gain = sum of squared impulse response
    const values = new Float64Array(4000);
    values[1] = 1;
    new Pole(1, 1 / steps).process(values, values.length);
    const gain = values.reduce((sum, x) => sum + x * x, 0);
    const kept = (gain * steps / 2) / (Math.PI / 2);
    const r = 2 * Math.PI / steps;
    // series 1 - r/2 + r^2/6 by hand from the triangle responses; the next term is of order r^3/24
    expect(Math.abs(kept - (1 - r / 2 + r * r / 6))).toBeLessThan(r ** 3 / 12);
  });

  test('the impulse response is the triangle of the straight lines through the pole', () => {
    const tau = 4;
    const values = new Float64Array(30);
    values[1] = 1;
    poleOf(tau).process(values, 30);
    // Simpson over the two sides of the triangle, 200 steps each: error (1/200)^4/180 of a fourth derivative below 1
    for (let n = 1; n < 30; n++) {
      const rising = simpson((s) => s * Math.exp(-(n - s) / tau) / tau, 0, 1);
      const falling = n < 2 ? 0 : simpson((s) => (2 - s) * Math.exp(-(n - s) / tau) / tau, 1, 2);
      expect(Math.abs(values[n] - rising - falling)).toBeLessThan(1e-11);
    }
  });
});

test('weights keep their digits when the step is tiny against tau', () => {
  // r/2 - r^2/6 + ... and r/2 - r^2/3 + ...; at r = 1e-9 the second terms are 1e-9 relative
  const { k1, k0 } = poleWeights(1e-9 / (2 * Math.PI), 1);
  expect(Math.abs(k1 / 0.5e-9 - 1)).toBeLessThan(1e-9);
  expect(Math.abs(k0 / 0.5e-9 - 1)).toBeLessThan(1e-9);
});

function simpson(f: (s: number) => number, from: number, to: number): number {
  const n = 200;
  const h = (to - from) / n;
  let sum = f(from) + f(to);
  for (let i = 1; i < n; i++) sum += (i % 2 === 1 ? 4 : 2) * f(from + i * h);
  return sum * h / 3;
}
