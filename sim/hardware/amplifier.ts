/**
 * Amplifier around a virtual ground, and the anti-alias filter behind it.
 *   wanted = virtualGround + gain * (Vin - virtualGround + offset + drift * (T - 25 °C)), the ground fixed or a share of
 *   the supply
 * then one pole at gain-bandwidth / max(1, |gain|), slew limit, rails and recovery (outputstage.ts), then the filter:
 * an RC, or Butterworth from order 2 on. The rails scale with the supply. The limits come first: the filter smooths a
 * clipped peak, so the converter may see codes well inside its range while the amplifier clips. The judge must know
 * (CLIP_AMPLIFIER); the chain cannot.
 */
import { Butterworth } from './butterworth.ts';
import { CLIP_AMPLIFIER, clipBlock } from './clip.ts';
import type { AmplifierUnit } from './draw.ts';
import { OutputStage } from './outputstage.ts';
import { Pole } from './pole.ts';
import { REFERENCE_CELSIUS } from './sensor.ts';
import type { Surroundings } from './surroundings.ts';

export function amplifierVolts(
  amplifier: AmplifierUnit, inputVolts: number, amplifierCelsius: number = REFERENCE_CELSIUS, supplyRatio = 1,
): number {
  const { virtualGround_V, ground, gain, offset_mV, offsetDrift_uV_per_K } = amplifier;
  const groundVolts = virtualGround_V * (ground === 'supply' ? supplyRatio : 1);
  const offsetVolts = offset_mV * 1e-3 + offsetDrift_uV_per_K * 1e-6 * (amplifierCelsius - REFERENCE_CELSIUS);
  return groundVolts + gain * (inputVolts - groundVolts + offsetVolts);
}

/** Corner of the amplifier itself at its gain; infinite without a gain-bandwidth product. */
export function amplifierCornerHz(amplifier: AmplifierUnit): number {
  const { gainBandwidth_MHz, gain } = amplifier;
  return gainBandwidth_MHz === null ? Infinity : (gainBandwidth_MHz * 1e6) / Math.max(1, Math.abs(gain));
}

export function antiAliasFilter(amplifier: AmplifierUnit, stepSeconds: number): Pole | Butterworth {
  const cornerHz = amplifier.bandwidth_kHz * 1e3;
  const { filterOrder } = amplifier;
  return filterOrder === 1 ? new Pole(cornerHz, stepSeconds) : new Butterworth(filterOrder, cornerHz, stepSeconds);
}

export class Amplifier {
  /** Grid points so far at a rail, limited in slew, or recovering. */
  clips = 0;
  /** Null where only the rails limit. */
  private readonly stage: OutputStage | null;
  private readonly filter: Pole | Butterworth;
  private levelVolts = 0;
  private railRatio = 1;

  constructor(private readonly amplifier: AmplifierUnit, stepSeconds: number) {
    const { gainBandwidth_MHz, slew_V_per_us, recovery_us } = amplifier;
    const simple = gainBandwidth_MHz === null && slew_V_per_us === null && recovery_us === 0;
    this.stage = simple ? null : new OutputStage({
      tauSeconds: 1 / (2 * Math.PI * amplifierCornerHz(amplifier)),
      slewVoltsPerSecond: (slew_V_per_us ?? Infinity) * 1e6, recoverySeconds: recovery_us * 1e-6,
    }, stepSeconds);
    this.filter = antiAliasFilter(amplifier, stepSeconds);
    this.surround({ amplifierCelsius: REFERENCE_CELSIUS, supplyRatio: 1 });
  }

  surround({ amplifierCelsius, supplyRatio }: Pick<Surroundings, 'amplifierCelsius' | 'supplyRatio'>): void {
    this.levelVolts = amplifierVolts(this.amplifier, 0, amplifierCelsius, supplyRatio);
    this.railRatio = supplyRatio;
  }

  /** Volts in, volts out, in place. */
  process(values: Float64Array, marks: Uint8Array, count: number): void {
    const { stage, levelVolts, railRatio } = this;
    const { gain } = this.amplifier;
    const low = this.amplifier.railLow_V * railRatio;
    const high = this.amplifier.railHigh_V * railRatio;
    for (let i = 0; i < count; i++) values[i] = levelVolts + gain * values[i];
    this.clips += stage === null ? clipBlock(values, marks, count, low, high, CLIP_AMPLIFIER)
      : stage.process(values, marks, count, low, high);
    this.filter.process(values, count);
  }
}
