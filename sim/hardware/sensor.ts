/**
 * Linear Hall sensors in the gap: field (T) to output (V). One of them:
 *   V = rest + S * (sign * f(B) + plateSign * plateOffset + noise), one pole, then clipped to the swing
 *   f(B) = B + share * to * (B/to)^3, held where it would turn back
 *   rest = (rest_V + restDrift * (T - 25 °C)) * supply ratio,  S = S25 * (1 + drift * (T - 25 °C)) * supply ratio
 * The supply ratio counts for a ratiometric sensor only (its swing scales too), else it is 1. The signs are those of
 * the switched bias. Noise before the pole: white, 1/f (counted as part of the output, so a switched bias moves it away
 * from the signal) and a random walk. Several sensors differ in S and noise; their clipped outputs are averaged.
 */
import { biasPhases, type BiasPhase } from './bias.ts';
import { CLIP_SENSOR, clipBlock } from './clip.ts';
import type { SensorUnit } from './draw.ts';
import { Flicker, flickerPlan, Lines, RandomWalk } from './noise.ts';
import { Pole } from './pole.ts';
import { RandomStream } from './random.ts';
import type { Surroundings } from './surroundings.ts';

export const REFERENCE_CELSIUS = 25;

/** Straight lines of the random walk: longer than any analog corner would show, far shorter than it matters. */
const WANDER_LINE_SECONDS = 1e-3;

export interface SensorLine {
  restVolts: number;
  voltsPerTesla: number;
}

export interface SensorOptions {
  stepSeconds: number;
  gridFactor: number;
  /** Most grid points in one call. */
  capacity: number;
  seed: number;
  /** In trial 0 several sensors are alike. */
  trial: number;
  /** Noise differs from scenario to scenario, what is drawn with the unit does not. */
  scenario?: string;
}

export function sensorLine(
  sensor: SensorUnit, { sensorCelsius, supplyRatio }: Pick<Surroundings, 'sensorCelsius' | 'supplyRatio'>,
): SensorLine {
  const ratio = sensor.ratiometric ? supplyRatio : 1;
  const warmer = sensorCelsius - REFERENCE_CELSIUS;
  const relative = 1 + sensor.sensitivityDrift_ppm_per_K * 1e-6 * warmer;
  return {
    restVolts: (sensor.rest_V + sensor.restDrift_mV_per_K * 1e-3 * warmer) * ratio,
    // mV/mT is V/T
    voltsPerTesla: sensor.sensitivity_mV_per_mT * relative * ratio,
  };
}

/** The sensors in the gap, seen as one. */
export class Sensor {
  private readonly elements: HallElement[];
  private readonly field: Float64Array;
  private readonly sum: Float64Array;

  constructor(sensor: SensorUnit, options: SensorOptions) {
    this.elements = Array.from({ length: sensor.count }, (_, index) => new HallElement(sensor, options, index));
    const several = sensor.count > 1 ? options.capacity : 0;
    this.field = new Float64Array(several);
    this.sum = new Float64Array(several);
  }

  /** Grid points clipped so far, counted for each sensor. */
  get clips(): number {
    return this.elements.reduce((sum, element) => sum + element.clips, 0);
  }

  surround(surroundings: Surroundings): void {
    for (const element of this.elements) element.surround(surroundings);
  }

  /** Tesla in, volts out, in place. */
  process(values: Float64Array, marks: Uint8Array, count: number): void {
    const { elements, field, sum } = this;
    if (elements.length === 1) {
      elements[0].process(values, marks, count);
      return;
    }
    sum.fill(0, 0, count);
    for (const element of elements) {
      for (let i = 0; i < count; i++) field[i] = values[i];
      element.process(field, marks, count);
      for (let i = 0; i < count; i++) sum[i] += field[i];
    }
    const share = 1 / elements.length;
    for (let i = 0; i < count; i++) values[i] = sum[i] * share;
  }
}

class HallElement {
  clips = 0;
  private readonly relativeSensitivity: number;
  private readonly pole: Pole;
  private readonly white: RandomStream;
  private readonly whiteTesla: number;
  private readonly flicker: Lines | null;
  private readonly wander: Lines | null;
  private readonly phases: readonly BiasPhase[];
  private readonly phaseSteps: number;
  private readonly plateTesla: number;
  private readonly cubic: number;
  /** Where f(B) would turn back. */
  private readonly turnTesla: number;
  private readonly normals: Float64Array;
  private line: SensorLine = { restVolts: 0, voltsPerTesla: 0 };
  private swingRatio = 1;
  private phase = 0;
  private stepsLeft: number;

