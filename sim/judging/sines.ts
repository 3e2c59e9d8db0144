/**
 * Gain, phase, SINAD and effective bits of the reading at the frequency of a sine, by four-parameter fits (IEEE Std
 * 1057) of the reading and of the true current over the judged time.
 *   gain    amplitude of the reading over that of the true current
 *   phase   of the reading against the true current delayed as the chain states
 *   SINAD   RMS of the fitted sine over NAD, the RMS of what the fit leaves
 *   bits    log2(FSR / (NAD sqrt(12))), FSR twice the nominal range
 */
import type { Probe, Requirement, Scenario } from '../probe/fields.ts';
import { shareOf, timeText, type Measure, type Measured } from './measures.ts';
import { UNUSABLE, type Observer, type Readings } from './play.ts';
import { SineFit, type SineParts } from './sinefit.ts';

type Of<M extends Requirement['measure']> = Extract<Requirement, { measure: M }>;

/** IEEE 1057 asks for at least five periods in a record. */
export const LEAST_PERIODS = 5;
/** Sixteen readings for each parameter: common practice, no source. */
export const LEAST_READINGS = 64;

export interface Response {
  reading: SineParts;
  truth: SineParts;
  gain: number;
  /** Positive: the reading comes earlier than the stated delay says. */
  phaseDegrees: number;
}

export class SineResponse implements Observer {
  passes = 2;
  private readonly frequencyHz: number;
  private readonly judgedSeconds: number;
  private readonly readingFit: SineFit;
  private readonly truthFit: SineFit;
  private count = 0;
  private flagged = 0;
  private delaySeconds = 0;
  private firstSeconds = NaN;
  private lastSeconds = NaN;

  constructor(scenario: Scenario) {
    if (scenario.current.shape !== 'sine') throw new TypeError(`sine fit: the current of scenario "${scenario.name}" is no sine`);
    this.frequencyHz = scenario.current.frequency_Hz;
    const from = scenario.judgeFrom_ms / 1e3;
    const to = scenario.duration_ms / 1e3;
    this.judgedSeconds = to - from;
    // a scenario that is never judged is refused below; the fits need some time nevertheless
    this.readingFit = new SineFit(this.frequencyHz, from, Math.max(to, from + 1 / this.frequencyHz));
    this.truthFit = new SineFit(this.frequencyHz, from, Math.max(to, from + 1 / this.frequencyHz));
  }

  readings(block: Readings, pass: number): void {
    this.delaySeconds = block.delaySeconds;
    for (let i = 0; i < block.count; i++) {
      if (block.judged[i] === 0) continue;
      if (block.status[i] & UNUSABLE) {
        if (pass === 1) this.flagged++;
        continue;
      }
      if (pass === 1) {
        this.count++;
        if (this.count === 1) this.firstSeconds = block.seconds[i];
        this.lastSeconds = block.seconds[i];
      }
      this.readingFit.hear(block.seconds[i], block.amperes[i], pass);
      this.truthFit.hear(block.seconds[i], block.now[i], pass);
    }
  }

  record(): void {}

  /** A string says why there is none. */
  response(): Response | string {
    const refusal = this.refusal();
    if (refusal !== null) return refusal;
    const reading = this.readingFit.result();
    if (typeof reading === 'string') return reading;
    const truth = this.truthFit.result();
    if (typeof truth === 'string') return `the true current: ${truth}`;
    const turns = (reading.phaseRadians - truth.phaseRadians + truth.radiansPerSecond * this.delaySeconds) / (2 * Math.PI);
    return { reading, truth, gain: reading.amplitude / truth.amplitude, phaseDegrees: 360 * (turns - Math.round(turns)) };
  }

  /** The record is fit to be judged, and the reading has no sine in it that stands out of its noise. */
  get drowned(): boolean {
    return this.refusal() === null && typeof this.readingFit.result() === 'string';
  }

  private refusal(): string | null {
    const { frequencyHz, judgedSeconds, count, flagged } = this;
    if (flagged > 0) {
      return `${flagged} of ${flagged + count} readings in the record are flagged as unusable: judge from a later time (judgeFrom_ms) on`;
    }
    const periods = judgedSeconds * frequencyHz;
    // five periods that were meant may be short by rounding
    if (periods < LEAST_PERIODS - 1e-6) {
      const length = timeText(Math.max(0, judgedSeconds));
      return `the record of ${length} holds ${Math.max(0, periods).toPrecision(3)} periods, a fit needs ${LEAST_PERIODS}`;
    }
    if (count < LEAST_READINGS) return `the record holds ${count} readings, a fit needs ${LEAST_READINGS}`;
    const rateHz = (count - 1) / (this.lastSeconds - this.firstSeconds);
    // nearer to half the rate than a period of the record, cosine and sine fall on the same instants
    if (rateHz / 2 - frequencyHz < 1 / judgedSeconds) {
      return `${frequencyHz.toPrecision(4)} Hz is not below half the reading rate of ${rateHz.toPrecision(4)} Hz`;
    }
    return null;
  }
}

