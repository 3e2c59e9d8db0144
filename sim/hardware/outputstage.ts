/**
 * What an amplifier's output can do: it follows the wanted output as one pole, not faster than its slew rate, not
 * beyond its rails, and it needs time to come back from a rail.
 *   dy/dt = (wanted - y)/tau, held within +-slew;  y held within the rails
 * Solved exactly for a wanted output that is a straight line between grid points: until |wanted - y| crosses slew * tau
 * it is the pole or a ramp, and the crossings have closed forms. Rails and recovery act at whole grid points. With
 * tau = 0 it goes straight towards the wanted value of each grid point. Points at a limit are marked CLIP_AMPLIFIER.
 */
import { CLIP_AMPLIFIER } from './clip.ts';
import { poleWeights, type PoleWeights } from './pole.ts';

export interface OutputLimits {
  /** 0: follows at once. */
  tauSeconds: number;
  /** Infinity: no limit. */
  slewVoltsPerSecond: number;
  recoverySeconds: number;
}

const AT_ONCE: PoleWeights = { keep: 0, k1: 1, k0: 0 };

export class OutputStage {
  private readonly weights: PoleWeights;
  /** Where |wanted - y| meets the slew limit; with tau = 0 one step at the slew limit. */
  private readonly linearVolts: number;
  private readonly recoverySteps: number;
  private readonly atOnce: boolean;
  private wanted = 0;
  private output = 0;
  /** Grid points that it still stays at the rail, and which one: 1 high, -1 low. */
  private hold = 0;
  private side = 1;
  private started = false;

  constructor(private readonly limits: OutputLimits, private readonly stepSeconds: number) {
    const { tauSeconds, slewVoltsPerSecond, recoverySeconds } = limits;
    this.atOnce = tauSeconds === 0;
    this.weights = tauSeconds > 0 ? poleWeights(1 / (2 * Math.PI * tauSeconds), stepSeconds) : AT_ONCE;
    this.linearVolts = slewVoltsPerSecond * (tauSeconds > 0 ? tauSeconds : stepSeconds);
    this.recoverySteps = Math.round(recoverySeconds / stepSeconds);
  }

  /** Wanted volts in, volts out, in place; returns how many points were at a limit. */
  process(values: Float64Array, marks: Uint8Array, count: number, low: number, high: number): number {
    if (count > 0 && !this.started) this.begin(values[0], low, high);
    const { recoverySteps, linearVolts, atOnce } = this;
    const { k1, k0 } = this.weights;
    let { wanted: u0, output: y0, hold, side } = this;
    let clips = 0;
    for (let i = 0; i < count; i++) {
      const u1 = values[i];
      let y1 = y0 + k1 * (u1 - y0) + k0 * (u0 - y0);
      let limited = true;
      if (hold > 0) {
        y1 = side > 0 ? high : low;
        hold = (side > 0 ? u1 > high : u1 < low) ? recoverySteps : hold - 1;
      } else {
        limited = Math.abs((atOnce ? u1 : u0) - y0) > linearVolts || Math.abs(u1 - y1) > linearVolts;
        if (limited) y1 = atOnce ? y0 + Math.sign(u1 - y0) * linearVolts : this.slewed(u0, y0, u1);
        if (!(y1 >= low && y1 <= high)) {
          limited = true;
          side = y1 > high ? 1 : -1;
          y1 = side > 0 ? high : low;
          hold = recoverySteps;
        }
      }
      if (limited) {
        marks[i] |= CLIP_AMPLIFIER;
        clips++;
      }
      values[i] = y1;
      u0 = u1;
      y0 = y1;
    }
    this.wanted = u0;
    this.output = y0;
    this.hold = hold;
    this.side = side;
    return clips;
  }

  private begin(wanted: number, low: number, high: number): void {
    this.started = true;
    this.wanted = wanted;
    this.output = Math.max(low, Math.min(high, wanted));
  }

  /** One step in which the slew limit acts: a ramp until the pole is slower, the pole until it is faster, a ramp. */
  private slewed(u0: number, y0: number, u1: number): number {
    const { stepSeconds, linearVolts } = this;
    const { tauSeconds, slewVoltsPerSecond: slew } = this.limits;
    const slope = (u1 - u0) / stepSeconds;
    let behind = u0 - y0;
    let left = stepSeconds;
    if (Math.abs(behind) > linearVolts) {
      const way = Math.sign(behind);
      const closing = slew - way * slope;
      const ramp = closing > 0 ? (Math.abs(behind) - linearVolts) / closing : Infinity;
      if (ramp >= left) return y0 + way * slew * left;
      behind = way * linearVolts;
      left -= ramp;
    }
    const steady = slope * tauSeconds;
    if (Math.abs(slope) > slew) {
      const way = Math.sign(slope);
      const away = Math.abs(steady) - way * behind;
      const linear = tauSeconds * Math.log(away / (Math.abs(steady) - linearVolts));
      if (linear < left) return u1 - slope * (left - linear) - way * linearVolts + way * slew * (left - linear);
    }
    return u1 - steady - (behind - steady) * Math.exp(-left / tauSeconds);
  }
}
