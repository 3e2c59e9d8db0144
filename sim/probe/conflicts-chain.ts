/**
 * Stages of the chain against the hardware and against each other, as far as engineering units tell: the bias, the
 * thermometer, codes that the converter has, corners below half the sample rate, tables in order, names of meters.
 * Whether the stages join in this order is for tuning to say, which knows what each stage takes and gives.
 */
import { oneOf, withUnit } from './allowed.ts';
import {
  mustAscend, mustBeBelow, mustDiffer, mustLieWithin, mustNotExceed, type Note, type Quantity,
} from './conflict.ts';
import type { Probe, StageSpec, StageSpecOf } from './fields.ts';
import { pathTo } from './problem.ts';

export function chainConflicts(probe: Probe, note: Note): void {
  probe.chain.forEach((stage, index) => {
    const path = pathTo('chain', index);
    const ahead = probe.chain.slice(0, index);
    stageConflicts(stage, path, probe, ahead, note);
  });
  const meters = metersOf(probe);
  mustDiffer(note, meters.map((meter) => ({ path: pathTo(meter.path, 'name'), name: meter.spec.name })));
  const bias = probe.sensor.bias;
  const mayDemodulate = (stage: StageSpec) => ['demodulate', 'custom', ''].includes(stage.stage);
  if (bias !== 'steady' && (bias as string) !== '' && probe.chain.length > 0 && !probe.chain.some(mayDemodulate)) {
    note('sensor.bias', JSON.stringify(bias), '"steady", as no stage of the chain demodulates',
      'add { "stage": "demodulate" }');
  }
}

export function metersOf(probe: Probe): { path: string; spec: StageSpecOf<'meter'> }[] {
  return probe.chain.flatMap((spec, index) => (
    spec.stage === 'meter' ? [{ path: pathTo('chain', index), spec }] : []
  ));
}

function stageConflicts(stage: StageSpec, path: string, probe: Probe, ahead: StageSpec[], note: Note): void {
  switch (stage.stage) {
    case 'intake': return codeConflict(pathTo(path, 'midCode'), stage.midCode, probe, note);
    case 'overRange': return overRangeConflicts(stage, path, probe, note);
    case 'despike': return despikeConflicts(stage, path, note);
    case 'demodulate': return demodulateConflicts(stage, path, probe, ahead, note);
    case 'thermometer': return thermometerConflicts(stage, path, probe, note);
    case 'offsetTrim':
    case 'gainTrim': return trimConflicts(stage, path, probe, ahead, note);
    case 'zero': return zeroConflicts(stage, path, probe, note);
    case 'linearise': return lineariseConflicts(stage, path, note);
    case 'sections': return sectionConflicts(stage, path, rateAhead(probe, ahead), note);
    case 'average': return lengthConflict(pathTo(path, 'length_ms'), stage.length_ms, rateAhead(probe, ahead), note);
    case 'meter': return lengthConflict(pathTo(path, 'window_ms'), stage.window_ms, rateAhead(probe, ahead), note);
    case 'custom': return customConflicts(stage, path, note);
  }
}

/** The rate that samples have in front of a stage; other stages than decimate could only lower it further. */
export function rateAhead(probe: Probe, ahead: StageSpec[]): Quantity {
  let value = probe.converter.rate_kHz;
  let path = 'converter.rate_kHz';
  for (const stage of ahead) {
    if (stage.stage !== 'decimate') continue;
    value /= stage.ratio;
    path = 'converter.rate_kHz over each ratio ahead';
  }
  return { path, value, unit: 'kHz' };
}

function codeConflict(path: string, code: number | null, probe: Probe, note: Note): void {
  if (code === null) return;
  const { bits, format } = probe.converter;
  const codes = 2 ** bits;
  const lowest = format === "two's complement" ? -codes / 2 : 0;
  if ((format as string) === '' || !(code < lowest || code >= lowest + codes)) return;
  note(path, `${code} codes`, `${lowest} to ${lowest + codes - 1}, which converter.bits (${bits}) and ` +
    `converter.format (${format}) allow`);
}

