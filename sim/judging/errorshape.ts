/**
 * What an error is made of: least squares of the error on 1, the true current and its slope,
 *   error = offset + gain * truth - lag * slope + rest
 * and which of them makes up most of the worst error. Normal equations, summed while the readings pass.
 */
interface Point {
  error: number;
  truth: number;
  slope: number;
}

export interface Parts {
  offsetAmperes: number;
  gain: number;
  lagSeconds: number;
  restRmsAmperes: number;
}

export class ErrorShape {
  private count = 0;
  /** Sums of the products of truth, slope and error. */
  private readonly sums = new Float64Array(10);

  hear(error: number, truth: number, slope: number): void {
    const s = this.sums;
    this.count++;
    s[0] += truth;
    s[1] += slope;
    s[2] += error;
    s[3] += truth * truth;
    s[4] += truth * slope;
    s[5] += truth * error;
    s[6] += slope * slope;
    s[7] += slope * error;
    s[8] += error * error;
  }

  /** false: the current varies by less than 0.1 % (RMS), so that a gain cannot be told from a zero. */
  private currentMoves(): boolean {
    const [t, , , tt] = this.sums;
    return tt - (t * t) / this.count > 1e-6 * tt;
  }

  /** Parts that the readings cannot tell apart (a current that never changes has no gain) are left at zero. */
  parts(): Parts {
    const n = this.count;
    const [t, s, e, tt, ts, te, ss, se, ee] = this.sums;
    const varT = tt - (t * t) / n;
    const varS = ss - (s * s) / n;
    const covTS = ts - (t * s) / n;
    const covTE = te - (t * e) / n;
    const covSE = se - (s * e) / n;
    const movesT = this.currentMoves();
    const movesS = varS > 1e-12 * (ss + 1e-30);
    let gain = 0;
    let lag = 0;
    const determinant = varT * varS - covTS * covTS;
    if (movesT && movesS && determinant > 1e-9 * varT * varS) {
      gain = (covTE * varS - covSE * covTS) / determinant;
      lag = -(covSE * varT - covTE * covTS) / determinant;
    } else if (movesT) {
      gain = covTE / varT;
    } else if (movesS) {
      lag = -covSE / varS;
    }
    const offset = (e - gain * t + lag * s) / n;
    const rest = ee - offset * e - gain * te + lag * se;
    return { offsetAmperes: offset, gain, lagSeconds: lag, restRmsAmperes: Math.sqrt(Math.max(0, rest) / n) };
  }

  private nameOfOffset(): string {
    const always = this.sums[0] / this.count;
    if (this.currentMoves() || always === 0) return 'zero';
    return `zero or gain: the judged current is always ${always.toPrecision(3)} A`;
  }

  /** The part that makes up most of the error at a point, in words. */
  words(point: Point): string {
    const { offsetAmperes, gain, lagSeconds, restRmsAmperes } = this.parts();
    const shares: [number, string][] = [
      [offsetAmperes, `the reading is off by a steady ${signed(offsetAmperes)} A (${this.nameOfOffset()})`],
      [gain * point.truth, `the reading is ${signed(gain * 100)} % of the true current off (gain)`],
      [-lagSeconds * point.slope, lagSeconds > 0
        ? `the reading lags the stated delay by ${time(lagSeconds)} where the current changes by ${Math.abs(point.slope).toPrecision(3)} A/s`
        : `the reading runs ahead of the stated delay by ${time(-lagSeconds)}`],
    ];
    const rest = point.error - shares.reduce((sum, [part]) => sum + part, 0);
    shares.push([rest, `what is neither zero, gain nor delay: ${signed(rest)} A here, ${restRmsAmperes.toPrecision(3)} A RMS ` +
      '(noise, ripple, edges that the filter rounds off)']);
    // parts may cancel: the one that pushes most in the direction of the error
    const pushing = shares.map(([part, words]): [number, string] => [part * Math.sign(point.error), words]);
    pushing.sort((one, other) => other[0] - one[0]);
    return pushing[0][1];
  }
}

function signed(value: number): string {
  return (value < 0 ? '−' : '+') + Math.abs(value).toPrecision(3);
}

function time(seconds: number): string {
  return seconds >= 1 ? `${seconds.toPrecision(3)} s` : seconds >= 1e-3 ? `${(seconds * 1e3).toPrecision(3)} ms` : `${(seconds * 1e6).toPrecision(3)} µs`;
}
