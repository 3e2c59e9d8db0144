/**
 * Plays one scenario: bench -> codes -> chain -> readings, block by block, and tells observers what came out beside
 * what is true. A streamed reading stands beside the true current delayed by the chain's stated delay, a meter record
 * beside the statistic of the true current over the same input samples. Memory does not grow with the duration.
 */
import { Block, Chain, CLAMPED, Meter, OVERLOAD, RECORD_WORDS, SETTLING, STUCK, type Stage } from '../../lib/index.ts';
import { Bench, newCodeBlock, type CodeBlock } from '../hardware/bench.ts';
import { CLIP_AMPLIFIER, CLIP_CONVERTER, CLIP_SENSOR } from '../hardware/clip.ts';
import type { Probe, Scenario } from '../probe/fields.ts';
import type { Tuned } from '../tuning/tune.ts';
import { Influence } from './influence.ts';
import { JudgedTimes } from './judgedtimes.ts';
import { chainMemory } from './memory.ts';
import { Truth } from './truth.ts';

/** Status bits that say a reading must not be used. */
export const UNUSABLE = OVERLOAD | CLAMPED | STUCK | SETTLING;

const BLOCK = 256;

/** A block of readings at the end of the chain, with the truth. */
export interface Readings {
  count: number;
  /** The delay that the chain states. */
  delaySeconds: number;
  seconds: Float64Array;
  amperes: Float64Array;
  /** True current, delayed as the chain states. */
  truth: Float64Array;
  /** True current at the instant of the reading, not delayed. */
  now: Float64Array;
  /** Change of that truth, in amperes a second. */
  slope: Float64Array;
  status: Int32Array;
  /** 1: at a time that is judged. */
  judged: Uint8Array;
}

export interface Record {
  meter: string;
  /** Begin and end of the window. */
  fromSeconds: number;
  seconds: number;
  mean: number;
  trueRms: number;
  acRms: number;
  count: number;
  cycles: number;
  status: number;
  judged: boolean;
  /** The same statistics of the true current, over the same input samples. */
  truth: { mean: number; trueRms: number; acRms: number };
}

export interface Observer {
  /** How often the scenario has to be played for this observer. */
  passes: number;
  readings(block: Readings, pass: number): void;
  record(record: Record, pass: number): void;
}

/** What a scenario left behind, whatever was asked of it. */
export interface Played {
  samples: number;
  readings: number;
  /** Readings at times that are judged, and those of them that carry a bit of UNUSABLE. */
  judged: number;
  unusable: number;
  /** Judged readings that are flagged although nothing had happened to them. */
  unexplained: number;
  /** The bits they carry. */
  unexplainedBits: number;
  /** Judged readings that clipping has a part in although their status is clean. */
  hiddenClipping: number;
  clamped: number;
  /** A/D samples whose period saw a node clip. */
  clipped: { sensor: number; amplifier: number; converter: number };
  /** Largest magnitude behind each stage, in its values. */
  largest: Float64Array;
  /** Lowest and highest zero removed, in amperes, null without a zero stage. */
  zeroRemoved: { lowest: number; highest: number } | null;
  statusSeen: number;
}

export interface PlayOptions {
  seed: number;
  trial: number;
  folder: string;
  /** Told the share done, 0..1, now and then. */
  progress?: (share: number) => void;
}

export function play(probe: Probe, scenario: Scenario, tuned: Tuned, options: PlayOptions, observers: readonly Observer[]): Played {
  const passes = Math.max(1, ...observers.map((observer) => observer.passes));
  let played: Played | null = null;
  for (let pass = 1; pass <= passes; pass++) {
    const watching = observers.filter((observer) => observer.passes >= pass);
    played = new Player(probe, scenario, tuned, options, watching, pass, passes).play();
  }
  return played!;
}

class Player {
  private readonly bench: Bench;
  private readonly chain: Chain;
  private readonly truth: Truth;
  private readonly codes: CodeBlock;
  private readonly block = new Block(BLOCK);
  private readonly out: Readings;
  private readonly ratio: number;
  private readonly memorySamples: number;
  private readonly times: JudgedTimes;
  private readonly meterReaders: MeterReader[];
  private readonly zeroStage: number;
  private readonly played: Played;
  /** Input samples before this block, and before the last power cycle. */
  private done = 0;
  private poweredAt = 0;
  private lastCause = -Infinity;
  private readonly causes = new Float64Array(BLOCK);
  private readonly influence: Influence;
  private readonly influenced = new Uint8Array(BLOCK);

