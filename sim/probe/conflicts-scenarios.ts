/**
 * Scenarios in themselves: names apart, everything inside the duration, and currents that do what their fields say.
 * A current above half the sample rate, or beyond the range, is a legal thing to prove a probe against.
 */
import { mustBeBelow, mustDiffer, type Note, type Quantity } from './conflict.ts';
import type { CurrentSpec, Probe, Scenario } from './fields.ts';
import { pathTo } from './problem.ts';

/** Relative room for rounding where a length is compared with one computed from a frequency. */
const ROUNDING = 1 + 1e-9;

export function scenarioConflicts(probe: Probe, note: Note): void {
  const paths = probe.scenarios.map((_, index) => pathTo('scenarios', index));
  mustDiffer(note, probe.scenarios.map(({ name }, index) => ({ path: pathTo(paths[index], 'name'), name })));
  probe.scenarios.forEach((scenario, index) => {
    const duration = milliseconds(pathTo(paths[index], 'duration_ms'), scenario.duration_ms);
    mustBeBelow(note, milliseconds(pathTo(paths[index], 'judgeFrom_ms'), scenario.judgeFrom_ms), duration);
    scenario.events.forEach((event, place) => {
      const path = pathTo(pathTo(pathTo(paths[index], 'events'), place), 'at_ms');
      mustBeBelow(note, milliseconds(path, event.at_ms), duration);
    });
    currentConflicts(scenario, pathTo(paths[index], 'current'), duration, note);
  });
}

function milliseconds(path: string, value: number): Quantity {
  return { path, value, unit: 'ms' };
}

function currentConflicts(scenario: Scenario, path: string, duration: Quantity, note: Note): void {
  const current = scenario.current;
  switch (current.shape) {
    case 'sine':
      if (current.peak_A === 0) note(pathTo(path, 'peak_A'), '0 A', 'an amplitude that is not 0', 'or shape "dc"');
      return;
    case 'pwm': return pwmConflicts(current, path, note);
    case 'step': return mustBeBelow(note, milliseconds(pathTo(path, 'at_ms'), current.at_ms), duration);
    case 'staircase': return staircaseConflicts(current, path, duration, note);
  }
}

function pwmConflicts(current: Extract<CurrentSpec, { shape: 'pwm' }>, path: string, note: Note): void {
  const { low_A, high_A, frequency_Hz, duty_percent, edge_us } = current;
  if (low_A === high_A) {
    note(pathTo(path, 'high_A'), `${high_A} A`, `another current than ${pathTo(path, 'low_A')} (${low_A} A)`);
  }
  if (duty_percent === 0 || duty_percent === 100) return;
  const shorter_us = (1e6 / frequency_Hz) * (Math.min(duty_percent, 100 - duty_percent) / 100);
  if (edge_us > shorter_us * ROUNDING) {
    note(pathTo(path, 'edge_us'), `${edge_us} µs`,
      `at most the shorter of on and off time (${shorter_us} µs), which frequency_Hz and duty_percent give`,
      'a longer edge never reaches its level');
  }
}

function staircaseConflicts(
  current: Extract<CurrentSpec, { shape: 'staircase' }>, path: string, duration: Quantity, note: Note,
): void {
  const { levels_A, hold_ms, edge_us } = current;
  if (edge_us > hold_ms * 1000 * ROUNDING) {
    note(pathTo(path, 'edge_us'), `${edge_us} µs`, `at most ${pathTo(path, 'hold_ms')} (${hold_ms} ms)`,
      'a longer edge never reaches its level');
  }
  if (levels_A.some(Number.isNaN)) return;
  const lastFrom_ms = (levels_A.length - 1) * hold_ms;
  if (lastFrom_ms >= duration.value) {
    note(duration.path, `${duration.value} ms`, `above ${lastFrom_ms} ms, when the last of the ${levels_A.length} ` +
      `levels_A begins with this hold_ms`, 'a level that never comes proves nothing');
  }
}
