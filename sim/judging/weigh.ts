/**
 * Plays the probe's scenarios through the front ends that could stand in its place, a shunt and a current transformer:
 * the same currents on the same grid, both front ends in one pass. At every A/D instant that is judged the analog
 * reading stands beside the true current of that instant; no delay is allowed for and nothing is calibrated. Events,
 * supply and outer fields are about the probe and do not reach them; the ambient reaches the shunt.
 * Memory does not grow with the duration.
 */
import { openCurrent } from '../current/source.ts';
import { wholeSamples } from '../hardware/bench.ts';
import { drawUnit, nominalUnit, type ShuntUnit, type TransformerUnit } from '../hardware/draw.ts';
import { gridFactorOf } from '../hardware/grid.ts';
import { Shunt } from '../hardware/shunt.ts';
import { ambientLines, epochSamples, ThermalLag } from '../hardware/surroundings.ts';
import { Transformer } from '../hardware/transformer.ts';
import type { Probe, Scenario } from '../probe/fields.ts';
import { changeOf, ErrorTally, type WeighedScenario } from './errortally.ts';
import { JudgedTimes } from './judgedtimes.ts';
import { shuntAnywhere, shuntSentences, transformerAnywhere, transformerSentences } from './shortcomings.ts';

export interface Weighed {
  frontEnd: 'shunt' | 'transformer';
  /** What is true of it in any scenario. */
  sentences: string[];
  scenarios: WeighedScenario[];
}

export interface WeighOptions {
  seed: number;
  trial: number;
  folder: string;
  /** Only this scenario. */
  only?: string;
  /** Also scenarios marked long. */
  all?: boolean;
  /** Grid points at once; changes speed and memory, no result. */
  capacity?: number;
  progress?: (scenario: string, share: number) => void;
}

const GRID_POINTS_AT_ONCE = 4096;
/** Between two words about progress. */
const SAMPLES_TO_TELL = 65536;

export function weigh(probe: Probe, options: WeighOptions): Weighed[] {
  const { only, all } = options;
  const { shunt, transformer } = drawUnit(probe, options.seed, options.trial);
  const weighed: Weighed[] = [];
  if (shunt !== null) weighed.push({ frontEnd: 'shunt', sentences: shuntAnywhere(shunt, probe), scenarios: [] });
  if (transformer !== null) {
    weighed.push({ frontEnd: 'transformer', sentences: transformerAnywhere(transformer, probe), scenarios: [] });
  }
  if (weighed.length === 0) return [];
  for (const scenario of probe.scenarios) {
    if (only === undefined ? scenario.long && !all : scenario.name !== only) continue;
    const results = weighScenario(probe, scenario, options);
    results.forEach((result, index) => weighed[index].scenarios.push(result));
  }
  return weighed;
}

/** One result for each front end of the file, the shunt first. */
export function weighScenario(probe: Probe, scenario: Scenario, options: WeighOptions): WeighedScenario[] {
  return new Weighing(probe, scenario, options).play();
}

class Weighing {
  private readonly stepSeconds: number;
  private readonly gridFactor: number;
  private readonly chunkSamples: number;
  private readonly epochSamples: number;
  private readonly totalSamples: number;
  private readonly amperes: Float64Array;
  private readonly shunt: ShuntLane | null;
  private readonly transformer: TransformerLane | null;
  private readonly times: JudgedTimes;
  private sample = 0;

  constructor(probe: Probe, private readonly scenario: Scenario, private readonly options: WeighOptions) {
    const rateHz = probe.converter.rate_kHz * 1e3;
    this.gridFactor = gridFactorOf(probe).factor;
    this.stepSeconds = 1 / (rateHz * this.gridFactor);
    this.totalSamples = wholeSamples(probe, scenario);
    this.chunkSamples = Math.max(1, Math.floor((options.capacity ?? GRID_POINTS_AT_ONCE) / this.gridFactor));
    this.epochSamples = epochSamples(rateHz);
    const capacity = this.chunkSamples * this.gridFactor;
    this.amperes = new Float64Array(capacity);
    this.times = new JudgedTimes(scenario);
    const unit = drawUnit(probe, options.seed, options.trial);
    const nominal = nominalUnit(probe);
    const grid: Grid = { stepSeconds: this.stepSeconds, gridFactor: this.gridFactor, capacity };
    this.shunt = unit.shunt === null ? null : new ShuntLane(unit.shunt, nominal.shunt!, probe, scenario, grid, options);
    this.transformer = unit.transformer === null ? null
      : new TransformerLane(unit.transformer, nominal.transformer!, probe, scenario, grid);
  }

