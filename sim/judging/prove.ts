/**
 * Proves a probe: plays every scenario that a requirement names, and gives one row a requirement as soon as it is
 * known, then what the run as a whole has shown. Nothing here prints.
 */
import type { Probe, Requirement, Scenario } from '../probe/fields.ts';
import type { Preset } from '../probe/validate.ts';
import { gridFactorOf } from '../hardware/grid.ts';
import { countTolerances } from '../hardware/draw.ts';
import { calibrate } from '../tuning/calibrate.ts';
import { tune, type Tuned } from '../tuning/tune.ts';
import { measureFor, type Measure } from './measures.ts';
import { weighPresets, type WeighedPreset } from './presets.ts';
import { play, type Observer, type Played } from './play.ts';
import { settlingOf, type ChainSettling } from './settle.ts';
import { swallowedAutomatically, swallowedOf, type Swallowed } from './swallowed.ts';

export interface Row {
  /** Stable: measure, scenario, and the meter where there is one. */
  id: string;
  measure: string;
  scenario: string;
  trial: number;
  where: string;
  /** null: it could not be measured; `because` says why. */
  value: number | null;
  limit: number;
  unit: string;
  share: number | null;
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
}

export interface Verdict {
  probe: string;
  seed: number;
  trial: number;
  /** Hardware fields that have a tolerance. */
  tolerances: number;
  rows: Row[];
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
  presets?: Preset[];
  progress?: (scenario: string, share: number) => void;
  /** Makes one more observer for each scenario that is played. */
  observer?: (scenario: string) => Observer;
}

/** Yields rows as they are known and returns the verdict. */
export function* prove(probe: Probe, options: ProveOptions): Generator<Row, Verdict> {
  const { seed, trial, folder } = options;
  const tuned = tune(probe, calibrate(probe, { seed, trial, folder }), options.file ?? null);
  const gathering = new Gathering(probe, tuned);
  const rows: Row[] = [];
  for (const requirement of probe.requirements) {
    if (requirement.measure !== 'swallowed' || options.only !== undefined) continue;
    rows.push(swallowedRow(tuned, requirement.limit_A, trial));
    yield rows[rows.length - 1];
  }
  for (const scenario of probe.scenarios) {
    if (options.only !== undefined && scenario.name !== options.only) continue;
    const requirements = probe.requirements.filter((requirement) => requirement.measure !== 'swallowed' && requirement.scenario === scenario.name);
    if (requirements.length === 0 && options.only === undefined) continue;
    const measures = requirements.map((requirement) => measureFor(requirement, scenario, probe.range_A));
    const noise = gathering.noiseMeasureFor(scenario);
    const observers: Observer[] = noise === null ? [...measures] : [...measures, noise];
    if (options.observer !== undefined) observers.push(options.observer(scenario.name));
    const played = play(probe, scenario, tuned, {
      seed, trial, folder, progress: (share) => options.progress?.(scenario.name, share),
    }, observers);
    gathering.hear(scenario, played);
    for (let i = 0; i < measures.length; i++) {
      rows.push(rowOf(requirements[i], scenario, measures[i], played, trial));
      yield rows[rows.length - 1];
    }
  }
  rows.push(gathering.unexplainedRow(trial));
  yield rows[rows.length - 1];
  return {
    probe: probe.name, seed, trial, tolerances: countTolerances(probe), rows, holds: rows.every((row) => row.holds),
    summary: gathering.summary(options.presets ?? []),
  };
}

function rowOf(requirement: Requirement, scenario: Scenario, measure: Measure, played: Played, trial: number): Row {
  const result = measure.result();
  const meter = 'meter' in requirement && requirement.meter !== 'meter' ? `/${requirement.meter}` : '';
  const base = { id: `${requirement.measure}${meter}@${scenario.name}`, measure: requirement.measure, scenario: scenario.name, trial };
  if (typeof result === 'string') {
    return {
      ...base, where: '', value: null, limit: limitOf(requirement), unit: requirement.measure === 'settling' ? 'ms' : 'A',
      share: null, holds: false, because: `${result}${eventsOf(played)}`,
    };
  }
  const holds = result.share <= 1;
  const { value, limit, unit, share, where } = result;
  return { ...base, where, value, limit, unit, share, holds, because: holds ? null : becauseOf(result.shape, played) };
}

function limitOf(requirement: Requirement): number {
  if (requirement.measure === 'settling') return requirement.limit_ms;
  if (requirement.measure === 'noise' || requirement.measure === 'swallowed') return requirement.limit_A;
  return requirement.amperes;
}

/** Clipping explains more than any fit can, and a zero that moved is told beside the fit. */
function becauseOf(shape: string, played: Played): string {
  return `${shape}${eventsOf(played)}`;
}

