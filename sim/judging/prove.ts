/**
 * Proves a probe: plays every scenario that a requirement names, once for all of them, then the scenarios that other
 * requirements make for themselves, and gives one row a requirement as soon as it is known, then what the run as a
 * whole has shown. Nothing here prints.
 */
import { CLAMPED, OVERLOAD, STUCK, TRACKING } from '../../lib/index.ts';
import type { Probe, Requirement, Scenario } from '../probe/fields.ts';
import type { Preset } from '../probe/validate.ts';
import { openCurrent } from '../current/source.ts';
import { gridFactorOf } from '../hardware/grid.ts';
import { nominalTransfer } from '../hardware/transfer.ts';
import { countTolerances } from '../hardware/draw.ts';
import { calibrate } from '../tuning/calibrate.ts';
import { tune, type Tuned } from '../tuning/tune.ts';
import { NoiseOfReading, limitOf, shareOf, type Better } from './measures.ts';
import { weighPresets, type WeighedPreset } from './presets.ts';
import { play, type Observer, type Played } from './play.ts';
import { settlingOf, type ChainSettling } from './settle.ts';
import { studyFor, type Study } from './study.ts';
import { driftOf, swallowedAutomatically, swallowedOf, type Swallowed } from './swallowed.ts';
import { weigh, type Weighed } from './weigh.ts';

export interface Row {
  /** Stable: measure, meter where there is one, and scenario, or what is asked of a made one; #2 for a second like it. */
  id: string;
  measure: string;
  scenario: string;
  trial: number;
  where: string;
  /** null: it could not be measured; `because` says why. */
  value: number | null;
  limit: number;
  /** 'more': the limit is a least value. */
  better: Better;
  unit: string;
  share: number | null;
  /** Share of the readings or windows that were flagged and left out of the error; more than half of them fails. */
  leftOut: number;
  holds: boolean;
  because: string | null;
}

export interface StageReach {
  stage: string;
  largest: number;
  /** Largest magnitude that the constants allow. */
  limit: number;
}

export interface Summary {
  noise: { scenario: string; amperes: number; counts: number } | null;
  reach: StageReach[];
  clampedReadings: number;
  readings: number;
  zeroRemoved: { lowest: number; highest: number } | null;
  swallowed: Swallowed[];
  settling: ChainSettling;
  delayMs: number;
  warnings: string[];
  presets: WeighedPreset[];
  /** Front ends that could stand in the probe's place; empty where the file has none. */
  weighed: Weighed[];
}

export interface Verdict {
  probe: string;
  seed: number;
  trial: number;
  /** Hardware fields that have a tolerance. */
  tolerances: number;
  rows: Row[];
  /** Requirements left out because their scenarios are long. */
  leftOut: number;
  holds: boolean;
  summary: Summary;
}

export interface ProveOptions {
  seed: number;
  /** 0: nominal parts; from 1: a unit drawn within the tolerances. */
  trial: number;
  folder: string;
  file?: string;
  /** Only requirements of this scenario. */
  only?: string;
  /** Also scenarios marked long. */
  all?: boolean;
  presets?: Preset[];
  progress?: (scenario: string, share: number) => void;
  /** Makes one more observer for each scenario that is played. */
  observer?: (scenario: string) => Observer;
}

/** Yields rows as they are known and returns the verdict. */
export function* prove(probe: Probe, options: ProveOptions): Generator<Row, Verdict> {
  const { seed, trial } = options;
  const tuned = tune(probe, calibrate(probe, { seed, trial, folder: options.folder }), options.file ?? null);
  readRecordedCurrents(probe, options);
  const gathering = new Gathering(probe, tuned);
  const player = new ScenarioPlayer(probe, tuned, options, gathering);
  const rows: Row[] = [];
  const names = new RowNames();
  for (const row of rowsOf(probe, tuned, options, player)) {
    rows.push({ ...row, id: names.fresh(row.id) });
    yield rows[rows.length - 1];
  }
  for (const row of [gathering.hiddenRow(trial), gathering.unexplainedRow(trial)]) {
    rows.push(row);
    yield row;
  }
  return {
    probe: probe.name, seed, trial, tolerances: countTolerances(probe), rows, leftOut: leftOutOf(probe, options),
    holds: rows.every((row) => row.holds),
    summary: { ...gathering.summary(options.presets ?? []), weighed: weigh(probe, options) },
  };
}