abstract class SineMeasure implements Measure {
  passes = 2;
  private readonly sine: SineResponse;

  constructor(protected readonly probe: Probe, scenario: Scenario) {
    this.sine = new SineResponse(scenario);
  }

  readings(block: Readings, pass: number): void {
    this.sine.readings(block, pass);
  }

  record(): void {}

  result(): Measured | string {
    const response = this.sine.response();
    return typeof response === 'string' ? response : this.measured(response);
  }

  protected abstract measured(response: Response): Measured | string;
}

export class SineGain extends SineMeasure {
  constructor(private readonly requirement: Of<'gain'>, probe: Probe, scenario: Scenario) {
    super(probe, scenario);
  }

  protected measured({ gain, reading, truth }: Response): Measured {
    const value = 100 * (gain - 1);
    const limit = this.requirement.limit_percent;
    return {
      value, limit, unit: '%', share: shareOf(value, limit), where: frequencyText(truth),
      shape: `the reading shows a sine of ${reading.amplitude.toPrecision(5)} A where the true one has ${truth.amplitude.toPrecision(5)} A`,
    };
  }
}

export class SinePhase extends SineMeasure {
  constructor(private readonly requirement: Of<'phase'>, probe: Probe, scenario: Scenario) {
    super(probe, scenario);
  }

  protected measured({ phaseDegrees, truth }: Response): Measured {
    const limit = this.requirement.limit_deg;
    const seconds = Math.abs(phaseDegrees) / 360 / (truth.radiansPerSecond / (2 * Math.PI));
    return {
      value: phaseDegrees, limit, unit: '°', share: shareOf(phaseDegrees, limit), where: frequencyText(truth),
      shape: `the reading comes ${timeText(seconds)} ${phaseDegrees < 0 ? 'later' : 'earlier'} than the stated delay says`,
    };
  }
}

export class Sinad extends SineMeasure {
  constructor(private readonly requirement: Of<'sinad'>, probe: Probe, scenario: Scenario) {
    super(probe, scenario);
  }

  protected measured({ reading }: Response): Measured | string {
    if (reading.residualRms === 0) return NO_RESIDUAL;
    const value = 20 * Math.log10(reading.amplitude / Math.SQRT2 / reading.residualRms);
    const limit = this.requirement.atLeast_dB;
    // share of the noise and distortion that the limit allows
    return {
      value, limit, unit: 'dB', better: 'more', share: 10 ** ((limit - value) / 20), where: frequencyText(reading),
      shape: residualText(reading),
    };
  }
}

export class EffectiveBits extends SineMeasure {
  constructor(private readonly requirement: Of<'effectiveBits'>, probe: Probe, scenario: Scenario) {
    super(probe, scenario);
  }

  protected measured({ reading }: Response): Measured | string {
    if (reading.residualRms === 0) return NO_RESIDUAL;
    const value = effectiveBits(2 * this.probe.range_A, reading.residualRms);
    const limit = this.requirement.atLeast_bits;
    return {
      value, limit, unit: 'bits', better: 'more', share: 2 ** (limit - value),
      where: `${frequencyText(reading)}, of ±${this.probe.range_A} A`, shape: residualText(reading),
    };
  }
}

/** Bits of an ideal converter of that full scale whose quantisation has this RMS. */
export function effectiveBits(fullScale: number, residualRms: number): number {
  return Math.log2(fullScale / (residualRms * Math.sqrt(12)));
}

const NO_RESIDUAL = 'the reading is a sine without any residual: there is nothing to relate it to';

function frequencyText({ radiansPerSecond, count }: SineParts): string {
  return `at ${(radiansPerSecond / (2 * Math.PI)).toPrecision(4)} Hz, ${count} readings`;
}

function residualText({ amplitude, residualRms }: SineParts): string {
  return `what is no sine of this frequency in the reading: ${residualRms.toPrecision(3)} A RMS beside a sine of ` +
    `${amplitude.toPrecision(4)} A peak (noise, distortion, hysteresis)`;
}
