/**
 * Filters from hertz to second-order sections in float64: Butterworth low-pass and high-pass of order 1..8 and a
 * notch, by the bilinear transform with the corner prewarped, so the -3 dB point stands exactly at the corner.
 * Poles of order n stand at angles on the unit circle (S. Butterworth, "On the theory of filter amplifiers", 1930);
 * bilinear transform: A. V. Oppenheim, R. W. Schafer, Discrete-Time Signal Processing, section 7.1.
 */
export interface Biquad {
  /** 0 all ahead: a first-order section. */
  b: [number, number, number];
  a1: number;
  a2: number;
}

/** Sections of a Butterworth filter, the flattest first, corner as a share of the sample rate (0 < corner < 1/2). */
export function butterworth(kind: 'low-pass' | 'high-pass', order: number, cornerOverRate: number): Biquad[] {
  const k = Math.tan(Math.PI * cornerOverRate);
  const sections: Biquad[] = [];
  if (order % 2 === 1) sections.push(firstOrder(kind, k));
  for (let pair = Math.floor(order / 2) - 1; pair >= 0; pair--) {
    // angle of this pole pair from the negative real axis; its Q is 1 / (2 cos angle)
    const angle = (Math.PI * (order - 1 - 2 * pair)) / (2 * order);
    sections.push(secondOrder(kind, k, 1 / (2 * Math.cos(angle))));
  }
  return sections.sort((one, other) => one.a2 - other.a2);
}

function firstOrder(kind: 'low-pass' | 'high-pass', k: number): Biquad {
  const a1 = (k - 1) / (1 + k);
  return kind === 'low-pass'
    ? { b: [k / (1 + k), k / (1 + k), 0], a1, a2: 0 }
    : { b: [1 / (1 + k), -1 / (1 + k), 0], a1, a2: 0 };
}

function secondOrder(kind: 'low-pass' | 'high-pass', k: number, q: number): Biquad {
  const scale = 1 / (1 + k / q + k * k);
  const a1 = 2 * (k * k - 1) * scale;
  const a2 = (1 - k / q + k * k) * scale;
  return kind === 'low-pass'
    ? { b: [k * k * scale, 2 * k * k * scale, k * k * scale], a1, a2 }
    : { b: [scale, -2 * scale, scale], a1, a2 };
}

/** Notch at centre with a -3 dB width, both as shares of the sample rate; gain 1 at DC and at half the rate. */
export function notch(centreOverRate: number, widthOverRate: number): Biquad {
  const bandwidth = Math.tan(Math.PI * widthOverRate);
  const gain = 1 / (1 + bandwidth);
  const cosine = Math.cos(2 * Math.PI * centreOverRate);
  return { b: [gain, -2 * gain * cosine, gain], a1: -2 * gain * cosine, a2: 2 * gain - 1 };
}

/** Magnitude at a frequency (share of the rate) of sections behind one another. */
export function magnitudeAt(sections: readonly Biquad[], frequencyOverRate: number): number {
  const w = 2 * Math.PI * frequencyOverRate;
  let magnitude = 1;
  for (const { b, a1, a2 } of sections) {
    const ahead = Math.hypot(b[0] + b[1] * Math.cos(w) + b[2] * Math.cos(2 * w), b[1] * Math.sin(w) + b[2] * Math.sin(2 * w));
    const back = Math.hypot(1 + a1 * Math.cos(w) + a2 * Math.cos(2 * w), a1 * Math.sin(w) + a2 * Math.sin(2 * w));
    magnitude *= ahead / back;
  }
  return magnitude;
}
