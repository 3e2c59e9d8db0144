import { expect, test } from 'vitest';
import { gridFactorOf, gridNoisePowerRatio } from '../../../sim/hardware/grid.ts';
import { exact, standProbe } from './stand.ts';

test('the default is 16 steps for one period of the higher corner', () => {
  // 16 * 50 kHz / 50 kHz
  expect(gridFactorOf(standProbe())).toEqual({ factor: 16, warning: null });
  const fast = standProbe();
  fast.amplifier.bandwidth_kHz = exact(51);
  expect(gridFactorOf(fast).factor).toBe(17);
  const slow = standProbe();
  slow.sensor.bandwidth_kHz = exact(1);
  slow.amplifier.bandwidth_kHz = exact(1);
  expect(gridFactorOf(slow).factor).toBe(1);
  const round = standProbe();
  round.converter.rate_kHz = 0.3;
  round.sensor.bandwidth_kHz = exact(0.1 * 3);
  round.amplifier.bandwidth_kHz = exact(0.1);
  expect(gridFactorOf(round).factor).toBe(16);
});

test('a given factor is kept; a coarser one brings a warning with the error in noise power', () => {
  const probe = standProbe();
  probe.gridFactor = 40;
  expect(gridFactorOf(probe)).toEqual({ factor: 40, warning: null });
  probe.gridFactor = 2;
  const { factor, warning } = gridFactorOf(probe);
  expect(factor).toBe(2);
  const percent = 100 * (gridNoisePowerRatio(50e3, 20e3, 1 / 100e3) - 1);
  expect(Math.abs(percent)).toBeGreaterThan(5);
  expect(warning).toContain(`${Math.abs(percent).toPrecision(2)} %`);
  expect(warning).toContain('16 are usual');
});

test('corners far above the A/D rate do not ask for an endless grid, and say so', () => {
  const probe = standProbe();
  probe.converter.rate_kHz = 0.001;
  const { factor, warning } = gridFactorOf(probe);
  expect(factor).toBe(4096);
  expect(warning).toContain('800000 are usual');
});
