/** Proves probes given as plain data, for tests. */
import { prove, type Row, type Verdict } from '../../../sim/judging/prove.ts';
import type { Probe } from '../../../sim/probe/fields.ts';
import { probeOf, type Given } from '../probes.ts';

/** A probe that its file's rules would refuse: changed behind them. */
export type Alter = (probe: Probe) => void;

export function verdictOf(given: Given, options: { seed?: number; trial?: number; only?: string } = {}, alter: Alter = () => {}): Verdict {
  const probe = probeOf(given);
  alter(probe);
  const proving = prove(probe, { seed: 1, trial: 0, folder: '.', ...options });
  for (;;) {
    const step = proving.next();
    if (step.done) return step.value;
  }
}

export function rowOf(given: Given, id: string, alter?: Alter): Row {
  const { rows } = verdictOf(given, {}, alter);
  const row = rows.find((candidate) => candidate.id === id);
  if (row === undefined) throw new Error(`no row ${id} among ${rows.map((one) => one.id).join(', ')}`);
  return row;
}
