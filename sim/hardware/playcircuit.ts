/**
 * A play material in its magnetic circuit: solves N I = H path + B(H) gap/mu0 at every point, in closed form.
 *
 * Between two turns of the current the operators that move are always those with the smallest thresholds, so E is a
 * chain of straight lines in H and the memory is an index. On one line E = eb + s (H - hb), and with
 *   a = (path + air)/s,  c = N I - (path + air) (hb - eb/s),  air = gap * airPermeability/mu0
 * the curve Bs E/(|E| + knee) gives a quadratic for |E| whose one root >= 0 is taken in the form that does not cancel:
 *   a x^2 + (a knee + k Bs - |c|) x - |c| knee = 0,   k = gap/mu0.
 * E is exact to a few rounding errors; a line of slope s leaves H exact to that over s. All is mirrored while the
 * current falls, so that there is one direction to think about. Rate-independent: results depend on no block or step.
 */
import { MAGNETIC_CONSTANT, type MagneticCircuit } from './magnetic.ts';
import { saturate, type PlayMaterial } from './playmaterial.ts';

export class PlayCircuit implements MagneticCircuit {
  private readonly material: PlayMaterial;
  private readonly pathMetres: number;
  /** Outputs of the operators as of the last turn. */
  private readonly held: Float64Array;
  private linearMetres = 0;
  private gapTurnsPerTesla = 0;
  // mirrored by sense: the point reached
  private sense = 1;
  private turns = 0;
  private field = 0;
  private effective = 0;
  // mirrored by sense: the line that E follows, and where it ends
  private moving = 0;
  private lineField = 0;
  private lineEffective = 0;
  private lineSlope = 0;
  private lineEndTurns = 0;

  constructor(material: PlayMaterial, pathMetres: number, gapMetres: number) {
    this.material = material;
    this.pathMetres = pathMetres;
    this.held = new Float64Array(material.thresholds.length);
    this.setGap(gapMetres);
    this.demagnetise();
  }

  demagnetise(): void {
    this.held.fill(0);
    this.moving = 0;
    this.sense = 1;
    this.field = 0;
    this.branch(1);
  }

  setGap(gapMetres: number): void {
    const { airPermeability } = this.material;
    this.linearMetres = this.pathMetres + (gapMetres * airPermeability) / MAGNETIC_CONSTANT;
    this.gapTurnsPerTesla = gapMetres / MAGNETIC_CONSTANT;
    this.branch(1);
  }

  process(values: Float64Array, count: number): void {
    const { saturationTesla, knee, airPermeability } = this.material;
    const saturated = this.gapTurnsPerTesla * saturationTesla;
    let { sense, turns, field, effective, lineField, lineEffective, lineSlope, lineEndTurns } = this;
    let perSlope = 1 / lineSlope;
    let a = this.linearMetres * perSlope;
    let shift = this.linearMetres * lineField - a * lineEffective;
    let aKnee = a * knee;
    for (let i = 0; i < count; i++) {
      let target = sense * values[i];
      if (target < turns || target > lineEndTurns) {
        this.field = field;
        target *= this.lead(target, turns);
        ({ sense, lineField, lineEffective, lineSlope, lineEndTurns } = this);
        perSlope = 1 / lineSlope;
        a = this.linearMetres * perSlope;
        shift = this.linearMetres * lineField - a * lineEffective;
        aKnee = a * knee;
      }
      const c = target - shift;
      const size = Math.abs(c);
      const b = aKnee + saturated - size;
      const root = Math.sqrt(b * b + 4 * aKnee * size);
      const x = b > 0 ? (2 * knee * size) / (b + root) : (root - b) / (2 * a);
      effective = c < 0 ? -x : x;
      turns = target;
      field = lineField + (effective - lineEffective) * perSlope;
      values[i] = sense * ((saturationTesla * effective) / (x + knee) + airPermeability * field);
    }
    this.turns = turns;
    this.field = field;
    this.effective = effective;
  }

  /** Turns round if the target lies behind, then goes on to the line that holds it; -1 if it turned, else 1. */
  private lead(target: number, turns: number): number {
    const turn = target < turns ? -1 : 1;
    if (turn < 0) this.branch(-1);
    while (turn * target > this.lineEndTurns) this.nextLine();
    return turn;
  }

  /** Writes down what the moving operators hold and starts a branch from here, in the same or (-1) the other sense. */
  private branch(turn: 1 | -1): void {
    const { thresholds, weights, reversible } = this.material;
    const { held, moving, sense, field } = this;
    for (let i = 0; i < moving; i++) held[i] = sense * (field - thresholds[i]);
    this.sense = turn * sense;
    this.field = turn * field;
    let effective = reversible * this.field;
    for (let i = 0; i < held.length; i++) effective += weights[i] * this.sense * held[i];
    this.effective = effective;
    this.turns = this.turnsAt(this.field, effective);
    this.moving = 0;
    this.lineField = this.field;
    this.lineEffective = effective;
    this.lineSlope = reversible;
    this.lineEndTurns = this.endOfLine();
  }

  /** One more operator begins to move. */
  private nextLine(): void {
    const end = this.endField();
    this.lineEffective += this.lineSlope * (end - this.lineField);
    this.lineField = end;
    this.lineSlope += this.material.weights[this.moving];
    this.moving++;
    this.lineEndTurns = this.endOfLine();
  }

  private endOfLine(): number {
    const end = this.endField();
    if (end === Infinity) return Infinity;
    return this.turnsAt(end, this.lineEffective + this.lineSlope * (end - this.lineField));
  }

  private endField(): number {
    const { moving, held, sense, lineField } = this;
    if (moving >= held.length) return Infinity;
    // never behind: the two may differ by a rounding error where an operator is about to move
    return Math.max(lineField, sense * held[moving] + this.material.thresholds[moving]);
  }

  private turnsAt(field: number, effective: number): number {
    return this.linearMetres * field + this.gapTurnsPerTesla * saturate(this.material, effective);
  }
}
