/**
 * Scenarios in themselves: names apart, everything inside the duration, surroundings that can be.
 * A current above half the sample rate, or beyond the range, is a legal thing to prove a probe against.
 */
import { mustAscend, mustBeBelow, mustDiffer, type Note, type Quantity } from './conflict.ts';
import { currentConflicts } from './conflicts-currents.ts';
import type { Probe, Scenario } from './fields.ts';
import { pathTo } from './problem.ts';

type Event = Scenario['events'][number];

/** What is one thing or the other at any time; the rest are signals that may come as they like. */
const STATES: readonly Event['event'][] = ['jaw opened', 'polarity'];

export function scenarioConflicts(probe: Probe, note: Note): void {
  const paths = probe.scenarios.map((_, index) => pathTo('scenarios', index));
  mustDiffer(note, probe.scenarios.map(({ name }, index) => ({ path: pathTo(paths[index], 'name'), name })));
  probe.scenarios.forEach((scenario, index) => {
    const path = paths[index];
    const duration = milliseconds(pathTo(path, 'duration_ms'), scenario.duration_ms);
    mustBeBelow(note, milliseconds(pathTo(path, 'judgeFrom_ms'), scenario.judgeFrom_ms), duration);
    eventConflicts(scenario.events, pathTo(path, 'events'), duration, note);
    mustAscend(note, pathTo(path, 'ambient'), 'at_ms', 'ms', scenario.ambient.map((point) => point.at_ms));
    supplyConflict(scenario, path, probe, note);
    coilConflicts(scenario, path, probe, duration, note);
    currentConflicts(scenario.current, pathTo(path, 'current'), duration, note);
  });
}

function milliseconds(path: string, value: number): Quantity {
  return { path, value, unit: 'ms' };
}

function eventConflicts(events: readonly Event[], path: string, duration: Quantity, note: Note): void {
  events.forEach((event, place) => {
    const own = pathTo(path, place);
    mustBeBelow(note, milliseconds(pathTo(own, 'at_ms'), event.at_ms), duration);
    if (!STATES.includes(event.event)) return;
    if (event.at_ms < duration.value && event.at_ms + event.for_ms > duration.value) {
      note(pathTo(own, 'for_ms'), `${event.for_ms} ms`,
        `at most ${duration.value - event.at_ms} ms, which at_ms leaves of ${duration.path} (${duration.value} ms)`);
    }
  });
  for (const state of STATES) overlapConflicts(state, events, path, note);
}

/** In order of time, each must be over when the next one begins. */
function overlapConflicts(state: Event['event'], events: readonly Event[], path: string, note: Note): void {
  const alike = events.map((event, place) => ({ ...event, own: pathTo(path, place) }))
    .filter(({ event, at_ms, for_ms }) => event === state && at_ms + for_ms >= 0)
    .sort((one, other) => one.at_ms - other.at_ms);
  for (let i = 1; i < alike.length; i++) {
    const before = alike[i - 1];
    const end_ms = before.at_ms + before.for_ms;
    if (alike[i].at_ms >= end_ms) continue;
    note(pathTo(alike[i].own, 'at_ms'), `${alike[i].at_ms} ms`, `${end_ms} ms or later, when the event ` +
      `${JSON.stringify(state)} of ${before.own} is over (its at_ms and for_ms)`);
  }
}

function supplyConflict(scenario: Scenario, path: string, probe: Probe, note: Note): void {
  const start_V = scenario.supply_V ?? probe.supply_V.nominal;
  const fall_V = (scenario.supplySag_mV_per_s / 1e3) * (scenario.duration_ms / 1e3);
  if (fall_V < start_V || Number.isNaN(fall_V) || Number.isNaN(start_V)) return;
  note(pathTo(path, 'supplySag_mV_per_s'), `${scenario.supplySag_mV_per_s} mV/s`,
    `a fall that leaves some of the supply_V of ${start_V} V over duration_ms (${scenario.duration_ms} ms)`);
}

function coilConflicts(scenario: Scenario, path: string, probe: Probe, duration: Quantity, note: Note): void {
  if (scenario.coil === null) return;
  const coil = pathTo(path, 'coil');
  mustBeBelow(note, milliseconds(pathTo(coil, 'at_ms'), scenario.coil.at_ms), duration);
  // of a scenario that could not be read nobody knows whether it has a coil
  if (probe.core.coilTurns === 0 && !Number.isNaN(scenario.coil.at_ms)) {
    note(coil, 'a current in the coil', 'no such current, as the core has no coil (core.coilTurns is 0)');
  }
}
