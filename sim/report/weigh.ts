/** Front ends beside the probe on a terminal: what each takes and cannot do, and its errors scenario by scenario. */
import type { WeighedScenario } from '../judging/errortally.ts';
import { told } from '../judging/shortcomings.ts';
import type { Weighed } from '../judging/weigh.ts';

/** Nothing where the probe file has no front end to weigh. */
export function weighedLines(weighed: readonly Weighed[]): string[] {
  return weighed.flatMap(({ frontEnd, sentences, scenarios }) => [
    '', `Weighed against the probe on the same currents, uncalibrated: a ${frontEnd}`,
    ...sentences.map((sentence) => `  ${sentence}`),
    `  ${'worst error'.padStart(12)}${'RMS error'.padStart(12)}${'clipped'.padStart(10)}  scenario`,
    ...scenarios.flatMap(scenarioLines),
  ]);
}

function scenarioLines({ scenario, worstAmperes, rmsAmperes, clippedShare, sentences }: WeighedScenario): string[] {
  const columns = worstAmperes === null || rmsAmperes === null || clippedShare === null
    ? 'nothing is judged'.padStart(34)
    : `${told(worstAmperes, 'A').padStart(12)}${told(rmsAmperes, 'A').padStart(12)}` +
      `${`${Number((clippedShare * 100).toPrecision(3))} %`.padStart(10)}`;
  return [`  ${columns}  ${scenario}`, ...sentences.map((sentence) => `${' '.repeat(38)}${sentence}`)];
}