/** Reads every recorded current through to its needed end, so that a bad line is told before the first row. */
function readRecordedCurrents(probe: Probe, { only, all, folder }: ProveOptions): void {
  const steps = 1024;
  for (const { name, long, current, duration_ms } of probe.scenarios) {
    if (current.shape !== 'file' || (only === undefined ? long && !all : name !== only)) continue;
    const source = openCurrent(current, duration_ms / 1e3 / steps, folder);
    source.next(new Float64Array(steps), steps);
    source.close();
  }
}

function leftOutOf(probe: Probe, { only, all }: ProveOptions): number {
  if (all || only !== undefined) return 0;
  const long = new Set(probe.scenarios.filter((scenario) => scenario.long).map((scenario) => scenario.name));
  return probe.requirements.filter((requirement) => 'scenario' in requirement && long.has(requirement.scenario)).length;
}

function* rowsOf(probe: Probe, tuned: Tuned, options: ProveOptions, player: ScenarioPlayer): Generator<Row> {
  const { trial, only, folder } = options;
  for (const requirement of probe.requirements) {
    if (requirement.measure === 'swallowed' && only === undefined) yield swallowedRow(probe, tuned, requirement.limit_A, trial);
  }
  for (const scenario of probe.scenarios) {
    if (only === undefined ? scenario.long && !options.all : scenario.name !== only) continue;
    const requirements = probe.requirements.filter((requirement) => 'scenario' in requirement && requirement.scenario === scenario.name);
    if (requirements.length === 0 && only === undefined) continue;
    const studies = requirements.map((requirement) => studyFor(requirement, probe, folder));
    const observers = studies.flatMap((study) => [...study.plays].map((entry) => entry.observer));
    const played = player.play(scenario, observers);
    for (let i = 0; i < studies.length; i++) yield rowOf(requirements[i], studies[i], eventsOf([played], supplyWords(probe, scenario)), trial);
  }
  if (only !== undefined) return;
  for (const requirement of probe.requirements) {
    if ('scenario' in requirement || requirement.measure === 'swallowed') continue;
    const study = studyFor(requirement, probe, folder);
    const played: Played[] = [];
    for (const entry of study.plays) played.push(player.play(entry.scenario, [entry.observer]));
    yield rowOf(requirement, study, eventsOf(played), trial);
  }
}

class ScenarioPlayer {
  constructor(
    private readonly probe: Probe, private readonly tuned: Tuned, private readonly options: ProveOptions, private readonly gathering: Gathering,
  ) {}

  play(scenario: Scenario, observers: readonly Observer[]): Played {
    const { options, gathering } = this;
    const { seed, trial, folder } = options;
    const all = [...observers];
    const named = this.probe.scenarios.includes(scenario);
    const noise = named ? gathering.noiseMeasureFor(scenario) : null;
    if (noise !== null) all.push(noise);
    if (named && options.observer !== undefined) all.push(options.observer(scenario.name));
    const played = play(this.probe, scenario, this.tuned, {
      seed, trial, folder, progress: (share) => options.progress?.(scenario.name, share),
    }, all);
    gathering.hear(scenario, played);
    return played;
  }
}

/** Two requirements that ask the same of the same scenario get rows of their own. */
class RowNames {
  private readonly given = new Map<string, number>();

  fresh(id: string): string {
    const count = (this.given.get(id) ?? 0) + 1;
    this.given.set(id, count);
    return count === 1 ? id : `${id}#${count}`;
  }
}

/** A requirement of which more than this is flagged has not been shown. */
const MOST_LEFT_OUT = 0.5;