  constructor(
    private readonly probe: Probe, private readonly scenario: Scenario, private readonly tuned: Tuned,
    private readonly options: PlayOptions, private readonly observers: readonly Observer[],
    private readonly pass: number, private readonly passes: number,
  ) {
    this.bench = new Bench(probe, scenario, options);
    this.chain = new Chain(tuned.constants, tuned.makers);
    this.ratio = tuned.ratios.at(-1)!;
    this.memorySamples = chainMemory(tuned.constants.design, tuned.ratios);
    this.influence = new Influence(tuned.constants.design, tuned.ratios, probe.sensor.biasPhase_samples);
    this.meterReaders = [...tuned.meters].map(([name, stage]) => new MeterReader(name, stage, this.chain.stages[stage], tuned));
    const longestWindow = Math.max(0, ...this.meterReaders.map((reader) => reader.windowInputs));
    this.codes = newCodeBlock(samplesAtOnce(tuned));
    this.truth = new Truth(Math.ceil(tuned.delaySamples) + longestWindow + 2 * BLOCK + 2 * this.ratio);
    this.times = new JudgedTimes(scenario);
    this.zeroStage = tuned.constants.design.findIndex((stage) => stage.kind === 'zero');
    this.out = {
      count: 0, delaySeconds: tuned.delaySamples / (probe.converter.rate_kHz * 1e3), seconds: new Float64Array(BLOCK),
      amperes: new Float64Array(BLOCK), truth: new Float64Array(BLOCK), now: new Float64Array(BLOCK), slope: new Float64Array(BLOCK), status: new Int32Array(BLOCK), judged: new Uint8Array(BLOCK),
    };
    this.played = {
      samples: this.bench.totalSamples, readings: 0, judged: 0, unusable: 0, unexplained: 0, unexplainedBits: 0, hiddenClipping: 0, clamped: 0,
      clipped: { sensor: 0, amplifier: 0, converter: 0 }, largest: new Float64Array(this.chain.stages.length),
      zeroRemoved: null, statusSeen: 0,
    };
  }

  play(): Played {
    const { bench, codes } = this;
    const total = bench.totalSamples;
    let told = 0;
    while (bench.next(codes)) {
      if (codes.powerCycle) this.powerCycle();
      this.hearTruth();
      this.throughChain();
      this.tellReadings();
      this.tellRecords();
      this.done += codes.count;
      if (this.done - told > 65536) {
        told = this.done;
        this.options.progress?.((this.pass - 1 + this.done / total) / this.passes);
      }
    }
    bench.close();
    return this.played;
  }

  private powerCycle(): void {
    this.chain.powerCycle();
    this.poweredAt = this.done;
    this.influence.forget();
    for (const reader of this.meterReaders) reader.restart();
  }

  private hearTruth(): void {
    const { codes, probe, played } = this;
    for (let i = 0; i < codes.count; i++) {
      const amperes = probe.direction * codes.trueAmperes[i];
      this.truth.push(amperes, probe.direction * codes.trueMean[i], codes.trueMeanSquare[i]);
      const clipped = codes.clipped[i];
      if (clipped & CLIP_SENSOR) played.clipped.sensor++;
      if (clipped & CLIP_AMPLIFIER) played.clipped.amplifier++;
      if (clipped & CLIP_CONVERTER) played.clipped.converter++;
      if (clipped !== 0 || Math.abs(amperes) + this.coilAmperes(this.done + i) > probe.range_A) this.lastCause = this.done + i;
      this.causes[i] = this.lastCause;
      this.influenced[i] = this.influence.hear(this.done + i, codes.influenced[i] !== 0) ? 1 : 0;
    }
  }

  /** Amplitude of the coil's current, as the conductor's current that would magnetise the core as much. */
  private coilAmperes(sample: number): number {
    const { coil } = this.scenario;
    if (coil === null) return 0;
    const milliseconds = this.bench.instantSeconds(sample) * 1e3 - coil.at_ms;
    if (milliseconds < 0) return 0;
    const { coilTurns, turns } = this.probe.core;
    return (coil.peak_A * Math.exp(-milliseconds / coil.decay_ms) * coilTurns) / turns;
  }

  private throughChain(): void {
    const { block, codes, chain, played } = this;
    block.count = codes.count;
    block.temperatureCode = codes.temperatureCode;
    block.value.set(codes.code.subarray(0, codes.count));
    block.status.set(codes.events.subarray(0, codes.count));
    for (let stage = 0; stage < chain.stages.length; stage++) {
      chain.stages[stage].process(block);
      let largest = played.largest[stage];
      for (let i = 0; i < block.count; i++) {
        const value = block.value[i];
        if (value > largest) largest = value;
        else if (-value > largest) largest = -value;
      }
      played.largest[stage] = largest;
      if (stage === this.zeroStage) this.hearZero();
    }
  }

