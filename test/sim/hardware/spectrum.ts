/** One-sided power density of a record: mean over segments of 2^n points under a Hann window, half overlapped. */
export function density(values: Float64Array, segment: number, stepSeconds: number): Float64Array {
  const mean = new Float64Array(segment / 2);
  const window = Float64Array.from({ length: segment }, (_, n) => 0.5 - 0.5 * Math.cos((2 * Math.PI * n) / segment));
  const starts: number[] = [];
  for (let start = 0; start + segment <= values.length; start += segment / 2) starts.push(start);
  for (const start of starts) {
    const re = Float64Array.from(window, (w, n) => w * values[start + n]);
    const im = new Float64Array(segment);
    fourier(re, im);
    // sum of the squared window is 3/8 of the points
    for (let k = 0; k < segment / 2; k++) mean[k] += (2 * stepSeconds * (re[k] ** 2 + im[k] ** 2)) / (0.375 * segment);
  }
  return mean.map((sum) => sum / starts.length);
}

function fourier(re: Float64Array, im: Float64Array): void {
  const n = re.length;
  for (let i = 1, j = 0; i < n; i++) {
    let bit = n >> 1;
    for (; j & bit; bit >>= 1) j ^= bit;
    j ^= bit;
    if (i < j) {
      [re[i], re[j]] = [re[j], re[i]];
      [im[i], im[j]] = [im[j], im[i]];
    }
  }
  for (let half = 1; half < n; half *= 2) {
    for (let k = 0; k < half; k++) {
      const cos = Math.cos((Math.PI * k) / half);
      const sin = -Math.sin((Math.PI * k) / half);
      for (let a = k; a < n; a += 2 * half) {
        const b = a + half;
        const x = re[b] * cos - im[b] * sin;
        const y = re[b] * sin + im[b] * cos;
        re[b] = re[a] - x;
        im[b] = im[a] - y;
        re[a] += x;
        im[a] += y;
      }
    }
  }
}
