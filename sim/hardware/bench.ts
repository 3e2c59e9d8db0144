/**
 * The whole hardware in one scenario: current -> field -> sensor -> amplifier -> converter, in blocks of A/D samples.
 *
 * Grid point n stands at n * stepSeconds; an A/D sample covers gridFactor grid points and is taken at the last of them:
 *   sample k at t = ((k + 1) * gridFactor - 1) * stepSeconds
 * so means over "its period" end at its instant. A bias phase begins at the first grid point of a period. The whole
 * probe stands at the temperature of the scenario, so the temperature code is one constant. The sense of
 * `direction` is the firmware's: here positive current raises the field. Memory does not grow with the duration.
 */
import { openCurrent, type CurrentSource } from '../current/source.ts';
import type { Probe, Scenario } from '../probe/fields.ts';
import { Amplifier } from './amplifier.ts';
import { biasPhases, type BiasPhase } from './bias.ts';
import { Converter } from './converter.ts';
import { teslaPerAmpere } from './core.ts';
import { drawUnit } from './draw.ts';
import { gridFactorOf } from './grid.ts';
import { RandomStream } from './random.ts';
import { Sensor } from './sensor.ts';
import { thermometerCode } from './thermometer.ts';
import { Timetable } from './timetable.ts';

/** Codes with what comes in beside them, and the truth that only the judge may see. */
export interface CodeBlock {
  readonly capacity: number;
  count: number;
  /** Words as the converter writes them. */
  code: Int32Array;
  /** EVENT_ bits. */
  events: Int32Array;
  /** One for the block. */
  temperatureCode: number;
  /** A power cycle happens before the first sample of this block. */
  powerCycle: boolean;
  /** At the sampling instant. */
  trueAmperes: Float64Array;
  /** Over the grid points of the sample's period, which ends at its instant. */
  trueMean: Float64Array;
  trueMeanSquare: Float64Array;
  /** CLIP_ bits: any grid point of the period clipped. */
  clipped: Uint8Array;
}

export interface BenchOptions {
  seed: number;
  trial: number;
  /** Where the paths of recorded currents start. */
  folder: string;
  /** Samples worked through at once inside; changes speed and memory, no result. */
  capacity?: number;
}

const GRID_POINTS_AT_ONCE = 4096;

export function newCodeBlock(capacity: number): CodeBlock {
  if (!Number.isInteger(capacity) || capacity < 1) {
    throw new RangeError(`capacity: expected an integer from 1, got ${capacity}`);
  }
  return {
    capacity, count: 0, code: new Int32Array(capacity), events: new Int32Array(capacity), temperatureCode: 0,
    powerCycle: false, trueAmperes: new Float64Array(capacity), trueMean: new Float64Array(capacity),
    trueMeanSquare: new Float64Array(capacity), clipped: new Uint8Array(capacity),
  };
}

export class Bench {
  readonly stepSeconds: number;
  readonly gridFactor: number;
  readonly totalSamples: number;
  private readonly current: CurrentSource;
  private readonly fieldTeslaPerAmpere: number;
  private readonly sensor: Sensor;
  private readonly amplifier: Amplifier;
  private readonly converter: Converter;
  private readonly temperatureCode: number;
  private readonly timetable: Timetable;
  private readonly phases: readonly BiasPhase[];
  private readonly phaseSamples: number;
  private readonly chunkSamples: number;
  private readonly grid: Float64Array;
  private readonly marks: Uint8Array;
  private sample = 0;