  private hearZero(): void {
    const { block, played, tuned } = this;
    for (let i = 0; i < block.count; i++) {
      const amperes = block.zero[i] / tuned.countsPerAmpere;
      if (played.zeroRemoved === null) played.zeroRemoved = { lowest: amperes, highest: amperes };
      if (amperes < played.zeroRemoved.lowest) played.zeroRemoved.lowest = amperes;
      if (amperes > played.zeroRemoved.highest) played.zeroRemoved.highest = amperes;
    }
  }

  private tellReadings(): void {
    const { block, out, tuned, truth, bench, played, ratio } = this;
    const secondsPerSample = 1 / (this.probe.converter.rate_kHz * 1e3);
    // the first reading of this block falls on the next multiple of the ratio since power came on
    let input = this.poweredAt + Math.ceil((this.done - this.poweredAt + 1) / ratio) * ratio - 1;
    for (let i = 0; i < block.count; i++, input += ratio) {
      const status = block.status[i];
      const position = input - tuned.delaySamples;
      out.seconds[i] = bench.instantSeconds(input);
      out.amperes[i] = block.value[i] / tuned.readingsPerAmpere;
      out.truth[i] = truth.at(position);
      out.now[i] = truth.at(input);
      out.slope[i] = (out.truth[i] - truth.at(position - 1)) / secondsPerSample;
      out.status[i] = status;
      played.statusSeen |= status;
      if (status & CLAMPED) played.clamped++;
      out.judged[i] = this.times.judges(out.seconds[i], out.seconds[i]) ? 1 : 0;
      if (out.judged[i] === 0) continue;
      played.judged++;
      if (status & UNUSABLE) played.unusable++;
      else if (this.influenced[input - this.done] === 1) played.hiddenClipping++;
      const flags = status & (OVERLOAD | CLAMPED | STUCK);
      if (flags !== 0 && input - this.causes[input - this.done] > this.memorySamples) {
        played.unexplained++;
        played.unexplainedBits |= flags;
      }
    }
    out.count = block.count;
    played.readings += block.count;
    for (const observer of this.observers) observer.readings(out, this.pass);
  }

  private tellRecords(): void {
    for (const reader of this.meterReaders) {
      for (const record of reader.fresh(this.poweredAt, this.truth, this.times, (input) => this.bench.instantSeconds(input))) {
        for (const observer of this.observers) observer.record(record, this.pass);
      }
    }
  }
}

/** Input samples in one block: no more than make as many records as the ring of the smallest meter holds. */
function samplesAtOnce(tuned: Tuned): number {
  const most = tuned.constants.design.map((stage, index) => {
    if (stage.kind !== 'meter') return BLOCK;
    // a cycle takes two samples at least: one below the mean and one above
    const shortest = stage.cycles > 0 ? 2 * stage.cycles : stage.windowSamples;
    return stage.capacity * shortest * tuned.ratios[index];
  });
  return Math.min(BLOCK, ...most);
}

/** Reads the records of one meter as they come, and finds the input samples that each is about. */
class MeterReader {
  readonly windowInputs: number;
  private readonly meter: Meter;
  private readonly ratio: number;
  private readonly valuesPerAmpere: number;
  private read = 0;
  private slot = 0;
  /** Samples at the meter up to the end of the last record. */
  private position = 0;

  constructor(private readonly name: string, stage: number, meter: Stage, tuned: Tuned) {
    this.meter = meter as Meter;
    this.ratio = tuned.ratios[stage];
    this.valuesPerAmpere = tuned.valuesPerAmpere[stage];
    this.windowInputs = this.meter.constants.windowSamples * this.ratio;
  }

  restart(): void {
    this.read = 0;
    this.slot = 0;
    this.position = 0;
  }

  *fresh(poweredAt: number, truth: Truth, times: JudgedTimes, secondsAt: (input: number) => number): Generator<Record> {
    const written = this.meter.state[this.meter.fields.indexOf('written')];
    const { capacity } = this.meter.constants;
    for (; this.read < written; this.read++, this.slot = (this.slot + 1) % capacity) {
      const [skipped, count, mean, trueRms, acRms, , , cycles, status] =
        this.meter.ring.subarray(this.slot * RECORD_WORDS, (this.slot + 1) * RECORD_WORDS);
      const first = poweredAt + (this.position + skipped) * this.ratio;
      this.position += skipped + count;
      const end = poweredAt + this.position * this.ratio;
      const over = truth.over(first, end);
      const scale = this.valuesPerAmpere;
      const fromSeconds = secondsAt(first);
      const seconds = secondsAt(end - 1);
      yield {
        meter: this.name, fromSeconds, seconds, judged: times.judges(fromSeconds, seconds), mean: mean / scale, trueRms: trueRms / scale, acRms: acRms / scale,
        count, cycles, status,
        truth: {
          mean: over.mean, trueRms: Math.sqrt(over.meanSquare),
          acRms: Math.sqrt(Math.max(0, over.meanSquare - over.mean ** 2)),
        },
      };
    }
  }
}

