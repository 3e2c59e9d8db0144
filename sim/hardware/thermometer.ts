/**
 * Thermometer beside the sensor: temperature to the code of its own converter, and back.
 *   thermistor  R = R25 * exp(beta * (1/T - 1/298.15 K)), T in kelvin
 *   platinum    R = R0 * (1 + A t + B t^2), and + C (t - 100) t^3 in the bracket below 0 °C (valid from -200 to 850 °C)
 *   linear      V = at25 + slope * (t - 25 °C)
 * Resistors: the reference feeds series_ohm, the element goes to ground: code = 2^bits * R / (R + series), whatever the
 * reference is. Sources: beta equation, textbook; IEC 60751:2008 for platinum.
 */
import type { ThermometerUnit } from './draw.ts';

const KELVIN = 273.15;
const WARM_KELVIN = 298.15;
const A = 3.9083e-3;
const B = -5.775e-7;
const C = -4.183e-12;

export function elementOhms(values: ThermometerUnit, celsius: number): number {
  const { element, resistance_ohm, beta_K } = values;
  if (element === 'thermistor') return resistance_ohm * Math.exp(beta_K * (1 / (celsius + KELVIN) - 1 / WARM_KELVIN));
  if (element === 'platinum') return resistance_ohm * platinumRatio(celsius);
  throw new TypeError('element: a linear element has no resistance, allowed thermistor or platinum');
}

function platinumRatio(celsius: number): number {
  const quadratic = 1 + celsius * (A + celsius * B);
  return celsius < 0 ? quadratic + C * (celsius - 100) * celsius ** 3 : quadratic;
}

/** The code before rounding and limits. */
export function thermometerCodeUnrounded(values: ThermometerUnit, celsius: number): number {
  const full = 2 ** values.bits;
  if (values.element === 'linear') {
    return (full * (values.at25_V + values.slope_mV_per_K * 1e-3 * (celsius - 25))) / values.reference_V;
  }
  const ohms = elementOhms(values, celsius);
  // written so that an infinite resistance gives full scale
  return full / (1 + values.series_ohm / ohms);
}

/** The code as firmware reads it. */
export function thermometerCode(values: ThermometerUnit, celsius: number): number {
  const code = Math.floor(thermometerCodeUnrounded(values, celsius) + 0.5);
  return Math.max(0, Math.min(2 ** values.bits - 1, code));
}

/** The temperature that gives this code (a fraction is allowed); infinite where no temperature gives it. */
export function celsiusOfCode(values: ThermometerUnit, code: number): number {
  const share = code / 2 ** values.bits;
  if (values.element === 'linear') {
    if (values.slope_mV_per_K === 0) throw new RangeError('thermometer.slope_mV_per_K: found 0, allowed a slope not 0');
    return 25 + (share * values.reference_V - values.at25_V) / (values.slope_mV_per_K * 1e-3);
  }
  if (!(share < 1)) return values.element === 'thermistor' ? -Infinity : Infinity;
  const ratio = (values.series_ohm * share) / (1 - share) / values.resistance_ohm;
  return values.element === 'thermistor' ? thermistorCelsius(ratio, values.beta_K) : platinumCelsius(ratio);
}

function thermistorCelsius(ratio: number, beta: number): number {
  const inverse = 1 / WARM_KELVIN + Math.log(ratio) / beta;
  // a resistance below that of an infinitely hot element
  return inverse > 0 ? 1 / inverse - KELVIN : Infinity;
}

function platinumCelsius(ratio: number): number {
  const square = A * A - 4 * B * (1 - ratio);
  if (square < 0) return Infinity;
  // the root that is 0 at ratio 1, written without cancellation
  let celsius = (2 * (ratio - 1)) / (A + Math.sqrt(square));
  if (ratio >= 1) return celsius;
  for (let i = 0; i < 50; i++) {
    const slope = A + 2 * B * celsius + C * (4 * celsius - 300) * celsius ** 2;
    const step = (platinumRatio(celsius) - ratio) / slope;
    celsius -= step;
    if (Math.abs(step) < 1e-12) break;
  }
  return celsius;
}
