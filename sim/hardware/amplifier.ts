/**
 * Amplifier around a virtual ground, and the anti-alias filter behind it.
 *   V = virtualGround + gain * (Vin - virtualGround + offset), clipped to the rails, then one pole
 * The rails come first: the filter smooths a clipped peak, so the converter may see codes well inside its range while
 * the amplifier clips. The judge must know (CLIP_AMPLIFIER); the chain cannot.
 */
import { CLIP_AMPLIFIER, clipBlock } from './clip.ts';
import type { AmplifierUnit } from './draw.ts';
import { Pole } from './pole.ts';

export function amplifierVolts(amplifier: AmplifierUnit, inputVolts: number): number {
  const { virtualGround_V, gain, offset_mV } = amplifier;
  return virtualGround_V + gain * (inputVolts - virtualGround_V + offset_mV * 1e-3);
}

export class Amplifier {
  /** Grid points clipped so far. */
  clips = 0;
  private readonly pole: Pole;

  constructor(private readonly amplifier: AmplifierUnit, stepSeconds: number) {
    this.pole = new Pole(amplifier.bandwidth_kHz * 1e3, stepSeconds);
  }

  /** Volts in, volts out, in place. */
  process(values: Float64Array, marks: Uint8Array, count: number): void {
    const { gain, railLow_V, railHigh_V } = this.amplifier;
    const level = amplifierVolts(this.amplifier, 0);
    for (let i = 0; i < count; i++) values[i] = level + gain * values[i];
    this.clips += clipBlock(values, marks, count, railLow_V, railHigh_V, CLIP_AMPLIFIER);
    this.pole.process(values, count);
  }
}