function rowOf(requirement: Requirement, study: Study, happened: Happened, trial: number): Row {
  const result = study.result();
  const meter = 'meter' in requirement && requirement.meter !== 'meter' ? `/${requirement.meter}` : '';
  const scenario = 'scenario' in requirement ? requirement.scenario : askedOf(requirement);
  const base = { id: `${requirement.measure}${meter}@${scenario}`, measure: requirement.measure, scenario, trial };
  if (typeof result === 'string') {
    return { ...base, ...limitOf(requirement), where: '', value: null, share: null, leftOut: 0, holds: false, because: reason(result, happened) };
  }
  const { value, limit, unit, share, where, leftOut = 0 } = result;
  const mostlyFlagged = leftOut > MOST_LEFT_OUT;
  const holds = share <= 1 && !mostlyFlagged;
  const shape = mostlyFlagged && share <= 1
    ? `${(100 * leftOut).toPrecision(3)} % of the readings are flagged and left out: the few that are left prove little` : result.shape;
  return {
    ...base, where, value, limit, better: result.better ?? 'less', unit, share: finiteOrNull(share), leftOut, holds,
    because: holds ? null : reason(shape, happened),
  };
}

/** Something of an allowance of nothing is no share that could be written down. */
function finiteOrNull(share: number): number | null {
  return Number.isFinite(share) ? share : null;
}

/** What a requirement without a scenario of its own asks for, in place of the scenario's name. */
function askedOf(requirement: Exclude<Requirement, { scenario: string }>): string {
  switch (requirement.measure) {
    case 'band': {
      const { from_Hz, to_Hz, peak_A, lowest_C, highest_C } = requirement;
      return `${peak_A} A, ${rangeText(from_Hz, to_Hz)} Hz, ${rangeText(lowest_C, highest_C)} °C`;
    }
    case 'bandwidth': return `${requirement.peak_A} A`;
    case 'zeroOverTemperature': return `${rangeText(requirement.lowest_C, requirement.highest_C)} °C`;
    case 'swallowed': return '';
  }
}

function rangeText(low: number, high: number): string {
  return low === high ? `${low}` : `${low} to ${high}`;
}

interface Happened {
  words: string;
  clipped: boolean;
}

/** What a node or the zero did; clipping explains more than any fit can, so it comes first in a reason. */
function eventsOf(plays: readonly Played[], supply = ''): Happened {
  const sum = (of: (played: Played) => number): number => plays.reduce((total, played) => total + of(played), 0);
  const samples = sum((played) => played.samples);
  const sensor = sum((played) => played.clipped.sensor);
  const amplifier = sum((played) => played.clipped.amplifier);
  const converter = sum((played) => played.clipped.converter);
  const nodes: string[] = [];
  if (sensor > 0) nodes.push(`the sensor reached its swing limit in ${percent(sensor, samples)} of the samples`);
  if (amplifier > 0) nodes.push(`the amplifier reached its rail in ${percent(amplifier, samples)} of the samples`);
  if (converter > 0) nodes.push(`the converter reached its end codes in ${percent(converter, samples)} of the samples`);
  // the zeros of several scenarios differ without one having moved
  const zeroRemoved = plays.length === 1 ? plays[0].zeroRemoved : null;
  if (zeroRemoved !== null && zeroRemoved.highest > zeroRemoved.lowest) {
    const who = plays[0].statusSeen & TRACKING ? 'tracking moved the zero' : 'the zero moved';
    nodes.push(`${who} from ${zeroRemoved.lowest.toPrecision(4)} A to ${zeroRemoved.highest.toPrecision(4)} A during the scenario`);
  }
  if (supply !== '') nodes.push(supply);
  return { words: nodes.join('; '), clipped: sensor + amplifier + converter > 0 };
}

