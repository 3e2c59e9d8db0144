/**
 * The longest period of a current, in seconds; null for a current that does not repeat, or whose period is not known
 * (a recorded one). A sum is judged by the slowest of its periodic parts; what does not repeat in it does not count.
 */
import type { CurrentSpec } from '../probe/fields.ts';

type Part = Exclude<CurrentSpec, { shape: 'sum' }>;

export function longestPeriodSeconds(current: CurrentSpec): number | null {
  const parts: readonly Part[] = current.shape === 'sum' ? current.parts : [current];
  const periods = parts.map(periodSeconds).filter((period) => period !== null);
  return periods.length === 0 ? null : Math.max(...periods);
}

function periodSeconds(part: Part): number | null {
  switch (part.shape) {
    case 'sine':
    case 'pwm':
    case 'harmonics':
    case 'ripple':
    case 'phaseCut': return 1 / part.frequency_Hz;
    case 'inrush': return part.frequency_Hz > 0 ? 1 / part.frequency_Hz : null;
    case 'sweep': return 1 / Math.min(part.from_Hz, part.to_Hz);
    default: return null;
  }
}