  play(): WeighedScenario[] {
    const { stepSeconds, gridFactor, totalSamples, amperes, scenario, options } = this;
    const lanes = [this.shunt, this.transformer].filter((lane) => lane !== null);
    const current = openCurrent(scenario.current, stepSeconds, options.folder);
    let told = 0;
    try {
      while (this.sample < totalSamples) {
        const samples = this.steadySamples();
        current.next(amperes, samples * gridFactor);
        for (const lane of lanes) lane.hear(amperes, this.sample, samples, this.times);
        this.sample += samples;
        if (this.sample - told > SAMPLES_TO_TELL) {
          told = this.sample;
          options.progress?.(scenario.name, told / totalSamples);
        }
      }
    } finally {
      current.close();
    }
    return lanes.map((lane) => lane.result());
  }

  /** Up to the end of the epoch in which the ambient counts as steady; the middle of an epoch stands for all of it. */
  private steadySamples(): number {
    const { sample, epochSamples, chunkSamples, totalSamples, gridFactor, stepSeconds } = this;
    const into = sample % epochSamples;
    if (into === 0) this.shunt?.surround((sample + epochSamples / 2) * gridFactor * stepSeconds);
    return Math.min(epochSamples - into, chunkSamples, totalSamples - sample);
  }
}

interface Grid {
  stepSeconds: number;
  gridFactor: number;
  capacity: number;
}

interface FrontEnd {
  process(values: Float64Array, marks: Uint8Array, count: number): void;
  readingAmperes(volts: number): number;
}

/** One front end with its tally; the current stays untouched for the other one. */
class Lane<F extends FrontEnd> {
  protected readonly tally: ErrorTally;
  private readonly volts: Float64Array;
  private readonly marks: Uint8Array;

  constructor(protected readonly frontEnd: F, protected readonly scenario: Scenario, private readonly grid: Grid) {
    this.volts = new Float64Array(grid.capacity);
    this.marks = new Uint8Array(grid.capacity);
    this.tally = new ErrorTally(changeOf(scenario));
  }

  hear(amperes: Float64Array, first: number, samples: number, times: JudgedTimes): void {
    const { volts, marks, tally, frontEnd } = this;
    const { gridFactor, stepSeconds } = this.grid;
    const points = samples * gridFactor;
    volts.set(points === amperes.length ? amperes : amperes.subarray(0, points));
    marks.fill(0, 0, points);
    frontEnd.process(volts, marks, points);
    for (let k = 0, i = 0; k < samples; k++) {
      let clipped = 0;
      for (let step = 0; step < gridFactor; step++, i++) clipped |= marks[i];
      const seconds = ((first + k + 1) * gridFactor - 1) * stepSeconds;
      const reading = frontEnd.readingAmperes(volts[i - 1]);
      tally.hear(seconds, reading, amperes[i - 1], clipped !== 0, times.judges(seconds, seconds));
    }
  }
}

class ShuntLane extends Lane<Shunt> {
  private readonly shuntCelsius: ThermalLag;
  private readonly ambientCelsius: ThermalLag;

  constructor(
    unit: ShuntUnit, nominal: ShuntUnit, probe: Probe, scenario: Scenario, grid: Grid, { seed, trial }: WeighOptions,
  ) {
    super(new Shunt(unit, nominal, { ...grid, bits: probe.converter.bits, seed, trial }), scenario, grid);
    const lines = ambientLines(scenario);
    this.shuntCelsius = new ThermalLag(lines, unit.timeConstant_s);
    this.ambientCelsius = new ThermalLag(lines, 0);
  }

  surround(seconds: number): void {
    this.frontEnd.surround(this.shuntCelsius.at(seconds), this.ambientCelsius.at(seconds));
  }

  result(): WeighedScenario {
    return this.tally.result(this.scenario, shuntSentences(this.frontEnd, this.tally));
  }
}

class TransformerLane extends Lane<Transformer> {
  constructor(
    private readonly unit: TransformerUnit, nominal: TransformerUnit, private readonly probe: Probe,
    scenario: Scenario, private readonly weighedOn: Grid,
  ) {
    super(new Transformer(unit, nominal, weighedOn.stepSeconds), scenario, weighedOn);
  }

  result(): WeighedScenario {
    const points = this.frontEnd.pointsToSaturation;
    const saturatedSeconds = points === null ? null : points * this.weighedOn.stepSeconds;
    const sentences = transformerSentences(this.unit, saturatedSeconds, this.tally, this.scenario, this.probe.range_A);
    return this.tally.result(this.scenario, sentences);
  }
}
