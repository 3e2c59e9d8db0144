/**
 * Currents made of straight lines between corners: staircase, step, pulse and ramp. An edge starts at the boundary and
 * is linear; behind the last corner the current stays. Two corners at one time are a jump, and the point on it is
 * behind it. Corners are kept in grid steps (place.ts).
 */
import { NoSwing } from './noswing.ts';
import { gridPlace } from './place.ts';
import { ROUNDING, type ShapeSpec } from './shape.ts';

export class Ramps extends NoSwing {
  /** Corners in grid steps, not falling, and the current at each; the first one stands at 0. */
  private readonly position: number[] = [];
  private readonly level: number[] = [];
  private readonly stepSeconds: number;
  private corner = 0; // the last one at or before the point
  private point = 0;

  constructor(stepSeconds: number, fromAmperes: number) {
    super();
    this.stepSeconds = stepSeconds;
    this.append(0, fromAmperes);
  }

  /** An edge from the level so far to `amperes`. */
  edge(startSeconds: number, lengthSeconds: number, amperes: number): void {
    this.append(startSeconds, this.level[this.level.length - 1]);
    this.append(startSeconds + lengthSeconds, amperes);
  }

  next(amperes: Float64Array, count: number): void {
    const { position, level, point } = this;
    let corner = this.corner;
    const last = position.length - 1;
    for (let i = 0; i < count; i++) {
      const n = point + i;
      while (corner < last && position[corner + 1] <= n) corner++;
      const from = level[corner];
      if (corner === last || level[corner + 1] === from) {
        amperes[i] = from;
        continue;
      }
      const share = (n - position[corner]) / (position[corner + 1] - position[corner]);
      amperes[i] = from + (level[corner + 1] - from) * share;
    }
    this.corner = corner;
    this.point = point + count;
  }

  private append(seconds: number, amperes: number): void {
    this.position.push(gridPlace(seconds, this.stepSeconds));
    this.level.push(amperes);
  }
}

export function step({ from_A, to_A, at_ms, edge_us }: ShapeSpec<'step'>, stepSeconds: number): Ramps {
  const ramps = new Ramps(stepSeconds, from_A);
  ramps.edge(at_ms / 1e3, edge_us / 1e6, to_A);
  return ramps;
}

export function staircase({ levels_A, hold_ms, edge_us }: ShapeSpec<'staircase'>, stepSeconds: number): Ramps {
  if (edge_us > hold_ms * 1e3 * (1 + ROUNDING)) {
    const most = hold_ms * 1e3;
    throw new RangeError(`edge_us: found ${edge_us}, allowed at most ${most}, the time on each level (hold_ms)`);
  }
  const edgeSeconds = Math.min(edge_us / 1e6, hold_ms / 1e3);
  const ramps = new Ramps(stepSeconds, levels_A[0]);
  for (let k = 1; k < levels_A.length; k++) ramps.edge((k * hold_ms) / 1e3, edgeSeconds, levels_A[k]);
  return ramps;
}

export function ramp({ from_A, to_A, at_ms, rise_ms }: ShapeSpec<'ramp'>, stepSeconds: number): Ramps {
  const ramps = new Ramps(stepSeconds, from_A);
  ramps.edge(at_ms / 1e3, rise_ms / 1e3, to_A);
  return ramps;
}

/** Both edges last the same, so the width between their starts is that between their middles. */
export function pulse({ base_A, peak_A, at_ms, width_us, edge_us }: ShapeSpec<'pulse'>, stepSeconds: number): Ramps {
  if (edge_us > width_us * (1 + ROUNDING)) {
    throw new RangeError(`edge_us: found ${edge_us}, allowed at most ${width_us}, the width of the pulse (width_us)`);
  }
  const edgeSeconds = Math.min(edge_us, width_us) / 1e6;
  const ramps = new Ramps(stepSeconds, base_A);
  ramps.edge(at_ms / 1e3, edgeSeconds, peak_A);
  ramps.edge((at_ms * 1e3 + width_us) / 1e6, edgeSeconds, base_A);
  return ramps;
}
