/**
 * Butterworth low-pass of order 2 to 4, exact at the grid points for an input that is a straight line between them.
 *   H(s) = product of 1/(1 - s/p_i),  p_i = 2 pi cornerHz * exp(j (pi/2 + pi (2 i + 1)/(2 order)))
 * As a sum of single poles, each holding how far it is from its steady state (time in units of 1/(2 pi cornerHz)):
 *   y = x + sum D_i,  D_i' = exp(p_i h) D_i + r_i (exp(p_i h) - 1)/(p_i^2 h) * (x' - x),  r_i = 1/product (p_i - p_j)
 * so a constant stays exactly that constant. Starts in steady state at the first sample.
 * Sources: textbook linear systems (partial fractions, first-order hold); S. Butterworth, Wireless Engineer 7 (1930).
 */
export class Butterworth {
  /** Of two conjugate pairs (the second: order 4), for both of each: kept (re, im), weight of a change (re, im). */
  private readonly weights = new Float64Array(8);
  private readonly state = new Float64Array(4);
  private readonly realKeep: number;
  private readonly realWeight: number;
  private realState = 0;
  private x0 = 0;
  private started = false;

  constructor(order: number, cornerHz: number, stepSeconds: number) {
    if (!Number.isInteger(order) || order < 2 || order > 4) {
      throw new RangeError(`order: found ${order}, allowed 2 to 4`);
    }
    const poles = Array.from({ length: order }, (_, i) => {
      const angle = Math.PI / 2 + (Math.PI * (2 * i + 1)) / (2 * order);
      return { re: Math.cos(angle), im: Math.sin(angle) };
    });
    const step = 2 * Math.PI * cornerHz * stepSeconds;
    for (let i = 0; i < Math.floor(order / 2); i++) this.weights.set(pairWeights(poles, i, step), 4 * i);
    this.realKeep = Math.exp(-step);
    // of order 3 only: the product over the pair around a pole at -1 is |exp(j 2 pi/3) + 1|^2 = 1
    this.realWeight = order === 3 ? Math.expm1(-step) / step : 0;
  }

  reset(): void {
    this.started = false;
  }

  process(values: Float64Array, count: number): void {
    if (count === 0) return;
    if (!this.started) this.begin(values[0]);
    const [keepRe, keepIm, weightRe, weightIm, keepRe2, keepIm2, weightRe2, weightIm2] = this.weights;
    const { state, realKeep, realWeight } = this;
    let [re, im, re2, im2] = state;
    let { x0, realState } = this;
    for (let i = 0; i < count; i++) {
      const x1 = values[i];
      const change = x1 - x0;
      const next = keepRe * re - keepIm * im + weightRe * change;
      im = keepRe * im + keepIm * re + weightIm * change;
      re = next;
      const next2 = keepRe2 * re2 - keepIm2 * im2 + weightRe2 * change;
      im2 = keepRe2 * im2 + keepIm2 * re2 + weightIm2 * change;
      re2 = next2;
      realState = realKeep * realState + realWeight * change;
      values[i] = x1 + (re + re2 + realState);
      x0 = x1;
    }
    state[0] = re;
    state[1] = im;
    state[2] = re2;
    state[3] = im2;
    this.x0 = x0;
    this.realState = realState;
  }

  private begin(input: number): void {
    this.started = true;
    this.x0 = input;
    this.state.fill(0);
    this.realState = 0;
  }
}

interface Complex {
  re: number;
  im: number;
}

function times(a: Complex, b: Complex): Complex {
  return { re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re };
}

function inverse(a: Complex): Complex {
  const square = a.re * a.re + a.im * a.im;
  return { re: a.re / square, im: -a.im / square };
}

/** keep re, keep im, weight re, weight im of pole i and its conjugate together. */
function pairWeights(poles: Complex[], i: number, step: number): number[] {
  const pole = poles[i];
  let residue: Complex = { re: 2, im: 0 }; // a pair adds twice the real part
  for (const other of poles) {
    if (other !== pole) residue = times(residue, inverse({ re: pole.re - other.re, im: pole.im - other.im }));
  }
  const decay = Math.exp(pole.re * step);
  const angle = pole.im * step;
  // exp(p h) - 1 without cancellation
  const moved: Complex = {
    re: Math.expm1(pole.re * step) * Math.cos(angle) - 2 * Math.sin(angle / 2) ** 2, im: decay * Math.sin(angle),
  };
  const weight = times(times(residue, moved), inverse(times(pole, pole)));
  return [decay * Math.cos(angle), decay * Math.sin(angle), weight.re / step, weight.im / step];
}