function overRangeConflicts(stage: StageSpecOf<'overRange'>, path: string, probe: Probe, note: Note): void {
  const { lowCode, highCode } = stage;
  codeConflict(pathTo(path, 'lowCode'), lowCode, probe, note);
  codeConflict(pathTo(path, 'highCode'), highCode, probe, note);
  if (lowCode !== null && highCode !== null) {
    mustBeBelow(note, { path: pathTo(path, 'lowCode'), value: lowCode, unit: '' },
      { path: pathTo(path, 'highCode'), value: highCode, unit: '' });
  }
  if (stage.stuckAfter_samples === 1) {
    note(pathTo(path, 'stuckAfter_samples'), '1 samples', '0 (not watched), or 2 and more',
      'one code alone is always identical with itself');
  }
}

function despikeConflicts(stage: StageSpecOf<'despike'>, path: string, note: Note): void {
  if (stage.window_samples === 4) {
    note(pathTo(path, 'window_samples'), '4 samples', '3 or 5 samples', 'a median takes an odd number');
  }
}

function demodulateConflicts(
  stage: StageSpecOf<'demodulate'>, path: string, probe: Probe, ahead: StageSpec[], note: Note,
): void {
  const { bias, biasPhase_samples } = probe.sensor;
  if (stage.bias !== bias && (bias as string) !== '' && (stage.bias as string) !== '') {
    note(pathTo(path, 'bias'), JSON.stringify(stage.bias), `what sensor.bias says (${JSON.stringify(bias)})`,
      bias === 'steady' ? 'a steady bias needs no demodulation: leave this stage out' : '');
  }
  // Behind a stage that changes the number of samples, a phase has another length than the sensor states.
  if (ahead.some((other) => ['decimate', 'custom', ''].includes(other.stage))) return;
  const phase: Quantity = { path: 'sensor.biasPhase_samples', value: biasPhase_samples, unit: 'samples' };
  mustBeBelow(note, { path: pathTo(path, 'blank_samples'), value: stage.blank_samples, unit: 'samples' }, phase);
  if (stage.longestPhase_samples < biasPhase_samples) {
    note(pathTo(path, 'longestPhase_samples'), `${stage.longestPhase_samples} samples`,
      `${phase.path} (${biasPhase_samples} samples) or more`, 'every phase would count as a bias that does not switch');
  }
}

function thermometerConflicts(stage: StageSpecOf<'thermometer'>, path: string, probe: Probe, note: Note): void {
  needsThermometer(stage, path, probe, note);
  const low: Quantity = { path: pathTo(path, 'lowest_C'), value: stage.lowest_C, unit: '°C' };
  const high: Quantity = { path: pathTo(path, 'highest_C'), value: stage.highest_C, unit: '°C' };
  mustBeBelow(note, low, high);
  if (low.value < high.value) {
    mustLieWithin(note, { path: pathTo(path, 'fallback_C'), value: stage.fallback_C, unit: '°C' }, low, high);
  }
}

function needsThermometer(stage: StageSpec, path: string, probe: Probe, note: Note): void {
  if (probe.thermometer !== null) return;
  note(pathTo(path, 'stage'), JSON.stringify(stage.stage), 'no such stage, as the hardware has no thermometer',
    'describe the hardware under "thermometer", or leave this stage out');
}

