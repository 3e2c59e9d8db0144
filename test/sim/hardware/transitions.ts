/** Code transition levels of a converter and their errors, IEEE Std 1241 (from memory). */
import type { Converter } from '../../../sim/hardware/converter.ts';

const mark = new Uint8Array(1);

/** Voltage of each transition 1 .. 2^bits - 1 in units of 1 V a code, by bisection to 2^-32 of the range. */
export function measuredTransitions(converter: Converter, bits: number): number[] {
  return Array.from({ length: 2 ** bits - 1 }, (_, k) => {
    let low = -(2 ** bits);
    let high = 2 ** (bits + 1);
    for (let i = 0; i < 34; i++) {
      const middle = (low + high) / 2;
      if (converter.code(middle, 0, mark, 0) > k) high = middle;
      else low = middle;
    }
    return (low + high) / 2;
  });
}

/** In LSB, with the LSB and the line through the two end transitions. */
export function endPointErrors(transitions: number[]): { dnl: number[]; inl: number[] } {
  const last = transitions.length - 1;
  const lsb = (transitions[last] - transitions[0]) / last;
  return {
    dnl: transitions.slice(1).map((level, k) => (level - transitions[k]) / lsb - 1),
    inl: transitions.map((level, k) => (level - transitions[0]) / lsb - k),
  };
}

/** From the counts of codes under a sine C - A cos that visits every phase alike. */
export function histogramTransitions(counts: number[], amplitude: number, centre: number): number[] {
  const total = counts.reduce((sum, count) => sum + count, 0);
  let below = 0;
  return counts.slice(0, -1).map((count) => centre - amplitude * Math.cos((Math.PI * (below += count)) / total));
}