  constructor(probe: Probe, scenario: Scenario, options: BenchOptions) {
    const { seed, trial, folder } = options;
    const unit = drawUnit(probe, seed, trial);
    const rateHz = probe.converter.rate_kHz * 1e3;
    this.gridFactor = gridFactorOf(probe).factor;
    this.stepSeconds = 1 / (rateHz * this.gridFactor);
    // a duration of whole samples must not lose one by the last bit of a product
    this.totalSamples = Math.floor(scenario.duration_ms * probe.converter.rate_kHz + 1e-6);
    if (this.totalSamples < 1) {
      throw new RangeError(`scenario "${scenario.name}", duration_ms: found ${scenario.duration_ms}, ` +
        `allowed at least one A/D sample of ${1 / probe.converter.rate_kHz} ms`);
    }
    const chunk = options.capacity ?? Math.floor(GRID_POINTS_AT_ONCE / this.gridFactor);
    this.chunkSamples = Math.max(1, Math.floor(chunk));
    this.grid = new Float64Array(this.chunkSamples * this.gridFactor);
    this.marks = new Uint8Array(this.grid.length);
    const supplyRatio = (scenario.supply_V ?? unit.supply_V) / probe.supply_V.nominal;
    const surroundings = { celsius: scenario.temperature_C, supplyRatio };
    this.fieldTeslaPerAmpere = teslaPerAmpere(unit.core);
    this.sensor = new Sensor(unit.sensor, surroundings, this.stepSeconds, this.gridFactor,
      new RandomStream(seed, trial, 'sensor noise'), this.grid.length);
    this.amplifier = new Amplifier(unit.amplifier, this.stepSeconds);
    this.converter = new Converter(unit.converter, supplyRatio, new RandomStream(seed, trial, 'converter noise'));
    this.temperatureCode = unit.thermometer === null ? 0 : thermometerCode(unit.thermometer, scenario.temperature_C);
    this.phases = biasPhases(unit.sensor.bias);
    this.phaseSamples = unit.sensor.biasPhase_samples;
    this.timetable = new Timetable(scenario.events, (seconds) => this.indexAt(seconds));
    this.current = openCurrent(scenario.current, this.stepSeconds, folder);
  }

  instantSeconds(sample: number): number {
    return ((sample + 1) * this.gridFactor - 1) * this.stepSeconds;
  }

  /** Fills the block; false when there was nothing left. Blocks end early before a power cycle and at the end. */
  next(block: CodeBlock): boolean {
    const first = this.sample;
    const end = this.timetable.blockEnd(first, Math.min(this.totalSamples, first + block.capacity));
    block.count = end - first;
    block.temperatureCode = this.temperatureCode;
    block.powerCycle = block.count > 0 && this.timetable.startsWithPowerCycle(first);
    for (let done = 0; done < block.count;) {
      const samples = Math.min(this.chunkSamples, block.count - done);
      this.chunk(block, done, samples);
      done += samples;
    }
    this.fillEvents(block, first);
    this.sample = end;
    return block.count > 0;
  }

  close(): void {
    this.current.close();
  }

  private chunk(block: CodeBlock, at: number, samples: number): void {
    const { grid, marks, fieldTeslaPerAmpere } = this;
    const points = samples * this.gridFactor;
    this.current.next(grid, points);
    this.tellTruth(block, at, samples);
    for (let i = 0; i < points; i++) grid[i] *= fieldTeslaPerAmpere;
    marks.fill(0, 0, points);
    this.sensor.process(grid, marks, points);
    this.amplifier.process(grid, marks, points);
    this.convert(block, at, samples);
  }

  private tellTruth(block: CodeBlock, at: number, samples: number): void {
    const { grid, gridFactor } = this;
    for (let k = 0, i = 0; k < samples; k++) {
      let sum = 0;
      let squares = 0;
      for (let step = 0; step < gridFactor; step++, i++) {
        const amperes = grid[i];
        sum += amperes;
        squares += amperes * amperes;
      }
      block.trueAmperes[at + k] = grid[i - 1];
      block.trueMean[at + k] = sum / gridFactor;
      block.trueMeanSquare[at + k] = squares / gridFactor;
    }
  }

  private convert(block: CodeBlock, at: number, samples: number): void {
    const { grid, marks, gridFactor, converter } = this;
    for (let k = 0, i = 0; k < samples; k++) {
      let clipped = 0;
      for (let step = 0; step < gridFactor; step++, i++) clipped |= marks[i];
      block.clipped[at + k] = clipped;
      block.code[at + k] = converter.word(converter.code(grid[i - 1], block.clipped, at + k));
    }
  }

  private fillEvents(block: CodeBlock, first: number): void {
    const { phases, phaseSamples } = this;
    for (let k = 0; k < block.count; k++) {
      block.events[k] = phases[Math.floor((first + k) / phaseSamples) % phases.length].events;
    }
    this.timetable.mark(block.events, first, block.count);
  }

  private indexAt(seconds: number): number {
    // 1e-6 of a sample: an event on an instant belongs to it although both were rounded
    return Math.max(0, Math.ceil((seconds / this.stepSeconds + 1) / this.gridFactor - 1 - 1e-6));
  }
}
