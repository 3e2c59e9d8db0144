/** Where the hardware had to clip, as bits. The judge sees them, the chain never does. */
export const CLIP_SENSOR = 1;
export const CLIP_AMPLIFIER = 2;
export const CLIP_CONVERTER = 4;

/** Holds values within the limits, in place; marks where it had to and returns how often. */
export function clipBlock(
  values: Float64Array, marks: Uint8Array, count: number, low: number, high: number, bit: number,
): number {
  let clips = 0;
  for (let i = 0; i < count; i++) {
    const value = values[i];
    if (value >= low && value <= high) continue;
    values[i] = value < low ? low : high;
    marks[i] |= bit;
    clips++;
  }
  return clips;
}
