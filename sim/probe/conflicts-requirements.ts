/**
 * Requirements against the scenarios and meters they name, and against what can be judged there at all: an
 * allowance of zero, noise of a current that moves, settling without a step, a window longer than the scenario.
 */
import { oneOf } from './allowed.ts';
import { metersOf, meterNames } from './conflicts-chain.ts';
import type { Note } from './conflict.ts';
import type { Probe, Requirement, Scenario, StageSpecOf } from './fields.ts';
import { nearest } from './nearest.ts';
import { pathTo } from './problem.ts';

type Metered = Extract<Requirement, { meter: string }>;
type Allowed = Extract<Requirement, { percentOfReading: number }>;

export function requirementConflicts(probe: Probe, note: Note): void {
  probe.requirements.forEach((requirement, index) => {
    const path = pathTo('requirements', index);
    if ('percentOfReading' in requirement) allowanceConflict(requirement, path, note);
    const scenario = 'scenario' in requirement ? scenarioOf(requirement.scenario, path, probe, note) : null;
    const meter = 'meter' in requirement ? meterOf(requirement, path, probe, note) : null;
    if (scenario === null) return;
    if ('percentOfReading' in requirement) zeroTruthConflict(requirement, scenario, path, note);
    if (meter !== null) windowConflict(meter, scenario, path, note);
    if (requirement.measure === 'noise') noiseConflict(scenario, path, note);
    if (requirement.measure === 'settling') settlingConflicts(requirement, scenario, path, note);
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

function noiseConflict(scenario: Scenario, path: string, note: Note): void {
  const { shape } = scenario.current;
  if (shape === 'dc' || (shape as string) === '') return;
  note(pathTo(path, 'scenario'), `${JSON.stringify(scenario.name)} (shape ${JSON.stringify(shape)})`,
    'a scenario with a current of shape "dc"', 'the spread of a reading that moves is not noise');
}

function settlingConflicts(
  requirement: Extract<Requirement, { measure: 'settling' }>, scenario: Scenario, path: string, note: Note,
): void {
  const { current, name, duration_ms } = scenario;
  if ((current.shape as string) === '') return;
  if (current.shape !== 'step') {
    note(pathTo(path, 'scenario'), `${JSON.stringify(name)} (shape ${JSON.stringify(current.shape)})`,
      'a scenario with a current of shape "step"');
    return;
  }
  if (current.from_A === current.to_A) {
    note(pathTo(path, 'scenario'), `${JSON.stringify(name)} (from_A and to_A both ${current.to_A} A)`,
      'a step between two different currents');
  }
  const left_ms = duration_ms - current.at_ms - current.edge_us / 2000;
  if (current.at_ms < duration_ms && requirement.limit_ms > left_ms) {
    note(pathTo(path, 'limit_ms'), `${requirement.limit_ms} ms`,
      `a time that duration_ms (${duration_ms} ms) of ${JSON.stringify(name)} leaves after the middle of its step ` +
      '(at_ms, edge_us)');
  }
}
