/** Plays a current through a front end in pieces of the given lengths, then the rest. */
interface FrontEnd {
  process(values: Float64Array, marks: Uint8Array, count: number): void;
}

export function cutAt(
  frontEnd: FrontEnd, amperes: Float64Array, lengths: readonly number[],
): { volts: Float64Array; marks: Uint8Array } {
  const volts = Float64Array.from(amperes);
  const marks = new Uint8Array(volts.length);
  let at = 0;
  for (const length of [...lengths, volts.length]) {
    const end = Math.min(volts.length, at + length);
    frontEnd.process(volts.subarray(at, end), marks.subarray(at, end), end - at);
    at = end;
  }
  return { volts, marks };
}