/** A supply off its nominal value moves the reading unless sensor, virtual ground and reference all follow it, or none. */
function supplyWords(probe: Probe, scenario: Scenario): string {
  const nominal = probe.supply_V.nominal;
  const supply = scenario.supply_V ?? nominal;
  const parts: [string, boolean][] = [
    ['the sensor', probe.sensor.ratiometric], ['the virtual ground', probe.amplifier.ground === 'supply'],
    ['the reference', probe.converter.reference === 'supply'],
  ];
  const named = (follows: boolean): string => parts.filter((part) => part[1] === follows).map(([name]) => name).join(' and ');
  if (supply === nominal || named(true) === '' || named(false) === '') return '';
  return `the supply is ${supply} V in place of ${nominal} V, followed by ${named(true)} but not by ${named(false)}`;
}

function reason(shape: string, { words, clipped }: Happened): string {
  if (words === '') return shape;
  return clipped ? `${words}; ${shape}` : `${shape}; ${words}`;
}

function percent(part: number, whole: number): string {
  return `${((100 * part) / whole).toPrecision(3)} %`;
}

function swallowedRow(probe: Probe, tuned: Tuned, limitAmperes: number, trial: number): Row {
  const list = swallowedOf(tuned.constants.design, tuned.countsPerAmpere, driftOf(probe));
  const value = swallowedAutomatically(list);
  const holds = value <= limitAmperes;
  const parts = list.filter((entry) => entry.by !== 'button').map((entry) => `${entry.by} ${entry.amperes.toPrecision(3)} A`);
  return {
    id: 'swallowed', measure: 'swallowed', scenario: '', trial, where: 'from the constants', value, limit: limitAmperes,
    better: 'less', unit: 'A', share: finiteOrNull(shareOf(value, limitAmperes)), leftOut: 0, holds,
    because: holds ? null : `automatic zeroing may remove ${parts.join(' and ')}: narrow its windows`,
  };
}

/** What the scenarios show together. */
class Gathering {
  private readonly largest: Float64Array;
  private clampedReadings = 0;
  private readings = 0;
  private judged = 0;
  private readonly unexplained = new Tally();
  private unexplainedBits = 0;
  private readonly hidden = new Tally();
  private zeroRemoved: { lowest: number; highest: number } | null = null;
  private noise: { scenario: string; measure: NoiseOfReading } | null = null;

  constructor(private readonly probe: Probe, private readonly tuned: Tuned) {
    this.largest = new Float64Array(tuned.constants.design.length);
  }

  /** The first steady scenario also tells the noise of the reading. */
  noiseMeasureFor(scenario: Scenario): NoiseOfReading | null {
    if (this.noise !== null || scenario.current.shape !== 'dc') return null;
    const measure = new NoiseOfReading(1);
    this.noise = { scenario: scenario.name, measure };
    return measure;
  }

  hear(scenario: Scenario, played: Played): void {
    played.largest.forEach((value, stage) => {
      if (value > this.largest[stage]) this.largest[stage] = value;
    });
    this.clampedReadings += played.clamped;
    this.readings += played.readings;
    this.judged += played.judged;
    this.unexplained.hear(scenario, played.unexplained);
    this.unexplainedBits |= played.unexplainedBits;
    this.hidden.hear(scenario, played.hiddenClipping);
    const removed = played.zeroRemoved;
    if (removed === null) return;
    this.zeroRemoved ??= { ...removed };
    this.zeroRemoved.lowest = Math.min(this.zeroRemoved.lowest, removed.lowest);
    this.zeroRemoved.highest = Math.max(this.zeroRemoved.highest, removed.highest);
  }

  unexplainedRow(trial: number): Row {
    return this.tallyRow('unexplainedFlags', this.unexplained, trial, 'are flagged although no node clipped and the current stayed ' +
      `within the range: ${this.unexplainedWords()}`);
  }

  hiddenRow(trial: number): Row {
    return this.tallyRow('hiddenClipping', this.hidden, trial, 'are influenced by clipping and their status is clean: a rail that no ' +
      'code shows (set highCode, lowCode or limit_A of overRange inside it), or a filter ahead of the converter that hides it');
  }

