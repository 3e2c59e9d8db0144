/**
 * A shunt in series with the conductor, its amplifier and an ideal converter over the rails.
 *   R = R25 * (1 + tempco * (T - 25 °C)),  T = ambient behind the thermal lag + theta
 *   theta over one step h: theta1 = theta0 * keep + (1 - keep) * Rth * R * (mean of i^2),  keep = exp(-h/tau)
 *   wanted = rest + gain * (R i + offset + drift * (Tambient - 25 °C)), one pole with its white noise, then the rails
 *   reading = (code's volts - nominal rest) / (nominal gain * nominal R25)
 * The mean of i^2 is that of the straight line between grid points; R is that of the step's beginning. The shunt has
 * carried no current before the first point. Source: textbook heat flow, one thermal resistance and one capacity.
 */
import { CLIP_AMPLIFIER, clipBlock } from './clip.ts';
import type { ShuntUnit } from './draw.ts';
import { Pole } from './pole.ts';
import { RandomStream } from './random.ts';
import { REFERENCE_CELSIUS } from './sensor.ts';

/** Beyond any shunt that still is one; keeps the numbers of one that runs away finite. */
const MOST_KELVIN = 10_000;

export interface ShuntOptions {
  stepSeconds: number;
  /** Most points at once. */
  capacity: number;
  bits: number;
  seed: number;
  trial: number;
}

/** Steady self-heating (K) by a current, with what the heat does to the resistance; Infinity where it runs away. */
export function steadyHeating(shunt: ShuntUnit, amperes: number, ambientCelsius: number = REFERENCE_CELSIUS): number {
  const perKelvin = shunt.tempco_ppm_per_K * 1e-6;
  const cold = shuntOhms(shunt, ambientCelsius) * amperes * amperes * shunt.thermalResistance_K_per_W;
  const warmer = perKelvin * shunt.resistance_mOhm * 1e-3 * amperes * amperes * shunt.thermalResistance_K_per_W;
  return warmer < 1 ? cold / (1 - warmer) : Infinity;
}

export function shuntOhms({ resistance_mOhm, tempco_ppm_per_K }: ShuntUnit, celsius: number): number {
  return resistance_mOhm * 1e-3 * (1 + tempco_ppm_per_K * 1e-6 * (celsius - REFERENCE_CELSIUS));
}

export class Shunt {
  /** What it took from the circuit at worst. */
  mostVolts = 0;
  mostWatts = 0;
  /** Largest self-heating (K), and by how much that moved its gain. */
  mostHeating = 0;
  mostGainShift = 0;
  private readonly keep: number;
  private readonly pole: Pole;
  private readonly noise: RandomStream | null;
  private readonly normals: Float64Array;
  private readonly topCode: number;
  private readonly codeVolts: number;
  private heating = 0;
  private before = 0;
  private started = false;
  private coldOhms = 0;
  private levelVolts = 0;

  /** `nominal`: what the firmware behind it believes. */
  constructor(private readonly unit: ShuntUnit, private readonly nominal: ShuntUnit, options: ShuntOptions) {
    const { stepSeconds, capacity, bits, seed, trial } = options;
    this.keep = unit.timeConstant_s > 0 ? Math.exp(-stepSeconds / unit.timeConstant_s) : 0;
    this.pole = new Pole(unit.bandwidth_kHz * 1e3, stepSeconds);
    this.noise = unit.noise_nV_per_rtHz > 0 ? new RandomStream(seed, trial, 'shunt noise') : null;
    this.normals = new Float64Array(capacity);
    this.topCode = 2 ** bits - 1;
    this.codeVolts = (nominal.railHigh_V - nominal.railLow_V) / 2 ** bits;
    this.surround(REFERENCE_CELSIUS, REFERENCE_CELSIUS);
  }

  /** Temperature that the shunt has without current, and that of its amplifier. */
  surround(shuntCelsius: number, amplifierCelsius: number): void {
    const { gain, rest_V, offset_mV, offsetDrift_uV_per_K } = this.unit;
    this.coldOhms = shuntOhms(this.unit, shuntCelsius);
    const offsetVolts = offset_mV * 1e-3 + offsetDrift_uV_per_K * 1e-6 * (amplifierCelsius - REFERENCE_CELSIUS);
    this.levelVolts = rest_V + gain * offsetVolts;
  }

  /** Amperes in, volts at the converter out, in place; points at a rail are marked CLIP_AMPLIFIER. */
  process(values: Float64Array, marks: Uint8Array, count: number): void {
    if (count === 0) return;
    this.throughResistor(values, count);
    const { gain, noise_nV_per_rtHz, railLow_V, railHigh_V } = this.unit;
    if (this.noise === null) this.pole.process(values, count);
    else {
      this.noise.fillNormals(this.normals, count);
      this.pole.processNoisy(values, count, noise_nV_per_rtHz * 1e-9 * Math.abs(gain), this.normals);
    }
    clipBlock(values, marks, count, railLow_V, railHigh_V, CLIP_AMPLIFIER);
  }

  /** What the converter and the nominal gain make of the volts at one instant. */
  readingAmperes(volts: number): number {
    const { railLow_V, rest_V, gain, resistance_mOhm } = this.nominal;
    const code = Math.min(this.topCode, Math.max(0, Math.floor((volts - railLow_V) / this.codeVolts + 0.5)));
    return (railLow_V + code * this.codeVolts - rest_V) / (gain * resistance_mOhm * 1e-3);
  }

  private throughResistor(values: Float64Array, count: number): void {
    const { unit, keep, coldOhms, levelVolts } = this;
    const { gain } = unit;
    const ohmsPerKelvin = unit.resistance_mOhm * 1e-3 * unit.tempco_ppm_per_K * 1e-6;
    const kelvinPerWatt = ((1 - keep) * unit.thermalResistance_K_per_W) / 3;
    let { heating, before, mostVolts, mostWatts, mostHeating } = this;
    let first = !this.started;
    this.started = true;
    for (let i = 0; i < count; i++) {
      const amperes = values[i];
      if (!first) {
        const squares = amperes * amperes + amperes * before + before * before;
        heating = keep * heating + kelvinPerWatt * (coldOhms + ohmsPerKelvin * heating) * squares;
        if (heating > MOST_KELVIN) heating = MOST_KELVIN;
      }
      first = false;
      before = amperes;
      const volts = (coldOhms + ohmsPerKelvin * heating) * amperes;
      if (volts > mostVolts) mostVolts = volts;
      else if (-volts > mostVolts) mostVolts = -volts;
      if (volts * amperes > mostWatts) mostWatts = volts * amperes;
      if (heating > mostHeating) mostHeating = heating;
      values[i] = levelVolts + gain * volts;
    }
    this.heating = heating;
    this.before = before;
    this.mostVolts = mostVolts;
    this.mostWatts = mostWatts;
    if (mostHeating > this.mostHeating) {
      this.mostHeating = mostHeating;
      this.mostGainShift = (ohmsPerKelvin * mostHeating) / coldOhms;
    }
  }
}
