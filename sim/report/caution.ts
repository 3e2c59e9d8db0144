/** What every verdict, page and guide says about live conductors. One place for the words. */
export const CAUTIONS: readonly string[] = [
  'A simulated reading is no evidence that a conductor is dead or safe.',
  'Use hand-held current sensors only within their marked measurement category and voltage (IEC 61010-2-032), and follow local codes.',
  'Work on live circuits is for licensed or authorised people.',
];

/** What a verdict does not say about production. */
export function reachOfVerdict(verdict: { seed: number; trial: number; tolerances: number }): string {
  const { seed, trial, tolerances } = verdict;
  const parts = trial === 0 ? 'with nominal parts'
    : tolerances === 0 ? 'whose parts have no tolerance in the probe file, so it is the nominal unit'
      : `with ${tolerances} parts drawn within their tolerances (trial ${trial})`;
  return `This verdict is of one unit ${parts}, seed ${seed}; it says nothing about the spread of a production.`;
}
