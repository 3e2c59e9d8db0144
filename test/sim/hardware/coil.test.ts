import { expect, test } from 'vitest';
import { CoilCurrent } from '../../../sim/hardware/coil.ts';

const COIL = { at_ms: 1, peak_A: 2, frequency_Hz: 250, decay_ms: 4 };
const STEP = 1e-5;

test('a decaying sine from its start, by its formula; null before', () => {
  const coil = new CoilCurrent(COIL, STEP, 1000);
  expect(coil.over(0, 100)).toBe(null);
  const amperes = coil.over(50, 1000)!;
  for (let i = 0; i <= 50; i++) expect(amperes[i]).toBe(0);
  // quarters of the period of 4 ms, that is after 1 ms, 3 ms, 5 ms, 7 ms; rounding of the phase only
  [[100, 1], [300, -1], [500, 1], [700, -1]].forEach(([steps, sign]) => {
    expect(amperes[50 + steps]).toBeCloseTo(sign * 2 * Math.exp(-steps * STEP / 4e-3), 12);
  });
});

test('has gone when its exponential has reached the smallest numbers', () => {
  const coil = new CoilCurrent(COIL, STEP, 10);
  // 700 decays of 400 steps
  expect(coil.over(100 + 700 * 400 + 1, 10)).toBe(null);
  expect(coil.over(100 + 600 * 400 + 7, 10)![0]).not.toBe(0);
});

test('how calls cut the grid changes nothing', () => {
  const whole = new CoilCurrent(COIL, STEP, 500).over(40, 500)!;
  const parts = new CoilCurrent(COIL, STEP, 500);
  for (let at = 0, n = 1; at < 500; at += n, n = Math.min(n + 3, 500 - at)) {
    const part = parts.over(40 + at, n);
    for (let i = 0; i < n; i++) expect(part === null ? 0 : part[i]).toBe(whole[at + i]);
  }
});
