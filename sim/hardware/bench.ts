/**
 * The whole hardware in one scenario: current -> core -> sensor -> amplifier -> converter, in blocks of A/D samples.
 *
 * Grid point n stands at n * stepSeconds; an A/D sample covers gridFactor grid points and is taken at the last of them:
 *   sample k at t = ((k + 1) * gridFactor - 1) * stepSeconds
 * so means over "its period" end at its instant. A bias phase begins at the first grid point of a period, and so does
 * what an event changes in the hardware. Temperatures and supply are steady over epochs of at most 1 ms, or of a sample
 * where that is longer. Turned over, the probe sees current, neighbour and outer field with the other sign, and so does
 * the truth; an open jaw does not change the truth. The sense of `direction` is the firmware's: here positive current
 * raises the field. Memory does not grow with the duration, and how blocks are cut changes no code.
 */
import { openCurrent, type CurrentSource } from '../current/source.ts';
import type { Probe, Scenario } from '../probe/fields.ts';
import { Amplifier } from './amplifier.ts';
import { biasPhases, type BiasPhase } from './bias.ts';
import { ClipMemory } from './clipmemory.ts';
import { CoilCurrent } from './coil.ts';
import { Converter } from './converter.ts';
import { Core } from './core.ts';
import { Coupling } from './coupling.ts';
import { drawUnit, type ThermometerUnit } from './draw.ts';
import { gridFactorOf } from './grid.ts';
import { RandomStream } from './random.ts';
import { Sensor } from './sensor.ts';
import { ChangingSurroundings, epochSamples } from './surroundings.ts';
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
  /** 1 while a clipped value still moves the converter's input by more than half a code, at worst. */
  influenced: Uint8Array;
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
/** Of a sample: a time on an instant belongs to it although both were rounded. */
const SAME_INSTANT = 1e-6;

export function newCodeBlock(capacity: number): CodeBlock {
  if (!Number.isInteger(capacity) || capacity < 1) {
    throw new RangeError(`capacity: expected an integer from 1, got ${capacity}`);
  }
  return {
    capacity, count: 0, code: new Int32Array(capacity), events: new Int32Array(capacity), temperatureCode: 0,
    powerCycle: false, trueAmperes: new Float64Array(capacity), trueMean: new Float64Array(capacity),
    trueMeanSquare: new Float64Array(capacity), clipped: new Uint8Array(capacity),
    influenced: new Uint8Array(capacity),
  };
}

export class Bench {
  readonly stepSeconds: number;
  readonly gridFactor: number;
  readonly totalSamples: number;
  private readonly current: CurrentSource;
  private readonly core: Core;
  private readonly coil: CoilCurrent | null;
  private readonly sensor: Sensor;
  private readonly coupling: Coupling | null;
  private readonly amplifier: Amplifier;
  private readonly converter: Converter;
  private readonly thermometer: ThermometerUnit | null;
  private readonly surroundings: ChangingSurroundings;
  private readonly epochSamples: number;
  private readonly clipMemory: ClipMemory;
  private readonly timetable: Timetable;
  private readonly phases: readonly BiasPhase[];
  private readonly phaseSamples: number;
  private readonly chunkSamples: number;
  private readonly grid: Float64Array;
  private readonly tesla: Float64Array;
  private readonly slew: Float64Array;
  private readonly marks: Uint8Array;
  private sample = 0;
  private turned = false;
  private jawOpen = false;
  private lastVolts = 0;