  private unexplainedWords(): string {
    const words: string[] = [];
    if (this.unexplainedBits & OVERLOAD) words.push('a code, limit or slew of overRange is too tight');
    if (this.unexplainedBits & STUCK) words.push('codes stand still for stuckAfter_samples without being stuck: the noise is less than a code');
    if (this.unexplainedBits & CLAMPED) words.push('a stage clamps within the range');
    return words.join('; ');
  }

  private tallyRow(measure: string, tally: Tally, trial: number, reason: string): Row {
    const { total, worst } = tally;
    const holds = total === 0;
    return {
      id: measure, measure, scenario: worst.scenario, trial, where: `${this.judged} readings judged`, value: total, limit: 0, better: 'less',
      unit: 'readings', share: holds ? 0 : null, leftOut: 0, holds, because: holds ? null : `${worst.count} readings of "${worst.scenario}" ${reason}`,
    };
  }

  summary(presets: Preset[]): Omit<Summary, 'weighed'> {
    const { tuned, probe } = this;
    const noise = this.noise?.measure.result();
    return {
      noise: noise === undefined || typeof noise === 'string' ? null : {
        scenario: this.noise!.scenario, amperes: noise.value, counts: noise.value * tuned.countsPerAmpere,
      },
      reach: tuned.constants.design.map((stage, index) => ({ stage: stage.kind, largest: this.largest[index], limit: tuned.limits[index] })),
      clampedReadings: this.clampedReadings, readings: this.readings, zeroRemoved: this.zeroRemoved,
      swallowed: swallowedOf(tuned.constants.design, tuned.countsPerAmpere, driftOf(probe)), settling: settlingOf(probe, tuned),
      delayMs: tuned.delaySamples / probe.converter.rate_kHz, warnings: warningsOf(probe, tuned), presets: weighPresets(probe, presets),
    };
  }
}

/** A count over all scenarios, and the scenario with most of it. */
class Tally {
  total = 0;
  worst = { scenario: '', count: 0 };

  hear(scenario: Scenario, count: number): void {
    this.total += count;
    if (count > this.worst.count) this.worst = { scenario: scenario.name, count };
  }
}

function warningsOf(probe: Probe, tuned: Tuned): string[] {
  const { warning } = gridFactorOf(probe);
  return [warning, rangeWarning(probe, tuned), railWarning(probe, tuned)].filter((text) => text !== null);
}

/** Whatever the scenarios ask, the converter must have codes for the nominal range. */
function rangeWarning(probe: Probe, tuned: Tuned): string | null {
  const end = tuned.limits[0] / tuned.countsPerAmpere;
  return probe.range_A <= end ? null
    : `range_A: ${probe.range_A} A is beyond the last code of the converter, ${end.toPrecision(4)} A: nothing out there can be read`;
}

/** End codes that the amplifier cannot reach are never met: over-range is then told by other limits only. */
function railWarning(probe: Probe, tuned: Tuned): string | null {
  const { design } = tuned.constants;
  const intake = design[0];
  const watch = design.find((stage) => stage.kind === 'overRange');
  if (intake.kind !== 'intake' || watch?.kind !== 'overRange') return null;
  const { codesPerVolt, restCode, amplifierRestVolts } = nominalTransfer(probe);
  const codeAt = (volts: number): number => restCode + (volts - amplifierRestVolts) * codesPerVolt;
  const high = watch.highLimit / 2 ** intake.guardBits + intake.midCode;
  const low = watch.lowLimit / 2 ** intake.guardBits + intake.midCode;
  const { railHigh_V, railLow_V } = probe.amplifier;
  const lost: string[] = [];
  if (codeAt(railHigh_V.nominal) < high) lost.push(`highCode ${high} (the amplifier ends at code ${Math.floor(codeAt(railHigh_V.nominal))})`);
  if (codeAt(railLow_V.nominal) > low) lost.push(`lowCode ${low} (the amplifier ends at code ${Math.ceil(codeAt(railLow_V.nominal))})`);
  return lost.length === 0 ? null : `overRange: ${lost.join(' and ')} can never be met`;
}
