/**
 * What reaches the sensor leads beside the Hall voltage, the spikes at the edges of a chopped current:
 *   V = area * dB/dt + k * dv/dt      v: voltage of the conductor
 * dB/dt is that of the straight line that ends at a grid point, so the sum of V over a change of B is area * change.
 * Sources: Faraday's law; the current through a stray capacitance, with the leads' impedance as part of k.
 */
import type { CouplingUnit } from './draw.ts';

export class Coupling {
  private readonly voltsPerTeslaStep: number;
  /** mV per V/ns in volts per V/s. */
  private readonly voltsPerSlew: number;
  private tesla = 0;
  private started = false;

  constructor(coupling: CouplingUnit, stepSeconds: number) {
    this.voltsPerTeslaStep = (coupling.loop_mm2 * 1e-6) / stepSeconds;
    this.voltsPerSlew = coupling.slew_mV_per_V_per_ns * 1e-12;
  }

  /** To the sensor's output, in place; field and dv/dt (null: the conductor's voltage stays) at the same points. */
  add(volts: Float64Array, tesla: Float64Array, voltsPerSecond: Float64Array | null, count: number): void {
    if (count === 0) return;
    if (!this.started) {
      this.started = true;
      this.tesla = tesla[0];
    }
    const { voltsPerTeslaStep, voltsPerSlew } = this;
    let before = this.tesla;
    for (let i = 0; i < count; i++) {
      volts[i] += voltsPerTeslaStep * (tesla[i] - before);
      before = tesla[i];
    }
    this.tesla = before;
    if (voltsPerSecond === null || voltsPerSlew === 0) return;
    for (let i = 0; i < count; i++) volts[i] += voltsPerSlew * voltsPerSecond[i];
  }
}
