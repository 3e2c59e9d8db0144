/**
 * The grid on which the analog side is computed: a whole number of steps for one A/D sample, by default 16 times the
 * higher of the two corners (sensor, amplifier) over the A/D rate. The sensor's noise is exact at its own pole on any
 * grid; behind the amplifier's pole the straight lines between grid points cost noise power, given here in closed form.
 *   exact        density^2 * (pi/2) * f1 * f2 / (f1 + f2)
 *   on the grid  noise with autocorrelation rho^|n| through y = keep*y' + k1*x + k0*x'
 */
import type { Probe } from '../probe/fields.ts';
import { poleWeights } from './pole.ts';

const STEPS_PER_CORNER_PERIOD = 16;
const LARGEST_FACTOR = 4096;

export interface GridFactor {
  factor: number;
  warning: string | null;
}

/** Noise power at the amplifier's output on the grid, over the exact one. */
export function gridNoisePowerRatio(sensorCornerHz: number, amplifierCornerHz: number, stepSeconds: number): number {
  const rho = poleWeights(sensorCornerHz, stepSeconds).keep;
  const { keep, k1, k0 } = poleWeights(amplifierCornerHz, stepSeconds);
  // per unit of input variance: the correlation of y with x, then the variance of y
  const cross = (k1 + k0 * rho) / (1 - keep * rho);
  const own = k1 * k1 + k0 * k0 + 2 * k1 * k0 * rho;
  const variance = (2 * keep * cross * (k1 * rho + k0) + own) / ((1 - keep) * (1 + keep));
  return variance / (amplifierCornerHz / (sensorCornerHz + amplifierCornerHz));
}

export function gridFactorOf(probe: Probe): GridFactor {
  const rateHz = probe.converter.rate_kHz * 1e3;
  const sensorHz = probe.sensor.bandwidth_kHz.nominal * 1e3;
  const amplifierHz = probe.amplifier.bandwidth_kHz.nominal * 1e3;
  // a corner that is a round share of the rate must not gain a step by the last bit of a quotient
  const wanted = Math.max(1, Math.ceil((STEPS_PER_CORNER_PERIOD * Math.max(sensorHz, amplifierHz)) / rateHz - 1e-9));
  const factor = probe.gridFactor ?? Math.min(wanted, LARGEST_FACTOR);
  if (factor >= wanted) return { factor, warning: null };
  const error = gridNoisePowerRatio(sensorHz, amplifierHz, 1 / (rateHz * factor)) - 1;
  return {
    factor,
    warning: `gridFactor: ${factor} analog steps for one A/D sample where ${wanted} are usual for these corners; ` +
      `noise power behind the amplifier ${signed(100 * error)} %, and clipping between the steps is not seen`,
  };
}

function signed(percent: number): string {
  return (percent < 0 ? '−' : '+') + Math.abs(percent).toPrecision(2);
}
