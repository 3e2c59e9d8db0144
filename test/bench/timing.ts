/** Median time of a piece of work over several rounds, in nanoseconds an item. */
const ROUNDS = 7;

export function nanosecondsAnItem(items: number, work: () => void): number {
  work();
  const times: number[] = [];
  for (let round = 0; round < ROUNDS; round++) {
    const from = process.hrtime.bigint();
    work();
    times.push(Number(process.hrtime.bigint() - from) / items);
  }
  return times.sort((a, b) => a - b)[ROUNDS >> 1];
}
