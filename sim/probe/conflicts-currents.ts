/**
 * A current in itself: one that moves where its shape promises it, edges that reach their level, and everything that
 * its fields tell of inside the duration. Parts of a sum follow the same rules.
 */
import { withUnit } from './allowed.ts';
import { mustBeBelow, mustNotExceed, type Note, type Quantity } from './conflict.ts';
import type { CurrentSpec } from './fields.ts';
import { pathTo } from './problem.ts';

type Of<K extends CurrentSpec['shape']> = Extract<CurrentSpec, { shape: K }>;

/** Relative room for rounding where a length is compared with one computed from a frequency. */
const ROUNDING = 1 + 1e-9;
const NEVER_REACHED = 'a longer edge never reaches its level';

export function currentConflicts(current: CurrentSpec, path: string, duration: Quantity, note: Note): void {
  const at = (name: string): string => pathTo(path, name);
  const begins = (at_ms: number): void => mustBeBelow(note, milliseconds(at('at_ms'), at_ms), duration);
  switch (current.shape) {
    case 'sine':
    case 'harmonics':
    case 'phaseCut':
    case 'sweep':
      if (current.peak_A === 0) note(at('peak_A'), '0 A', 'an amplitude that is not 0', 'or shape "dc"');
      if (current.shape === 'harmonics') harmonicsConflict(current, path, note);
      if (current.shape === 'phaseCut') phaseCutConflict(current, path, note);
      if (current.shape === 'sweep') mustNotExceed(note, milliseconds(at('over_ms'), current.over_ms), duration);
      return;
    case 'pwm': return pwmConflicts(current, path, note);
    case 'step': return begins(current.at_ms);
    case 'staircase': return staircaseConflicts(current, path, duration, note);
    case 'ripple':
      if (current.peakToPeak_A === 0) note(at('peakToPeak_A'), '0 A', 'a ripple above 0', 'or shape "dc"');
      return;
    case 'inrush': return begins(current.at_ms);
    case 'motor':
      begins(current.at_ms);
      return motorConflicts(current, path, duration, note);
    case 'pulse':
      begins(current.at_ms);
      return pulseConflicts(current, path, duration, note);
    case 'ramp':
      begins(current.at_ms);
      return rampConflicts(current, path, duration, note);
    case 'sum':
      if (current.times === 0) note(at('times'), '0', 'a factor that is not 0', 'or shape "dc"');
      return current.parts.forEach((part, index) => {
        currentConflicts(part, pathTo(at('parts'), index), duration, note);
      });
  }
}

function milliseconds(path: string, value: number): Quantity {
  return { path, value, unit: 'ms' };
}

function mustMove(note: Note, path: string, first: string, second: string, currents: [number, number]): void {
  if (currents[0] === currents[1]) {
    note(pathTo(path, second), withUnit(currents[1], 'A'),
      `another current than ${pathTo(path, first)} (${withUnit(currents[0], 'A')})`);
  }
}

function harmonicsConflict({ percents, phases_deg }: Of<'harmonics'>, path: string, note: Note): void {
  if (percents.length === 0 || percents.some(Number.isNaN)) return;
  if (phases_deg.length > percents.length) {
    note(pathTo(path, 'phases_deg'), `${phases_deg.length} phases`,
      `at most ${percents.length}, one for each of percents`, 'the phase of the fundamental is 0');
  }
}

function phaseCutConflict({ frequency_Hz, firing_deg, edge_us }: Of<'phaseCut'>, path: string, note: Note): void {
  if (firing_deg === 0 || firing_deg === 180) return;
  const left_us = ((180 - firing_deg) / 360) * (1e6 / frequency_Hz);
  if (edge_us > left_us * ROUNDING) {
    note(pathTo(path, 'edge_us'), `${edge_us} µs`,
      `at most the time from firing to the zero crossing (${left_us} µs), which frequency_Hz and firing_deg give`,
      'a longer edge never reaches the sine');
  }
}

