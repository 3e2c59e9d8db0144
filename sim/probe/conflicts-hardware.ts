/**
 * Fields of the hardware against each other: limits in the right order, rest and virtual ground between their
 * limits, a gain and a direction that are not zero, one model of magnetic memory with all that it needs, and no field
 * that another one keeps from having any effect.
 */
import { withUnit } from './allowed.ts';
import { mustBeBelow, mustLieWithin, type Note, type Quantity } from './conflict.ts';
import type { Toleranced } from './describe.ts';
import type { Probe } from './fields.ts';
import { pathTo } from './problem.ts';

export function hardwareConflicts(probe: Probe, note: Note): void {
  if (probe.direction === 0) note('direction', '0', '1 or -1');
  memoryConflicts(probe.core, note);
  sensorConflicts(probe.sensor, note);
  amplifierConflicts(probe.amplifier, note);
  const { word_bits, bits } = probe.converter;
  if (word_bits < bits) {
    note('converter.word_bits', `${word_bits} bits`, `converter.bits (${bits} bits) or more`,
      'a code must fit in its word');
  }
  if (probe.converter.reference === 'supply' && !isNothing(probe.converter.referenceDrift_ppm_per_K)) {
    note('converter.referenceDrift_ppm_per_K', `${probe.converter.referenceDrift_ppm_per_K.nominal} ppm/K`,
      '0, or left out, as converter.reference is "supply"', 'only a fixed reference has a drift of its own');
  }
  thermometerConflicts(probe, note);
  if (probe.shunt !== null) shuntConflicts(probe.shunt, note);
  if (probe.transformer !== null) transformerConflicts(probe.transformer, note);
}

function memoryConflicts({ play, jilesAtherton }: Probe['core'], note: Note): void {
  // of a core that could not be read nobody knows which parts it was meant to have
  const unread = (value: Toleranced | null | undefined): boolean => Number.isNaN(value?.nominal);
  if (unread(play?.coercivity_A_per_m) || unread(jilesAtherton?.saturation_kA_per_m)) return;
  if (play !== null && jilesAtherton !== null) {
    note('core.jilesAtherton', 'a group of fields', 'left out, as core.play is given', 'one model of memory is enough');
  }
  if (play !== null) playConflicts(play, note);
  if (jilesAtherton !== null) anhystereticConflict(jilesAtherton, note);
}

type Play = NonNullable<Probe['core']['play']>;
const OF_THE_LOOP = ['coercivity_A_per_m', 'remanence_T', 'saturation_T'] as const;

/** Either all three numbers, or the file of a loop. */
function playConflicts(play: Play, note: Note): void {
  const given = OF_THE_LOOP.filter((name) => play[name] !== null);
  const all = OF_THE_LOOP.join(', ');
  if (play.loopFile !== '') {
    for (const name of given) {
      note(pathTo('core.play', name), withUnit(play[name]!.nominal, ''),
        'left out, as core.play.loopFile is given', 'the loop tells it');
    }
    return;
  }
  if (given.length === 0) {
    note('core.play.loopFile', 'nothing', `the file of a loop, or instead of it ${all}`);
    return;
  }
  for (const name of OF_THE_LOOP) {
    if (play[name] === null) {
      note(pathTo('core.play', name), 'nothing', `a number, as core.play has ${given.join(', ')}`,
        `give ${all}, or a loopFile alone`);
    }
  }
  if (play.remanence_T === null || play.saturation_T === null) return;
  mustBeBelow(note, { ...highestOf('core.play.remanence_T', play.remanence_T), unit: 'T' },
    { ...lowestOf('core.play.saturation_T', play.saturation_T), unit: 'T' });
}

/**
 * Beyond alpha Ms = 3 a the anhysteretic curve jumps at H = 0: the slope of L(x) is 1/3 there, and each A/m adds alpha
 * times its M (D. C. Jiles, D. L. Atherton, "Theory of ferromagnetic hysteresis", J. Magn. Magn. Mater. 61 (1986) 48).
 */