  constructor(probe: Probe, private readonly scenario: Scenario, options: BenchOptions) {
    const { seed, trial, folder } = options;
    const unit = drawUnit(probe, seed, trial);
    const rateHz = probe.converter.rate_kHz * 1e3;
    this.gridFactor = gridFactorOf(probe).factor;
    this.stepSeconds = 1 / (rateHz * this.gridFactor);
    this.totalSamples = wholeSamples(probe, scenario);
    const chunk = options.capacity ?? Math.floor(GRID_POINTS_AT_ONCE / this.gridFactor);
    this.chunkSamples = Math.max(1, Math.floor(chunk));
    const { stepSeconds, gridFactor } = this;
    const capacity = this.chunkSamples * gridFactor;
    this.grid = new Float64Array(capacity);
    this.marks = new Uint8Array(capacity);
    this.core = new Core(unit.core, {
      stepSeconds, folder, closing: new RandomStream(seed, trial, 'jaw closing'),
      jointTolerance_um: trial === 0 ? 0 : probe.core.jointGap_um.tolerance,
    });
    this.coil = scenario.coil === null ? null : new CoilCurrent(scenario.coil, stepSeconds, capacity);
    this.sensor = new Sensor(unit.sensor, { stepSeconds, gridFactor, capacity, seed, trial, scenario: scenario.name });
    this.coupling = unit.coupling === null ? null : new Coupling(unit.coupling, stepSeconds);
    this.tesla = new Float64Array(capacity);
    this.slew = new Float64Array(capacity);
    this.amplifier = new Amplifier(unit.amplifier, stepSeconds);
    this.converter = new Converter(unit.converter, { seed, trial, scenario: scenario.name });
    this.thermometer = unit.thermometer;
    this.surroundings = new ChangingSurroundings(scenario, unit, probe.supply_V.nominal);
    this.epochSamples = this.surroundings.changes ? epochSamples(rateHz) : Infinity;
    this.clipMemory = new ClipMemory(unit, stepSeconds, gridFactor);
    this.phases = biasPhases(unit.sensor.bias);
    this.phaseSamples = unit.sensor.biasPhase_samples;
    this.timetable = new Timetable(scenario.events, (seconds) => this.indexAt(seconds));
    this.current = openCurrent(scenario.current, stepSeconds, folder);
  }

  instantSeconds(sample: number): number {
    return ((sample + 1) * this.gridFactor - 1) * this.stepSeconds;
  }

  /**
   * Fills the block; false when there was nothing left. Blocks end early before a power cycle, before a new temperature
   * code and at the end.
   */
  next(block: CodeBlock): boolean {
    const first = this.sample;
    const end = this.timetable.blockEnd(first, Math.min(this.totalSamples, first + block.capacity));
    block.count = this.readThermometer(block, first, end) - first;
    block.powerCycle = block.count > 0 && this.timetable.startsWithPowerCycle(first);
    for (let done = 0; done < block.count;) {
      const samples = this.steadySamples(first + done, block.count - done);
      this.chunk(block, done, samples);
      done += samples;
    }
    this.fillEvents(block, first);
    return block.count > 0;
  }

  close(): void {
    this.current.close();
  }

  /** Puts the temperature code into the block and returns where the next one is due, or `end`. */
  private readThermometer(block: CodeBlock, first: number, end: number): number {
    const { thermometer, surroundings } = this;
    if (thermometer === null) {
      block.temperatureCode = 0;
      return end;
    }
    const everySeconds = thermometer.every_ms * 1e-3;
    const instant = this.instantSeconds(first) + SAME_INSTANT * this.gridFactor * this.stepSeconds;
    const readings = surroundings.changes ? Math.floor(instant / everySeconds) : 0;
    const celsius = surroundings.at(readings * everySeconds).thermometerCelsius;
    block.temperatureCode = thermometerCode(thermometer, celsius);
    if (!surroundings.changes) return end;
    return Math.min(end, Math.max(first + 1, this.indexAt((readings + 1) * everySeconds)));
  }

  /** What changes at `sample` is brought about; returns how many samples from there on see nothing change. */
  private steadySamples(sample: number, most: number): number {
    const { epochSamples, timetable } = this;
    const intoEpoch = epochSamples === Infinity ? sample : sample % epochSamples;
    if (intoEpoch === 0) this.surround(sample);
    const end = timetable.steadyUntil(sample, sample + Math.min(most, this.chunkSamples, epochSamples - intoEpoch));
    this.turnHardware(sample);
    return end - sample;
  }