function pwmConflicts(current: Of<'pwm'>, path: string, note: Note): void {
  const { low_A, high_A, frequency_Hz, duty_percent, edge_us } = current;
  mustMove(note, path, 'low_A', 'high_A', [low_A, high_A]);
  if (duty_percent === 0 || duty_percent === 100) return;
  const shorter_us = (1e6 / frequency_Hz) * (Math.min(duty_percent, 100 - duty_percent) / 100);
  if (edge_us > shorter_us * ROUNDING) {
    note(pathTo(path, 'edge_us'), `${edge_us} µs`,
      `at most the shorter of on and off time (${shorter_us} µs), which frequency_Hz and duty_percent give`,
      NEVER_REACHED);
  }
}

function staircaseConflicts(current: Of<'staircase'>, path: string, duration: Quantity, note: Note): void {
  const { levels_A, hold_ms, edge_us } = current;
  if (edge_us > hold_ms * 1000 * ROUNDING) {
    note(pathTo(path, 'edge_us'), `${edge_us} µs`, `at most ${pathTo(path, 'hold_ms')} (${hold_ms} ms)`,
      NEVER_REACHED);
  }
  if (levels_A.some(Number.isNaN)) return;
  const lastFrom_ms = (levels_A.length - 1) * hold_ms;
  if (lastFrom_ms >= duration.value) {
    note(duration.path, `${duration.value} ms`, `above ${lastFrom_ms} ms, when the last of the ${levels_A.length} ` +
      `levels_A begins with this hold_ms`, 'a level that never comes proves nothing');
  }
}

function motorConflicts(current: Of<'motor'>, path: string, duration: Quantity, note: Note): void {
  const { stall_A, run_A, runUp_ms, electrical_ms, at_ms, stallAt_ms } = current;
  mustBeBelow(note, milliseconds(pathTo(path, 'electrical_ms'), electrical_ms),
    milliseconds(pathTo(path, 'runUp_ms'), runUp_ms));
  if (Math.abs(run_A) > Math.abs(stall_A)) {
    note(pathTo(path, 'run_A'), `${run_A} A`, `no more than ${pathTo(path, 'stall_A')} (${stall_A} A)`,
      'a motor draws most while its rotor stands');
  }
  if (stallAt_ms === null) return;
  mustBeBelow(note, milliseconds(pathTo(path, 'stallAt_ms'), stallAt_ms), duration);
  mustNotExceed(note, milliseconds(pathTo(path, 'at_ms'), at_ms), milliseconds(pathTo(path, 'stallAt_ms'), stallAt_ms));
}

function pulseConflicts(current: Of<'pulse'>, path: string, duration: Quantity, note: Note): void {
  const { base_A, peak_A, at_ms, width_us, edge_us } = current;
  mustMove(note, path, 'base_A', 'peak_A', [base_A, peak_A]);
  mustNotExceed(note, { path: pathTo(path, 'edge_us'), value: edge_us, unit: 'µs' },
    { path: pathTo(path, 'width_us'), value: width_us, unit: 'µs' });
  const end_ms = at_ms + (width_us + edge_us) / 1e3;
  if (at_ms < duration.value && edge_us <= width_us && end_ms > duration.value * ROUNDING) {
    note(pathTo(path, 'width_us'), `${width_us} µs`, `a pulse that ends (at_ms, width_us and edge_us: ${end_ms} ms) ` +
      `by ${duration.path} (${duration.value} ms)`, 'or shape "step"');
  }
}

function rampConflicts(current: Of<'ramp'>, path: string, duration: Quantity, note: Note): void {
  const { from_A, to_A, at_ms, rise_ms } = current;
  mustMove(note, path, 'from_A', 'to_A', [from_A, to_A]);
  if (at_ms < duration.value && at_ms + rise_ms > duration.value * ROUNDING) {
    note(pathTo(path, 'rise_ms'), `${rise_ms} ms`,
      `a ramp that ends (at_ms and rise_ms: ${at_ms + rise_ms} ms) by ${duration.path} (${duration.value} ms)`,
      'a level that never comes proves nothing');
  }
}
