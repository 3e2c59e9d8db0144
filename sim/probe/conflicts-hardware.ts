/**
 * Fields of the hardware against each other: limits in the right order, rest and virtual ground between their
 * limits, a gain and a direction that are not zero.
 */
import { mustBeBelow, mustLieWithin, type Note, type Quantity } from './conflict.ts';
import type { Toleranced } from './describe.ts';
import type { Probe } from './fields.ts';

export function hardwareConflicts(probe: Probe, note: Note): void {
  if (probe.direction === 0) note('direction', '0', '1 or -1');
  sensorConflicts(probe.sensor, note);
  amplifierConflicts(probe.amplifier, note);
  const { word_bits, bits } = probe.converter;
  if (word_bits < bits) {
    note('converter.word_bits', `${word_bits} bits`, `converter.bits (${bits} bits) or more`,
      'a code must fit in its word');
  }
  thermometerConflicts(probe, note);
}

function sensorConflicts(sensor: Probe['sensor'], note: Note): void {
  const low = highestOf('sensor.swingLow_V', sensor.swingLow_V);
  const high = lowestOf('sensor.swingHigh_V', sensor.swingHigh_V);
  mustBeBelow(note, low, high);
  if (low.value < high.value) mustLieWithin(note, volts('sensor.rest_V', sensor.rest_V.nominal), low, high);
}

function amplifierConflicts(amplifier: Probe['amplifier'], note: Note): void {
  const low = highestOf('amplifier.railLow_V', amplifier.railLow_V);
  const high = lowestOf('amplifier.railHigh_V', amplifier.railHigh_V);
  mustBeBelow(note, low, high);
  if (low.value < high.value) {
    mustLieWithin(note, volts('amplifier.virtualGround_V', amplifier.virtualGround_V.nominal), low, high);
  }
  const { nominal, tolerance } = amplifier.gain;
  if (nominal === 0) note('amplifier.gain', '0', 'a gain that is not 0', 'without gain no current is seen');
  else if (Math.abs(nominal) <= tolerance) {
    note('amplifier.gain', `${nominal} ± ${tolerance}`, 'a gain that keeps its sign over its tolerance');
  }
}

function thermometerConflicts(probe: Probe, note: Note): void {
  const thermometer = probe.thermometer;
  if (thermometer !== null && thermometer.element === 'linear' && thermometer.slope_mV_per_K.nominal === 0) {
    note('thermometer.slope_mV_per_K', '0 mV/K', 'a slope that is not 0 for a linear element (thermometer.element)');
  }
}

/** The highest that a lower limit gets within its tolerance, and the lowest of an upper one. */
function highestOf(path: string, { nominal, tolerance }: Toleranced): Quantity {
  return volts(path, nominal + tolerance);
}

function lowestOf(path: string, { nominal, tolerance }: Toleranced): Quantity {
  return volts(path, nominal - tolerance);
}

function volts(path: string, value: number): Quantity {
  return { path, value, unit: 'V' };
}