function eventsOf(played: Played): string {
  const { clipped, samples, zeroRemoved } = played;
  const nodes: string[] = [];
  if (clipped.sensor > 0) nodes.push(`the sensor reached its swing limit in ${percent(clipped.sensor, samples)} of the samples`);
  if (clipped.amplifier > 0) nodes.push(`the amplifier reached its rail in ${percent(clipped.amplifier, samples)}`);
  if (clipped.converter > 0) nodes.push(`the converter reached its end codes in ${percent(clipped.converter, samples)}`);
  if (zeroRemoved !== null && zeroRemoved.highest > zeroRemoved.lowest) {
    nodes.push(`the zero moved from ${zeroRemoved.lowest.toPrecision(4)} A to ${zeroRemoved.highest.toPrecision(4)} A during the scenario`);
  }
  return nodes.length === 0 ? '' : `; ${nodes.join('; ')}`;
}

function percent(part: number, whole: number): string {
  return `${((100 * part) / whole).toPrecision(3)} %`;
}

function swallowedRow(tuned: Tuned, limitAmperes: number, trial: number): Row {
  const list = swallowedOf(tuned.constants.design, tuned.countsPerAmpere);
  const value = swallowedAutomatically(list);
  const holds = value <= limitAmperes;
  const parts = list.filter((entry) => entry.by !== 'button').map((entry) => `${entry.by} ${entry.amperes.toPrecision(3)} A`);
  return {
    id: 'swallowed', measure: 'swallowed', scenario: '', trial, where: 'from the constants', value, limit: limitAmperes, unit: 'A',
    share: shareOf(value, limitAmperes), holds, because: holds ? null : `automatic zeroing may remove ${parts.join(' and ')}: narrow its windows`,
  };
}

function shareOf(value: number, limit: number): number {
  return value === 0 ? 0 : value / limit;
}

/** What the scenarios show together. */
class Gathering {
  private readonly largest: Float64Array;
  private clampedReadings = 0;
  private readings = 0;
  private unexplained = 0;
  private judged = 0;
  private worstUnexplained = { scenario: '', count: 0 };
  private zeroRemoved: { lowest: number; highest: number } | null = null;
  private noise: { scenario: string; measure: Measure } | null = null;

  constructor(private readonly probe: Probe, private readonly tuned: Tuned) {
    this.largest = new Float64Array(tuned.constants.design.length);
  }

  /** The first steady scenario also tells the noise of the reading. */
  noiseMeasureFor(scenario: Scenario): Measure | null {
    if (this.noise !== null || scenario.current.shape !== 'dc') return null;
    const measure = measureFor({ measure: 'noise', scenario: scenario.name, limit_A: 1 }, scenario, this.probe.range_A);
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
    this.unexplained += played.unexplained;
    if (played.unexplained > this.worstUnexplained.count) {
      this.worstUnexplained = { scenario: scenario.name, count: played.unexplained };
    }
    const removed = played.zeroRemoved;
    if (removed === null) return;
    this.zeroRemoved ??= { ...removed };
    this.zeroRemoved.lowest = Math.min(this.zeroRemoved.lowest, removed.lowest);
    this.zeroRemoved.highest = Math.max(this.zeroRemoved.highest, removed.highest);
  }

  unexplainedRow(trial: number): Row {
    const holds = this.unexplained === 0;
    return {
      id: 'unexplainedFlags', measure: 'unexplainedFlags', scenario: this.worstUnexplained.scenario, trial,
      where: `${this.judged} readings judged`, value: this.unexplained, limit: 0, unit: 'readings', share: holds ? 0 : null, holds,
      because: holds ? null : `${this.worstUnexplained.count} readings of "${this.worstUnexplained.scenario}" are flagged although no node ` +
        'clipped and the current stayed within the range: a limit of overRange is too tight',
    };
  }

  summary(presets: Preset[]): Summary {
    const { tuned, probe } = this;
    const noise = this.noise?.measure.result();
    return {
      noise: noise === undefined || typeof noise === 'string' ? null : {
        scenario: this.noise!.scenario, amperes: noise.value, counts: noise.value * tuned.countsPerAmpere,
      },
      reach: tuned.constants.design.map((stage, index) => ({ stage: stage.kind, largest: this.largest[index], limit: tuned.limits[index] })),
      clampedReadings: this.clampedReadings, readings: this.readings, zeroRemoved: this.zeroRemoved,
      swallowed: swallowedOf(tuned.constants.design, tuned.countsPerAmpere), settling: settlingOf(probe, tuned),
      delayMs: tuned.delaySamples / probe.converter.rate_kHz, warnings: warningsOf(probe), presets: weighPresets(probe, presets),
    };
  }
}

function warningsOf(probe: Probe): string[] {
  const { warning } = gridFactorOf(probe);
  return warning === null ? [] : [warning];
}
