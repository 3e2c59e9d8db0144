/**
 * The grid on which the analog side is computed: a whole number of steps for one A/D sample, by default 16 times the
 * higher of the two corners that shape noise (sensor, anti-alias filter) over the A/D rate. The sensor's noise is exact
 * at its own pole on any grid; what follows takes straight lines between grid points, which costs or adds noise power:
 *   exact        density^2 * integral of |H sensor|^2 |H amplifier|^2 |H filter|^2
 *   on the grid  noise with autocorrelation rho^|n| through the recursions of amplifier and filter
 * A gain-bandwidth corner above the sensor's needs no finer grid: at grid points it lets pass what it gets, which is
 * right; below it, the sensor's corner is the higher one. The core's eddy pole carries no noise and is exact for
 * currents of straight lines.
 */
import { amplifierCornerHz, antiAliasFilter } from './amplifier.ts';
import { nominalUnit, type Unit } from './draw.ts';
import { Pole, poleWeights } from './pole.ts';
import type { Probe } from '../probe/fields.ts';

const STEPS_PER_CORNER_PERIOD = 16;
const LARGEST_FACTOR = 4096;
const POINTS_AT_ONCE = 4096;
/** 2^20 points: a filter slower than that has let its sum of squares settle to far below the digits printed. */
const MOST_BLOCKS = 256;

export interface GridFactor {
  factor: number;
  warning: string | null;
}

/** Corners that noise meets on its way to the converter. */
export interface NoiseCorners {
  sensorHz: number;
  /** Of the amplifier itself; Infinity: none. */
  amplifierHz: number;
  filterHz: number;
  filterOrder: number;
}

export function noiseCorners({ sensor, amplifier }: Unit): NoiseCorners {
  return {
    sensorHz: sensor.bandwidth_kHz * 1e3, amplifierHz: amplifierCornerHz(amplifier),
    filterHz: amplifier.bandwidth_kHz * 1e3, filterOrder: amplifier.filterOrder,
  };
}

/** Noise power behind the anti-alias filter, over that behind the sensor's pole: exact, as the analog parts have it. */
export function exactNoisePower({ sensorHz, amplifierHz, filterHz, filterOrder }: NoiseCorners): number {
  // trapezia over ln f: converges exponentially; what lies beyond the ends is e^-40 of the rest
  const step = 0.02;
  const from = Math.log(Math.min(sensorHz, filterHz)) - 40;
  const to = Math.log(Math.max(sensorHz, filterHz)) + 40;
  let sum = 0;
  for (let u = from; u < to; u += step) {
    const hertz = Math.exp(u);
    const amplifier = 1 + (hertz / amplifierHz) ** 2;
    sum += hertz / (1 + (hertz / sensorHz) ** 2) / amplifier / (1 + (hertz / filterHz) ** (2 * filterOrder));
  }
  return (sum * step) / ((Math.PI / 2) * sensorHz);
}

/** The same as the grid has it: the sum of squares of the response to one draw of the sensor's noise. */
export function gridNoisePower(unit: Unit, stepSeconds: number): number {
  const { sensorHz, amplifierHz } = noiseCorners(unit);
  const { keep } = poleWeights(sensorHz, stepSeconds);
  const amplifier = amplifierHz < Infinity ? new Pole(amplifierHz, stepSeconds) : null;
  const filter = antiAliasFilter(unit.amplifier, stepSeconds);
  const response = new Float64Array(POINTS_AT_ONCE);
  let draw = 0;
  let sum = 0;
  for (let block = 0; block < MOST_BLOCKS; block++) {
    for (let i = 0; i < POINTS_AT_ONCE; i++) {
      response[i] = draw;
      draw = block === 0 && i === 0 ? Math.sqrt((1 - keep) * (1 + keep)) : keep * draw;
    }
    amplifier?.process(response, POINTS_AT_ONCE);
    filter.process(response, POINTS_AT_ONCE);
    const before = sum;
    for (const value of response) sum += value * value;
    if (sum - before <= before * 1e-13) break;
  }
  return sum;
}

export function gridNoisePowerRatio(unit: Unit, stepSeconds: number): number {
  return gridNoisePower(unit, stepSeconds) / exactNoisePower(noiseCorners(unit));
}

export function gridFactorOf(probe: Probe): GridFactor {
  const rateHz = probe.converter.rate_kHz * 1e3;
  const unit = nominalUnit(probe);
  const { sensorHz, filterHz } = noiseCorners(unit);
  // a corner that is a round share of the rate must not gain a step by the last bit of a quotient
  const highestHz = Math.max(sensorHz, filterHz);
  const wanted = Math.max(1, Math.ceil((STEPS_PER_CORNER_PERIOD * highestHz) / rateHz - 1e-9));
  const factor = probe.gridFactor ?? Math.min(wanted, LARGEST_FACTOR);
  if (factor >= wanted) return { factor, warning: null };
  const error = gridNoisePowerRatio(unit, 1 / (rateHz * factor)) - 1;
  return {
    factor,
    warning: `gridFactor: ${factor} analog steps for one A/D sample where ${wanted} are usual for these corners; ` +
      `noise power behind the amplifier ${signed(100 * error)} %, and clipping between the steps is not seen`,
  };
}

function signed(percent: number): string {
  return (percent < 0 ? '−' : '+') + Math.abs(percent).toPrecision(2);
}
