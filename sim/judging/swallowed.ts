/**
 * The largest direct current that each zero of a chain may remove, in amperes, from the constants. A start-up zero is
 * taken wherever the mean lies within its window of the factory zero, so it may take a current as large as that
 * window; tracking follows a steady current up to its authority, as far as its own window lets it see one. Both hold
 * for a unit whose true zero is its factory zero; a zero that has drifted by d towards the window's edge adds d.
 */
import type { StageConstants } from '../../lib/index.ts';

export interface Swallowed {
  stage: number;
  /** 'button' is a zero that somebody asked for; the others are automatic. */
  by: 'start-up' | 'tracking' | 'button';
  amperes: number;
}

export function swallowedOf(design: readonly StageConstants[], countsPerAmpere: number): Swallowed[] {
  const list: Swallowed[] = [];
  design.forEach((stage, index) => {
    if (stage.kind !== 'zero') return;
    const window = stage.windowLimit / countsPerAmpere;
    if (stage.startMode === 1) list.push({ stage: index, by: 'start-up', amperes: window });
    if (stage.trackMode === 1) {
      list.push({ stage: index, by: 'tracking', amperes: Math.min(stage.authority, stage.trackWindow) / countsPerAmpere });
    }
    if (stage.buttonMode === 1) list.push({ stage: index, by: 'button', amperes: window });
  });
  return list;
}

/** What all automatic zeroing together may remove. */
export function swallowedAutomatically(list: readonly Swallowed[]): number {
  return list.filter((entry) => entry.by !== 'button').reduce((sum, entry) => sum + entry.amperes, 0);
}