function anhystereticConflict(material: NonNullable<Probe['core']['jilesAtherton']>, note: Note): void {
  const most = (3 * material.shape_A_per_m.nominal) / (material.saturation_kA_per_m.nominal * 1e3);
  if (material.coupling.nominal >= most) {
    note('core.jilesAtherton.coupling', String(material.coupling.nominal),
      `below ${most}, 3 times shape_A_per_m over saturation_kA_per_m`, 'beyond it the anhysteretic curve jumps');
  }
}

function isNothing({ nominal, tolerance }: Toleranced): boolean {
  // a field that is broken itself says nothing either
  return !(nominal !== 0 || tolerance > 0) || Number.isNaN(nominal);
}

function sensorConflicts(sensor: Probe['sensor'], note: Note): void {
  const low = highestOf('sensor.swingLow_V', sensor.swingLow_V);
  const high = lowestOf('sensor.swingHigh_V', sensor.swingHigh_V);
  mustBeBelow(note, low, high);
  if (low.value < high.value) mustLieWithin(note, volts('sensor.rest_V', sensor.rest_V.nominal), low, high);
  if (sensor.mismatch_percent > 0 && sensor.count === 1) {
    note('sensor.mismatch_percent', `${sensor.mismatch_percent} %`, '0, or left out, as sensor.count is 1',
      'the spread of one sensor is the tolerance of its sensitivity');
  }
  const { noise_uT_per_rtHz: noise, noiseCorner_Hz: corner } = sensor;
  if (noise.nominal === 0 && noise.tolerance === 0 && !isNothing(corner)) {
    note('sensor.noiseCorner_Hz', `${corner.nominal} Hz`, '0, or left out, as sensor.noise_uT_per_rtHz is 0',
      'the corner tells where 1/f noise exceeds that');
  }
}

function amplifierConflicts(amplifier: Probe['amplifier'], note: Note): void {
  const low = highestOf('amplifier.railLow_V', amplifier.railLow_V);
  const high = lowestOf('amplifier.railHigh_V', amplifier.railHigh_V);
  mustBeBelow(note, low, high);
  if (low.value < high.value) {
    mustLieWithin(note, volts('amplifier.virtualGround_V', amplifier.virtualGround_V.nominal), low, high);
  }
  gainConflict('amplifier.gain', amplifier.gain, note);
}

function gainConflict(path: string, { nominal, tolerance }: Toleranced, note: Note): void {
  if (nominal === 0) note(path, '0', 'a gain that is not 0', 'without gain no current is seen');
  else if (Math.abs(nominal) <= tolerance) {
    note(path, `${nominal} ± ${tolerance}`, 'a gain that keeps its sign over its tolerance');
  }
}

function thermometerConflicts(probe: Probe, note: Note): void {
  const thermometer = probe.thermometer;
  if (thermometer !== null && thermometer.element === 'linear' && thermometer.slope_mV_per_K.nominal === 0) {
    note('thermometer.slope_mV_per_K', '0 mV/K', 'a slope that is not 0 for a linear element (thermometer.element)');
  }
}

function shuntConflicts(shunt: NonNullable<Probe['shunt']>, note: Note): void {
  const low = highestOf('shunt.railLow_V', shunt.railLow_V);
  const high = lowestOf('shunt.railHigh_V', shunt.railHigh_V);
  mustBeBelow(note, low, high);
  if (low.value < high.value) mustLieWithin(note, volts('shunt.rest_V', shunt.rest_V.nominal), low, high);
  gainConflict('shunt.gain', shunt.gain, note);
}

function transformerConflicts(transformer: NonNullable<Probe['transformer']>, note: Note): void {
  const { nominal, tolerance } = transformer.saturatedShare_percent;
  if (nominal + tolerance > 100) {
    note('transformer.saturatedShare_percent', `${nominal} ± ${tolerance} %`, '100 % at most over its tolerance');
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
