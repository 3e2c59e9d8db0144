/**
 * What surrounds the parts of a probe over a scenario: temperatures and the supply.
 *   ambient a(t): straight lines between the points of the profile, held beyond its ends
 *   a part      tau dy/dt = a - y, in equilibrium with the ambient at time 0
 *   supply      (start - sag * t) / nominal, not below 0
 * On one straight line of slope s from t0 the lag is solved exactly, with d = t - t0 and e = 1 - exp(-d/tau):
 *   y = y0 + (a0 - y0) * e + s * (d - tau * e)
 * Everything is computed from the time alone, so that nothing depends on when it is asked. Source: textbook linear
 * systems, ramp response of a first-order lag.
 */
import type { Scenario } from '../probe/fields.ts';
import type { Unit } from './draw.ts';

/** What surrounds the parts at one moment. */
export interface Surroundings {
  sensorCelsius: number;
  amplifierCelsius: number;
  /** That of the amplifier: they share a board. */
  converterCelsius: number;
  thermometerCelsius: number;
  /** Supply over nominal. */
  supplyRatio: number;
}

/** Parts see steps at most this far apart when something changes. */
const LONGEST_EPOCH_SECONDS = 1e-3;

/** A/D samples over which surroundings count as steady. */
export function epochSamples(rateHz: number): number {
  // a round rate must not lose a sample by the last bit of a product
  return Math.max(1, Math.floor(rateHz * LONGEST_EPOCH_SECONDS + 1e-9));
}

export class ChangingSurroundings {
  /** false: the same throughout. */
  readonly changes: boolean;
  private readonly sensor: ThermalLag;
  private readonly amplifier: ThermalLag;
  private readonly thermometer: ThermalLag;
  private readonly startRatio: number;
  private readonly ratioPerSecond: number;

  constructor(scenario: Scenario, unit: Unit, nominalSupplyVolts: number) {
    const ambient = ambientLines(scenario);
    this.sensor = new ThermalLag(ambient, unit.sensor.timeConstant_s);
    this.amplifier = new ThermalLag(ambient, unit.amplifier.timeConstant_s);
    this.thermometer = new ThermalLag(ambient, unit.thermometer?.timeConstant_s ?? 0);
    this.startRatio = (scenario.supply_V ?? unit.supply_V) / nominalSupplyVolts;
    this.ratioPerSecond = (scenario.supplySag_mV_per_s * 1e-3) / nominalSupplyVolts;
    this.changes = this.ratioPerSecond > 0 || ambient.some(({ slope }) => slope !== 0);
  }

  at(seconds: number): Surroundings {
    const amplifierCelsius = this.amplifier.at(seconds);
    return {
      sensorCelsius: this.sensor.at(seconds), amplifierCelsius, converterCelsius: amplifierCelsius,
      thermometerCelsius: this.thermometer.at(seconds),
      supplyRatio: Math.max(0, this.startRatio - this.ratioPerSecond * seconds),
    };
  }
}

/** The ambient from here on, until the next line begins. */
export interface AmbientLine {
  seconds: number;
  celsius: number;
  /** K/s */
  slope: number;
}

/** From time 0 on; the last line is level. */
export function ambientLines(scenario: Scenario): AmbientLine[] {
  const points = scenario.ambient.map(
    ({ at_ms, temperature_C }) => ({ seconds: at_ms * 1e-3, celsius: temperature_C }));
  if (points.length === 0) return [{ seconds: 0, celsius: scenario.temperature_C, slope: 0 }];
  if (points[0].seconds > 0) points.unshift({ seconds: 0, celsius: points[0].celsius });
  return points.map(({ seconds, celsius }, i) => {
    const next = points[i + 1];
    return { seconds, celsius, slope: next === undefined ? 0 : (next.celsius - celsius) / (next.seconds - seconds) };
  });
}

export class ThermalLag {
  /** The part's own temperature where each line begins. */
  private readonly own: number[];
  private current = 0;

  constructor(private readonly lines: readonly AmbientLine[], private readonly tauSeconds: number) {
    this.own = [lines[0].celsius];
    for (let i = 1; i < lines.length; i++) this.own.push(this.along(i - 1, lines[i].seconds));
  }

  at(seconds: number): number {
    const { lines } = this;
    // times mostly come in order, but need not
    let i = seconds >= lines[this.current].seconds ? this.current : 0;
    while (i + 1 < lines.length && lines[i + 1].seconds <= seconds) i++;
    this.current = i;
    return this.along(i, seconds);
  }

  private along(index: number, seconds: number): number {
    const { seconds: from, celsius, slope } = this.lines[index];
    const passed = seconds - from;
    const { tauSeconds } = this;
    if (tauSeconds === 0) return celsius + slope * passed;
    const own = this.own[index];
    const moved = -Math.expm1(-passed / tauSeconds);
    return own + (celsius - own) * moved + slope * (passed - tauSeconds * moved);
  }
}
