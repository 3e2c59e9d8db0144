/**
 * How long a clipped value goes on moving the converter's input. A clip takes away at most E volts at the amplifier's
 * output; what it leaves behind after a time t is at most
 *   E * tail(t),  tail(t) = integral of |h| from t on
 * with h the impulse response of what stands behind: gain-bandwidth pole and anti-alias filter, and the sensor's pole
 * where the plate itself can saturate. Influence lasts until that is half a code.
 *   E = |gain| * (|S f(B)| + |rest - virtual ground| + spikes of the leads) + from rail to rail
 * with the largest field and spike of the A/D sample that clipped. The amplifier's recovery from an overload counts as
 * clipping. Source: textbook linear systems (bound of a convolution).
 */
import { amplifierCornerHz, antiAliasFilter } from './amplifier.ts';
import { lsbVolts } from './converter.ts';
import type { Unit } from './draw.ts';
import { Pole } from './pole.ts';
import { sensorLine, type SensorLine } from './sensor.ts';
import type { Surroundings } from './surroundings.ts';

/** Points of the table in one time constant of the slowest pole. */
const POINTS_PER_TIME_CONSTANT = 16;
/** exp(-48) of the largest excess is far below half a code of 24 bits at any excess that fields allow. */
const TIME_CONSTANTS = 48;

export class ClipMemory {
  private readonly tail: Float64Array;
  private readonly pointSeconds: number;
  private readonly sampleSeconds: number;
  private readonly voltsPerTeslaStep: number;
  private readonly voltsPerSlew: number;
  private halfCodeVolts = 0;
  private line: SensorLine = { restVolts: 0, voltsPerTesla: 0 };
  private lastReached = -1;

  constructor(private readonly unit: Unit, stepSeconds: number, private readonly gridFactor: number) {
    this.sampleSeconds = stepSeconds * gridFactor;
    const slowestHz = Math.min(...realCornersHz(unit), filterDecayHz(unit));
    this.pointSeconds = 1 / (2 * Math.PI * slowestHz * POINTS_PER_TIME_CONSTANT);
    this.tail = tailOf(unit, this.pointSeconds);
    this.voltsPerTeslaStep = ((unit.coupling?.loop_mm2 ?? 0) * 1e-6) / stepSeconds;
    this.voltsPerSlew = (unit.coupling?.slew_mV_per_V_per_ns ?? 0) * 1e-12;
  }

  surround(surroundings: Surroundings): void {
    this.line = sensorLine(this.unit.sensor, surroundings);
    this.halfCodeVolts = lsbVolts(this.unit.converter, surroundings.supplyRatio, surroundings.converterCelsius) / 2;
  }

  /** A node clipped in this A/D sample, whose field and dv/dt stand at its grid points, from place `from` on. */
  clipped(sample: number, tesla: Float64Array, voltsPerSecond: Float64Array, from: number): void {
    const excessVolts = this.excessVolts(tesla, voltsPerSecond, from);
    this.lastReached = Math.max(this.lastReached, sample + this.samplesBehind(excessVolts));
  }

  /** A clip at or before this sample still moves the converter's input. */
  reaches(sample: number): boolean {
    return sample <= this.lastReached;
  }

  private excessVolts(tesla: Float64Array, voltsPerSecond: Float64Array, from: number): number {
    const { gain, virtualGround_V, railLow_V, railHigh_V } = this.unit.amplifier;
    let field = 0;
    let slew = 0;
    for (let i = from; i < from + this.gridFactor; i++) {
      field = Math.max(field, Math.abs(tesla[i]));
      slew = Math.max(slew, Math.abs(voltsPerSecond[i]));
    }
    // no step of the field is larger than twice the largest field of its neighbourhood
    const spikes = 2 * Math.abs(this.voltsPerTeslaStep) * field + Math.abs(this.voltsPerSlew) * slew;
    const { plateOffset_mT, nonlinearity_percent, linearTo_mT } = this.unit.sensor;
    const plate = Math.abs(plateOffset_mT) * 1e-3;
    const bent = field * (1 + Math.abs(nonlinearity_percent) * 1e-2 * (field / (linearTo_mT * 1e-3)) ** 2);
    const wanted = this.line.voltsPerTesla * (bent + plate) + Math.abs(this.line.restVolts - virtualGround_V);
    return Math.abs(gain) * (wanted + spikes) + Math.abs(railHigh_V - railLow_V);
  }

  /** A/D samples behind a clip that it still moves by more than half a code. */
  private samplesBehind(excessVolts: number): number {
    const { tail } = this;
    const allowed = this.halfCodeVolts / excessVolts;
    let low = 0;
    let high = tail.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (tail[middle] > allowed) low = middle + 1;
      else high = middle;
    }
    return Math.ceil((low * this.pointSeconds) / this.sampleSeconds);
  }
}

function realCornersHz({ sensor, amplifier }: Unit): number[] {
  const corners = [amplifierCornerHz(amplifier)].filter((hertz) => hertz < Infinity);
  return sensor.nonlinearity_percent < 0 ? [...corners, sensor.bandwidth_kHz * 1e3] : corners;
}

/** Real part of the slowest pole of the anti-alias filter: the corner itself for an RC. */
function filterDecayHz({ amplifier }: Unit): number {
  const { bandwidth_kHz, filterOrder } = amplifier;
  return bandwidth_kHz * 1e3 * (filterOrder === 1 ? 1 : Math.sin(Math.PI / (2 * filterOrder)));
}

/** What the step response still moves, up and down, after whole numbers of points. */
function tailOf(unit: Unit, pointSeconds: number): Float64Array {
  const response = new Float64Array(POINTS_PER_TIME_CONSTANT * TIME_CONSTANTS).fill(1);
  response[0] = 0; // at rest, then a step on the straight line to the next point
  for (const hertz of realCornersHz(unit)) new Pole(hertz, pointSeconds).process(response, response.length);
  antiAliasFilter(unit.amplifier, pointSeconds).process(response, response.length);
  const tail = new Float64Array(response.length - 1);
  let moved = 0;
  for (let n = tail.length - 1; n >= 0; n--) {
    tail[n] = moved;
    moved += Math.abs(response[n + 1] - response[n]);
  }
  return tail;
}
