/**
 * Linear Hall sensor: field in the gap (T) to output (V).
 *   V = rest + S * (signalSign * B + plateSign * plateOffset + noise), one pole, then clipped to the swing
 *   rest = (rest_V + restDrift * (T - 25 °C)) * supply ratio,  S = S25 * (1 + drift * (T - 25 °C)) * supply ratio
 * The supply ratio (supply over nominal supply) counts for a ratiometric sensor only, else it is 1. The signs are those
 * of the switched bias. Noise is white before the pole.
 */
import { biasPhases, type BiasPhase } from './bias.ts';
import { CLIP_SENSOR, clipBlock } from './clip.ts';
import type { SensorUnit } from './draw.ts';
import { Pole } from './pole.ts';
import type { Xoshiro128 } from './random.ts';

export const REFERENCE_CELSIUS = 25;

/** What surrounds the probe during a scenario. */
export interface Surroundings {
  celsius: number;
  /** Supply over nominal supply. */
  supplyRatio: number;
}

export interface SensorLine {
  restVolts: number;
  voltsPerTesla: number;
}

export function sensorLine(sensor: SensorUnit, { celsius, supplyRatio }: Surroundings): SensorLine {
  const ratio = sensor.ratiometric ? supplyRatio : 1;
  const warmer = celsius - REFERENCE_CELSIUS;
  const relative = 1 + sensor.sensitivityDrift_ppm_per_K * 1e-6 * warmer;
  return {
    restVolts: (sensor.rest_V + sensor.restDrift_mV_per_K * 1e-3 * warmer) * ratio,
    // mV/mT is V/T
    voltsPerTesla: sensor.sensitivity_mV_per_mT * relative * ratio,
  };
}

export class Sensor {
  /** Grid points clipped so far. */
  clips = 0;
  private readonly line: SensorLine;
  private readonly pole: Pole;
  private readonly voltsPerRootHertz: number;
  private readonly phases: readonly BiasPhase[];
  private readonly phaseSteps: number;
  private readonly plateTesla: number;
  private readonly normals: Float64Array;
  private phase = 0;
  private stepsLeft: number;

  /** `capacity`: most grid points in one call. */
  constructor(
    private readonly sensor: SensorUnit, surroundings: Surroundings, stepSeconds: number, gridFactor: number,
    private readonly noise: Xoshiro128, capacity: number,
  ) {
    this.line = sensorLine(sensor, surroundings);
    this.pole = new Pole(sensor.bandwidth_kHz * 1e3, stepSeconds);
    this.voltsPerRootHertz = sensor.noise_uT_per_rtHz * 1e-6 * this.line.voltsPerTesla;
    this.phases = biasPhases(sensor.bias);
    this.phaseSteps = sensor.biasPhase_samples * gridFactor;
    this.stepsLeft = this.phaseSteps;
    this.plateTesla = sensor.plateOffset_mT * 1e-3;
    this.normals = new Float64Array(capacity);
  }

  /** Tesla in, volts out, in place. */
  process(values: Float64Array, marks: Uint8Array, count: number): void {
    for (let start = 0; start < count;) start = this.plateUntil(values, start, count);
    if (this.voltsPerRootHertz === 0) {
      this.pole.process(values, count);
    } else {
      this.noise.fillNormals(this.normals, count);
      this.pole.processNoisy(values, count, this.voltsPerRootHertz, this.normals);
    }
    const { swingLow_V, swingHigh_V } = this.sensor;
    this.clips += clipBlock(values, marks, count, swingLow_V, swingHigh_V, CLIP_SENSOR);
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
