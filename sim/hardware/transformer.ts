/**
 * A current transformer: an ideal turns ratio, and beside it the magnetising inductance L that takes what is slow.
 *   d psi/dt = R * (i/N - im),  R = winding + burden,  volts at the burden = Rburden * (i/N - im)
 *   im = psi/L within the saturation flux linkage S, beyond it im = S/L + (psi - S)/(share * L), and the same negative
 * In each of the three regions that is one pole with tau = L/R or share * L/R, solved exactly for a current of straight
 * lines between grid points (first-order hold, pole.ts); a step that ends in another region is cut where it crosses.
 * Leaving a region and coming back within one step is not seen. What is fast ends at a pole of leakage and capacitance.
 * Starts in steady state: a current that was always there is all in im. Source: the transformer's equivalent circuit
 * referred to the secondary, in any textbook of electrical machines; volt-seconds: Faraday's law.
 */
import { CLIP_SENSOR } from './clip.ts';
import type { TransformerUnit } from './draw.ts';
import { Pole, poleWeights, type PoleWeights } from './pole.ts';

/** Of one step; through all three regions it takes two. */
const MOST_CROSSINGS = 4;
const HALVINGS = 52;

export function loopOhms({ burden_ohm, winding_ohm }: TransformerUnit): number {
  return burden_ohm + winding_ohm;
}

/** Time constant of the droop. */
export function droopSeconds(transformer: TransformerUnit): number {
  return (transformer.magnetising_mH * 1e-3) / loopOhms(transformer);
}

/** Below this frequency a sine of that amplitude saturates the core; 0: never. |psi| = (i/N) R L / |R + j w L|. */
export function saturationHz(transformer: TransformerUnit, peakAmperes: number): number {
  const { saturation_V_ms, magnetising_mH, turns } = transformer;
  if (saturation_V_ms === null) return 0;
  const over = (peakAmperes / turns) * (magnetising_mH / saturation_V_ms);
  return over <= 1 ? 0 : Math.sqrt(over * over - 1) / (2 * Math.PI * droopSeconds(transformer));
}

export class Transformer {
  /** Grid points until the core was saturated for the first time; null: it was not. */
  pointsToSaturation: number | null = null;
  private readonly henries: number;
  private readonly saturatedHenries: number;
  private readonly limitVoltSeconds: number;
  private readonly ohms: number;
  private readonly linear: PoleWeights;
  private readonly saturated: PoleWeights;
  private readonly leakage: Pole;
  /** Flux linkage (V s). */
  private flux = 0;
  /** 0: linear, 1 and -1: saturated. */
  private region = 0;
  private before = 0;
  private started = false;
  private points = 0;

  /** `nominal`: what whoever reads it believes. */
  constructor(
    private readonly unit: TransformerUnit, private readonly nominal: TransformerUnit,
    private readonly stepSeconds: number,
  ) {
    this.ohms = loopOhms(unit);
    this.henries = unit.magnetising_mH * 1e-3;
    this.saturatedHenries = this.henries * unit.saturatedShare_percent * 1e-2;
    this.limitVoltSeconds = unit.saturation_V_ms === null ? Infinity : unit.saturation_V_ms * 1e-3;
    this.linear = this.weights(0, stepSeconds);
    this.saturated = this.weights(1, stepSeconds);
    this.leakage = new Pole(unit.bandwidth_kHz * 1e3, stepSeconds);
  }

  /** Amperes in, volts at the burden out, in place; points with a saturated core are marked CLIP_SENSOR. */
  process(values: Float64Array, marks: Uint8Array, count: number): void {
    if (count === 0) return;
    const perTurn = 1 / this.unit.turns;
    if (!this.started) this.begin(values[0] * perTurn);
    const { burden_ohm } = this.unit;
    for (let i = 0; i < count; i++) {
      const amperes = values[i] * perTurn;
      this.step(amperes);
      if (this.region !== 0) {
        marks[i] |= CLIP_SENSOR;
        this.pointsToSaturation ??= this.points + i;
      }
      values[i] = burden_ohm * (amperes - this.magnetisingAmperes());
    }
    this.points += count;
    this.leakage.process(values, count);
  }

  /** What nominal turns and burden make of the volts at one instant. */
  readingAmperes(volts: number): number {
    return (volts * this.nominal.turns) / this.nominal.burden_ohm;
  }

  private begin(amperes: number): void {
    const { henries, saturatedHenries, limitVoltSeconds } = this;
    this.started = true;
    this.before = amperes;
    const flux = henries * Math.abs(amperes);
    if (flux <= limitVoltSeconds) this.flux = henries * amperes;
    else {
      this.region = Math.sign(amperes);
      this.flux = this.region * (limitVoltSeconds + (saturatedHenries / henries) * (flux - limitVoltSeconds));
    }
  }

  private magnetisingAmperes(): number {
    const { flux, region, henries, saturatedHenries, limitVoltSeconds } = this;
    if (region === 0) return flux / henries;
    return region * (limitVoltSeconds / henries) + (flux - region * limitVoltSeconds) / saturatedHenries;
  }

  private step(amperes: number): void {
    const { before, region } = this;
    this.before = amperes;
    const flux = this.along(region === 0 ? this.linear : this.saturated, before, amperes);
    if (this.stays(flux)) this.flux = flux;
    else this.crossing(before, amperes);
  }

  private crossing(from: number, to: number): void {
    let seconds = this.stepSeconds;
    for (let crossings = 0; crossings < MOST_CROSSINGS; crossings++) {
      const end = this.along(this.weights(this.region, seconds), from, to);
      if (this.stays(end)) {
        this.flux = end;
        return;
      }
      const edge = (this.region === 0 ? Math.sign(end) : this.region) * this.limitVoltSeconds;
      const share = this.shareInRegion(from, to, seconds);
      from += (to - from) * share;
      seconds -= share * seconds;
      this.flux = edge;
      this.region = this.region === 0 ? Math.sign(edge) : 0;
    }
  }

  /** How much of the time passes before the flux leaves its region, by halving. */
  private shareInRegion(from: number, to: number, seconds: number): number {
    let inside = 0;
    let outside = 1;
    for (let n = 0; n < HALVINGS; n++) {
      const middle = (inside + outside) / 2;
      const flux = this.along(this.weights(this.region, seconds * middle), from, from + (to - from) * middle);
      if (this.stays(flux)) inside = middle;
      else outside = middle;
    }
    return outside;
  }

  private stays(flux: number): boolean {
    const { region, limitVoltSeconds } = this;
    if (region === 0) return flux <= limitVoltSeconds && flux >= -limitVoltSeconds;
    return region * flux >= limitVoltSeconds;
  }

  /** The flux after the time of the weights, in the present region, while the current goes straight from..to. */
  private along({ k1, k0 }: PoleWeights, from: number, to: number): number {
    const { flux, region, henries, saturatedHenries, limitVoltSeconds } = this;
    const inductance = region === 0 ? henries : saturatedHenries;
    // where the flux would settle without current in the loop
    const level = region === 0 ? 0 : region * limitVoltSeconds * (1 - saturatedHenries / henries);
    return flux + k1 * (level + inductance * to - flux) + k0 * (level + inductance * from - flux);
  }

  private weights(region: number, seconds: number): PoleWeights {
    const henries = region === 0 ? this.henries : this.saturatedHenries;
    return poleWeights(this.ohms / (2 * Math.PI * henries), seconds);
  }
}
