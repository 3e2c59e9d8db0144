/**
 * The delay that a chain states: the group delay at DC of every stage, from its integers, added up in input samples.
 * For a section  (b1 + 2 b2) / (b0 + b1 + b2) - (a1 + 2 a2) / (1 + a1 + a2);  a high-pass passes no DC and counts 0.
 */
import type { SectionConstants, StageConstants } from '../../lib/index.ts';
import type { Probe } from '../probe/fields.ts';

export function delayOf(design: readonly StageConstants[], ratios: readonly number[], probe: Probe): number {
  let delay = 0;
  design.forEach((stage, index) => {
    const ratioAhead = index === 0 ? 1 : ratios[index - 1];
    delay += ratioAhead * stageDelay(stage, probe.sensor.biasPhase_samples / ratioAhead);
  });
  return delay;
}

/** In samples at the input of the stage; `phaseSamples`: the length of a bias phase there. */
export function stageDelay(stage: StageConstants, phaseSamples: number): number {
  switch (stage.kind) {
    case 'despike': return (stage.window - 1) / 2;
    case 'average': return (stage.length - 1) / 2;
    case 'decimate': return (stage.order * (stage.ratio - 1)) / 2;
    case 'sections': return stage.sections.reduce((sum, section) => sum + sectionDelay(section), 0);
    // the means are half the common length of all phases old when the last one ends, less half of what is blanked at
    // their begin; the output is then held for a phase, half a phase on average
    case 'demodulate': return (((stage.quarter === 1 ? 4 : 2) + 1) * phaseSamples - stage.blank) / 2;
    default: return 0;
  }
}

function sectionDelay({ fractionBits, b0, b1, b2, a1, a2 }: SectionConstants): number {
  const ahead = b0 + b1 + b2;
  if (ahead === 0) return 0;
  return (b1 + 2 * b2) / ahead - (a1 + 2 * a2) / (2 ** fractionBits + a1 + a2);
}
