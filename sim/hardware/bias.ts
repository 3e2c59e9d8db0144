/**
 * Switched bias of the Hall plate. In each phase the signal and the offset of the plate appear with these signs; what
 * lies behind the plate (rest output, amplifier) keeps its sign.
 *   reversal:      signal + -       plate offset + -        (V0 - V1)/2 removes what lies behind, not the plate offset
 *   quarter turn:  signal + + - -   plate offset + - - +    (V0 + V90 - V180 - V270)/4 keeps only the signal
 * Each phase lasts biasPhase_samples A/D samples; sample 0 is the first of phase 0.
 * Source: R. S. Popovic, "Hall Effect Devices", 2nd ed. 2003, connection commutation (from memory).
 */
import { EVENT_QUARTER, EVENT_REVERSED } from '../../lib/status.ts';
import type { SensorUnit } from './draw.ts';

export interface BiasPhase {
  signal: number;
  plate: number;
  /** Event bits that tell the chain. */
  events: number;
}

// with a steady bias the plate offset is part of the rest output already
const STEADY: readonly BiasPhase[] = [{ signal: 1, plate: 0, events: 0 }];
const REVERSAL: readonly BiasPhase[] = [
  { signal: 1, plate: 1, events: 0 },
  { signal: -1, plate: -1, events: EVENT_REVERSED },
];
const QUARTER_TURN: readonly BiasPhase[] = [
  { signal: 1, plate: 1, events: 0 },
  { signal: 1, plate: -1, events: EVENT_QUARTER },
  { signal: -1, plate: -1, events: EVENT_REVERSED },
  { signal: -1, plate: 1, events: EVENT_REVERSED | EVENT_QUARTER },
];

export function biasPhases(bias: SensorUnit['bias']): readonly BiasPhase[] {
  if (bias === 'reversal') return REVERSAL;
  return bias === 'quarter turn' ? QUARTER_TURN : STEADY;
}