  constructor(private readonly sensor: SensorUnit, options: SensorOptions, index: number) {
    const { stepSeconds, gridFactor, capacity, seed, trial, scenario = '' } = options;
    const unitStream = (source: string) => new RandomStream(seed, trial, `sensor ${index + 1} ${source}`);
    const stream = (source: string) => unitStream(`${source} ${scenario}`);
    const mismatch = trial === 0 || sensor.count === 1 ? 0 : sensor.mismatch_percent * 1e-2;
    this.relativeSensitivity = mismatch === 0 ? 1 : 1 + mismatch * (2 * unitStream('mismatch').uniform() - 1);
    this.pole = new Pole(sensor.bandwidth_kHz * 1e3, stepSeconds);
    this.white = stream('noise');
    const density = sensor.noise_uT_per_rtHz * 1e-6;
    const flickerPower = density * density * sensor.noiseCorner_Hz;
    const plan = flickerPower > 0 ? flickerPlan(sensor.noiseCorner_Hz, stepSeconds) : null;
    this.whiteTesla = plan === null ? density : Math.sqrt(density * density + flickerPower * plan.flatRest);
    this.flicker = plan === null ? null
      : new Lines(new Flicker(plan, flickerPower, stepSeconds, stream('flicker')), plan.interval);
    this.wander = wanderOf(sensor, stepSeconds, stream);
    this.phases = biasPhases(sensor.bias);
    this.phaseSteps = sensor.biasPhase_samples * gridFactor;
    this.stepsLeft = this.phaseSteps;
    this.plateTesla = sensor.plateOffset_mT * 1e-3;
    const share = sensor.nonlinearity_percent * 1e-2;
    this.cubic = share / (sensor.linearTo_mT * 1e-3) ** 2;
    this.turnTesla = share < 0 ? Math.sqrt(-1 / (3 * this.cubic)) : Infinity;
    this.normals = new Float64Array(this.whiteTesla === 0 ? 0 : capacity);
    this.surround({ sensorCelsius: REFERENCE_CELSIUS, supplyRatio: 1 });
  }

  surround(surroundings: Pick<Surroundings, 'sensorCelsius' | 'supplyRatio'>): void {
    const { restVolts, voltsPerTesla } = sensorLine(this.sensor, surroundings);
    this.line = { restVolts, voltsPerTesla: voltsPerTesla * this.relativeSensitivity };
    this.swingRatio = this.sensor.ratiometric ? surroundings.supplyRatio : 1;
  }

  process(values: Float64Array, marks: Uint8Array, count: number): void {
    const { voltsPerTesla } = this.line;
    if (this.cubic !== 0) this.bend(values, marks, count);
    for (let start = 0; start < count;) start = this.plateUntil(values, start, count);
    this.flicker?.add(values, count, voltsPerTesla);
    this.wander?.add(values, count, voltsPerTesla);
    if (this.whiteTesla === 0) {
      this.pole.process(values, count);
    } else {
      this.white.fillNormals(this.normals, count);
      this.pole.processNoisy(values, count, this.whiteTesla * voltsPerTesla, this.normals);
    }
    const { swingLow_V, swingHigh_V } = this.sensor;
    const ratio = this.swingRatio;
    this.clips += clipBlock(values, marks, count, swingLow_V * ratio, swingHigh_V * ratio, CLIP_SENSOR);
  }

  private bend(values: Float64Array, marks: Uint8Array, count: number): void {
    const { cubic, turnTesla } = this;
    if (turnTesla !== Infinity) clipBlock(values, marks, count, -turnTesla, turnTesla, CLIP_SENSOR);
    for (let i = 0; i < count; i++) {
      const tesla = values[i];
      values[i] = tesla + cubic * tesla * tesla * tesla;
    }
  }

  /** Field to volts up to the next switch of the bias; returns where it stopped. */
  private plateUntil(values: Float64Array, start: number, count: number): number {
    const end = Math.min(count, start + this.stepsLeft);
    const phase = this.phases[this.phase];
    const slope = phase.signal * this.line.voltsPerTesla;
    const level = this.line.restVolts + phase.plate * this.plateTesla * this.line.voltsPerTesla;
    for (let i = start; i < end; i++) values[i] = level + slope * values[i];
    this.stepsLeft -= end - start;
    if (this.stepsLeft === 0) {
      this.stepsLeft = this.phaseSteps;
      this.phase = (this.phase + 1) % this.phases.length;
    }
    return end;
  }
}

function wanderOf(sensor: SensorUnit, stepSeconds: number, stream: (source: string) => RandomStream): Lines | null {
  if (sensor.wander_uT_per_rth === 0) return null;
  const interval = Math.max(1, Math.round(WANDER_LINE_SECONDS / stepSeconds));
  const hours = (interval * stepSeconds) / 3600;
  const step = sensor.wander_uT_per_rth * 1e-6 * Math.sqrt(hours);
  return new Lines(new RandomWalk(step, stream('wander')), interval);
}