  /** The middle of the epoch stands for all of it. */
  private surround(sample: number): void {
    const { epochSamples, surroundings } = this;
    const middle = epochSamples === Infinity ? 0 : (sample + epochSamples / 2) * this.gridFactor * this.stepSeconds;
    const now = surroundings.at(middle);
    this.sensor.surround(now);
    this.amplifier.surround(now);
    this.converter.surround(now);
    this.clipMemory.surround(now);
  }

  private turnHardware(sample: number): void {
    const { core } = this;
    const { jawOpen, turned, degaussed } = this.timetable.standing(sample);
    this.turned = turned;
    if (jawOpen !== this.jawOpen) {
      this.jawOpen = jawOpen;
      if (jawOpen) core.openJaw();
      else core.closeJaw();
    }
    if (degaussed) core.degauss();
  }

  private chunk(block: CodeBlock, at: number, samples: number): void {
    const { grid, marks, tesla, current, scenario } = this;
    const points = samples * this.gridFactor;
    const way = this.turned ? -1 : 1;
    current.next(grid, points);
    if (this.turned) for (let i = 0; i < points; i++) grid[i] = -grid[i];
    this.tellTruth(block, at, samples);
    const coil = this.coil === null ? null : this.coil.over(this.sample * this.gridFactor, points);
    this.core.process(grid, points, way * scenario.outerField_uT * 1e-6, way * scenario.neighbour_A, coil);
    tesla.set(points === grid.length ? grid : grid.subarray(0, points));
    marks.fill(0, 0, points);
    this.sensor.process(grid, marks, points);
    if (this.coupling !== null) {
      const slew = current.swings ? this.slew : null;
      if (slew !== null) current.slew(slew, points);
      this.coupling.add(grid, tesla, slew, points);
    }
    this.amplifier.process(grid, marks, points);
    this.convert(block, at, samples);
    this.sample += samples;
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
    const { grid, marks, gridFactor, converter, clipMemory, tesla, slew } = this;
    const perSecond = 1 / this.stepSeconds;
    // a steady current before the first point
    let before = this.sample === 0 ? grid[0] : this.lastVolts;
    for (let k = 0, i = 0; k < samples; k++) {
      let clipped = 0;
      for (let step = 0; step < gridFactor; step++, i++) clipped |= marks[i];
      if (gridFactor > 1) before = grid[i - 2];
      const volts = grid[i - 1];
      block.clipped[at + k] = clipped;
      if (clipped !== 0) clipMemory.clipped(this.sample + k, tesla, slew, i - gridFactor);
      block.code[at + k] = converter.word(converter.code(volts, (volts - before) * perSecond, block.clipped, at + k));
      block.influenced[at + k] = block.clipped[at + k] !== 0 || clipMemory.reaches(this.sample + k) ? 1 : 0;
      before = volts;
    }
    this.lastVolts = before;
  }

  private fillEvents(block: CodeBlock, first: number): void {
    const { phases, phaseSamples } = this;
    for (let k = 0; k < block.count; k++) {
      block.events[k] = phases[Math.floor((first + k) / phaseSamples) % phases.length].events;
    }
    this.timetable.mark(block.events, first, block.count);
  }

  private indexAt(seconds: number): number {
    return Math.max(0, Math.ceil((seconds / this.stepSeconds + 1) / this.gridFactor - 1 - SAME_INSTANT));
  }
}

/** A/D samples of a scenario. */
export function wholeSamples(probe: Probe, scenario: Scenario): number {
  const { rate_kHz } = probe.converter;
  // a duration of whole samples must not lose one by the last bit of a product
  const samples = Math.floor(scenario.duration_ms * rate_kHz + SAME_INSTANT);
  if (samples >= 1) return samples;
  throw new RangeError(`scenario "${scenario.name}", duration_ms: found ${scenario.duration_ms}, ` +
    `allowed at least one A/D sample of ${1 / rate_kHz} ms`);
}
