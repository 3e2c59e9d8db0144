/** Noise of the sensor behind the amplifier's filter, sampled: grid against the closed form of the analog parts. */
import { expect, test } from 'vitest';
import { Amplifier, antiAliasFilter } from '../../../sim/hardware/amplifier.ts';
import { Sensor } from '../../../sim/hardware/sensor.ts';
import { amplifierUnit, AT_HOME, sensorUnit } from './parts.ts';

const SENSOR_HZ = 50e3;

/** Integral of 1/(1 + (f/f1)^2)/(1 + (f/f2)^2n) from 0 to infinity, f = f1 tan(u), midpoints. */
function analogBandwidth(order: number, filterHz: number): number {
  const parts = 200_000;
  let sum = 0;
  for (let i = 0; i < parts; i++) {
    const hertz = SENSOR_HZ * Math.tan(((i + 0.5) * Math.PI) / 2 / parts);
    sum += 1 / (1 + (hertz / filterHz) ** (2 * order));
  }
  return (sum / parts) * (Math.PI / 2) * SENSOR_HZ;
}

/** Share of the power that the straight lines of the grid let through, from the filter's response to one point. */
function gridBandwidth(order: number, filterHz: number, stepSeconds: number): number {
  const response = new Float64Array(4000);
  response[1] = 1;
  antiAliasFilter(amplifierUnit({ filterOrder: order, bandwidth_kHz: filterHz / 1e3 }), stepSeconds)
    .process(response, response.length);
  const rho = Math.exp(-2 * Math.PI * SENSOR_HZ * stepSeconds);
  let power = 0;
  let weighted = 0;
  for (let n = 1; n < response.length; n++) {
    power += response[n] * (response[n] + 2 * rho * weighted);
    weighted = rho * weighted + response[n];
  }
  return power * (Math.PI / 2) * SENSOR_HZ;
}

test('the integral is pi/2 f1 f2/(f1 + f2) for two poles', () => {
  // 200 000 midpoints of a smooth function: second order, below 1e-9
  expect(analogBandwidth(1, 20e3) / ((Math.PI / 2) * 20e3 * 50e3 / 70e3)).toBeCloseTo(1, 8);
});

test.each([1, 2, 3, 4])('order %s: sampled noise has the power of the grid, and that of the analog parts', (order) => {
  const filterHz = 20e3;
  const exact = analogBandwidth(order, filterHz);
  for (const steps of [64, 16, 4, 1]) {
    const stepSeconds = 1 / (SENSOR_HZ * steps);
    const bandwidth = gridBandwidth(order, filterHz, stepSeconds);
    // at most (r/2) coth(r/2) < 1 + r^2/12 too much, r = 2 pi/steps, as against a far slower filter
    const most = (2 * Math.PI / steps) ** 2 / 12;
    expect(bandwidth / exact - 1).toBeLessThan(most);
    if (steps >= 16) expect(bandwidth / exact - 1).toBeGreaterThan(-most);

    const count = 400_000;
    const values = new Float64Array(count);
    const marks = new Uint8Array(count);
    const unit = sensorUnit({ noise_uT_per_rtHz: 0.5, bandwidth_kHz: SENSOR_HZ / 1e3 });
    const sensor = new Sensor(unit, { stepSeconds, gridFactor: 1, capacity: count, seed: 3, trial: 0 });
    sensor.surround(AT_HOME);
    sensor.process(values, marks, count);
    const filter = { filterOrder: order, bandwidth_kHz: filterHz / 1e3 };
    const amplifier = new Amplifier(amplifierUnit({ gain: 2, ...filter }), stepSeconds);
    amplifier.surround(AT_HOME);
    amplifier.process(values, marks, count);
    const settled = values.subarray(2000);
    const power = settled.reduce((sum, v) => sum + (v - 2.5) ** 2, 0) / settled.length;
    const expected = (2 * 50 * 0.5e-6) ** 2 * bandwidth;
    // independent values: time times twice the noise bandwidth, and not more than there are points; for a spectrum that
    // is not flat 2/N times at most 2
    const independent = Math.min(settled.length, settled.length * stepSeconds * 2 * exact);
    expect(Math.abs(power / expected - 1)).toBeLessThan(5 * Math.sqrt(4 / independent));
  }
});
