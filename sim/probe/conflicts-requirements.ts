/**
 * Requirements in themselves and against the scenarios and meters they name: an allowance of zero, limits in the wrong
 * order, frequencies that the sample rate cannot show, a window longer than the scenario. What a measure needs of the
 * current it is judged at: conflicts-measures.ts.
 */
import { oneOf } from './allowed.ts';
import { mustNotExceed, type Note } from './conflict.ts';
import { metersOf, meterNames, rateAhead } from './conflicts-chain.ts';
import { measureConflicts } from './conflicts-measures.ts';
import type { Probe, Requirement, Scenario, StageSpecOf } from './fields.ts';
import { nearest } from './nearest.ts';
import { pathTo } from './problem.ts';

type Metered = Extract<Requirement, { meter: string }>;
type Allowed = Extract<Requirement, { percentOfReading: number }>;

export function requirementConflicts(probe: Probe, note: Note): void {
  probe.requirements.forEach((requirement, index) => {
    const path = pathTo('requirements', index);
    if ('percentOfReading' in requirement) allowanceConflict(requirement, path, note);
    if ('lowest_C' in requirement) {
      mustNotExceed(note, { path: pathTo(path, 'lowest_C'), value: requirement.lowest_C, unit: '°C' },
        { path: pathTo(path, 'highest_C'), value: requirement.highest_C, unit: '°C' });
    }
    if (requirement.measure === 'band') bandConflicts(requirement, path, probe, note);
    if (requirement.measure === 'bandwidth') bandwidthConflict(requirement, path, probe, note);
    const scenario = 'scenario' in requirement ? scenarioOf(requirement.scenario, path, probe, note) : null;
    const meter = 'meter' in requirement ? meterOf(requirement, path, probe, note) : null;
    if (scenario === null || !('scenario' in requirement)) return;
    if ('percentOfReading' in requirement) zeroTruthConflict(requirement, scenario, path, note);
    if (meter !== null) windowConflict(meter, scenario, path, note);
    measureConflicts(requirement, scenario, path, probe, note);
  });
}

function scenarioOf(name: string, path: string, probe: Probe, note: Note): Scenario | null {
  const names = probe.scenarios.map((scenario) => scenario.name);
  const found = probe.scenarios.filter((scenario) => scenario.name === name);
  if (name === '' || found.length > 0) return theOnly(name, found);
  if (names.length === 0 || names.includes('')) return null; // the list is incomplete
  const near = nearest(name, names);
  const allowed = names.length <= 12 ? `the name of a scenario: ${oneOf(names)}` : 'the name of one of the scenarios';
  note(pathTo(path, 'scenario'), JSON.stringify(name), allowed, didYouMean(near));
  return null;
}

function meterOf(requirement: Metered, path: string, probe: Probe, note: Note): StageSpecOf<'meter'> | null {
  const name = requirement.meter;
  const meters = metersOf(probe).map((meter) => meter.spec);
  const found = meters.filter((meter) => meter.name === name);
  if (name === '' || found.length > 0) return theOnly(name, found);
  const unread = probe.chain.some((stage) => (stage.stage as string) === '');
  if (probe.chain.length === 0 || unread || meters.some((meter) => meter.name === '')) return null;
  const known = meterNames(probe);
  const near = nearest(name, meters.map((meter) => meter.name));
  const place = pathTo(path, 'meter');
  const quoted = JSON.stringify(name);
  if (known !== null) note(place, quoted, `the name of a meter: ${known}`, didYouMean(near));
  else note(place, quoted, 'a chain with a meter of that name', 'add { "stage": "meter" } to the chain');
  return null;
}

/** Of two things with one name nobody knows which is meant; that they share it is a problem noted elsewhere. */
function theOnly<T>(name: string, found: T[]): T | null {
  return name !== '' && found.length === 1 ? found[0] : null;
}

function didYouMean(near: string | null): string {
  return near === null ? '' : `did you mean ${JSON.stringify(near)}?`;
}

function allowanceConflict(requirement: Allowed, path: string, note: Note): void {
  const { percentOfReading, percentOfRange, amperes } = requirement;
  if (percentOfReading === 0 && percentOfRange === 0 && amperes === 0) {
    note(path, 'an allowance of 0', 'percentOfReading, percentOfRange or amperes above 0', 'no reading has no error');
  }
}

/** A share of a true value that is zero is zero: such a requirement fails whatever the probe does. */
function zeroTruthConflict(requirement: Allowed, scenario: Scenario, path: string, note: Note): void {
  if (requirement.percentOfRange !== 0 || requirement.amperes !== 0 || !(requirement.percentOfReading > 0)) return;
  if (scenario.current.shape !== 'dc') return;
  const { measure } = requirement;
  if (measure !== 'acRms' && scenario.current.level_A !== 0) return;
  note(pathTo(path, 'percentOfReading'), `${requirement.percentOfReading} % alone`,
    `also percentOfRange or amperes, as the true value in scenario ${JSON.stringify(scenario.name)} is 0`);
}

function windowConflict(meter: StageSpecOf<'meter'>, scenario: Scenario, path: string, note: Note): void {
  if (meter.cycles === 0 && meter.window_ms > scenario.duration_ms) {
    note(pathTo(path, 'scenario'), `${JSON.stringify(scenario.name)} (duration_ms ${scenario.duration_ms})`,
      `a scenario as long as a window of meter ${JSON.stringify(meter.name)} (window_ms ${meter.window_ms})`);
  }
}

/** A window of a meter is judged against the true current over the same samples, so the A/D rate is what counts. */
function bandConflicts(
  { from_Hz, to_Hz, points }: Extract<Requirement, { measure: 'band' }>, path: string, probe: Probe, note: Note,
): void {
  const from = { path: pathTo(path, 'from_Hz'), value: from_Hz, unit: 'Hz' };
  mustNotExceed(note, from, { path: pathTo(path, 'to_Hz'), value: to_Hz, unit: 'Hz' });
  if (points === 1 && from_Hz < to_Hz) {
    note(pathTo(path, 'points'), '1', `2 or more, as ${from.path} (${from_Hz} Hz) is below to_Hz (${to_Hz} Hz)`,
      'a band has two ends');
  }
  const half_Hz = probe.converter.rate_kHz * 500;
  if (to_Hz >= half_Hz) {
    note(pathTo(path, 'to_Hz'), `${to_Hz} Hz`, `below ${half_Hz} Hz, half of converter.rate_kHz`);
  }
}

function bandwidthConflict(
  { atLeast_Hz }: Extract<Requirement, { measure: 'bandwidth' }>, path: string, probe: Probe, note: Note,
): void {
  const rate = rateAhead(probe, probe.chain);
  if (atLeast_Hz >= rate.value * 500) {
    note(pathTo(path, 'atLeast_Hz'), `${atLeast_Hz} Hz`, `below ${rate.value * 500} Hz, half the rate of readings ` +
      `(${rate.path})`, 'readings cannot show a faster sine');
  }
}