function trimConflicts(
  stage: StageSpecOf<'offsetTrim'> | StageSpecOf<'gainTrim'>, path: string, probe: Probe, ahead: StageSpec[],
  note: Note,
): void {
  // without a table of its own a trim still takes out the rest output or the gain of the unit
  if (stage.table.length > 1) needsThermometer(stage, path, probe, note);
  const tellsTemperature = (other: StageSpec) => ['thermometer', 'custom', ''].includes(other.stage);
  if (probe.thermometer !== null && !ahead.some(tellsTemperature)) {
    note(pathTo(path, 'stage'), JSON.stringify(stage.stage), 'a trim behind a stage "thermometer"',
      'put { "stage": "thermometer" } ahead of it');
  }
  const temperatures = stage.table.map((point: { at_C: number }) => point.at_C);
  if (stage.table.length === 1) {
    note(pathTo(path, 'table'), '1 point', '2 or more points, or none', 'only the changes over temperature count');
  }
  mustAscend(note, pathTo(path, 'table'), 'at_C', '°C', temperatures);
}

function zeroConflicts(stage: StageSpecOf<'zero'>, path: string, probe: Probe, note: Note): void {
  if (!stage.tracking) return;
  const amperes = (name: 'trackAuthority_A' | 'trackWindow_A'): Quantity => (
    { path: pathTo(path, name), value: stage[name], unit: 'A' }
  );
  const needed = ['trackAuthority_A', 'trackWindow_A', 'trackRate_A_per_s'] as const;
  for (const name of needed) {
    if (stage[name] === 0) {
      note(pathTo(path, name), '0', `above 0, as ${pathTo(path, 'tracking')} is on`, 'tracking could never move');
    }
  }
  mustNotExceed(note, amperes('trackAuthority_A'), amperes('trackWindow_A'));
  // A window as wide as the range would let a true direct current of any size be taken for drift.
  mustBeBelow(note, amperes('trackWindow_A'), { path: 'range_A', value: probe.range_A, unit: 'A' });
}

function lineariseConflicts(stage: StageSpecOf<'linearise'>, path: string, note: Note): void {
  const table = pathTo(path, 'table');
  mustAscend(note, table, 'reads_A', 'A', stage.table.map((point) => point.reads_A));
  mustAscend(note, table, 'is_A', 'A', stage.table.map((point) => point.is_A));
}

function sectionConflicts(stage: StageSpecOf<'sections'>, path: string, rate: Quantity, note: Note): void {
  if (stage.corner_Hz >= rate.value * 500) {
    note(pathTo(path, 'corner_Hz'), `${stage.corner_Hz} Hz`,
      `below ${rate.value * 500} Hz, half of ${rate.path} (${withUnit(rate.value, rate.unit)})`);
  }
  if (stage.filter === 'notch') {
    if (stage.width_Hz === null) {
      note(pathTo(path, 'width_Hz'), 'nothing', `a width, as ${pathTo(path, 'filter')} is "notch"`);
    }
    if (stage.order >= 0 && stage.order !== 2) {
      note(pathTo(path, 'order'), String(stage.order), `2, or left out, as ${pathTo(path, 'filter')} is "notch"`,
        'a notch is one section');
    }
  } else if ((stage.filter as string) !== '' && stage.width_Hz !== null && stage.width_Hz > 0) {
    note(pathTo(path, 'width_Hz'), `${stage.width_Hz} Hz`,
      `left out, as ${pathTo(path, 'filter')} is ${JSON.stringify(stage.filter)}`, 'only a notch has a width');
  }
}

/** A length that rounds to no sample at all. */
function lengthConflict(path: string, length_ms: number, rate: Quantity, note: Note): void {
  if (length_ms * rate.value < 0.5) {
    note(path, `${length_ms} ms`, `at least one sample at ${rate.path} (${withUnit(rate.value, rate.unit)})`);
  }
}

function customConflicts(stage: StageSpecOf<'custom'>, path: string, note: Note): void {
  if (stage.make === null) {
    note(pathTo(path, 'make'), 'nothing', 'a function (words, unit) that returns the stage',
      'JSON holds no functions: write the probe file in JavaScript');
  }
}

export function meterNames(probe: Probe): string | null {
  const names = metersOf(probe).map((meter) => meter.spec.name);
  return names.length === 0 ? null : oneOf(names);
}
