/**
 * What a measure needs of the scenario it is judged in: a current of the right shape, one that leaves the range for
 * over-range, and enough of it: periods for a fit, averaging times for an Allan deviation, time before a pulse.
 */
import { oneOf } from './allowed.ts';
import { rateAhead } from './conflicts-chain.ts';
import type { Note } from './conflict.ts';
import type { CurrentSpec, Probe, Requirement, Scenario } from './fields.ts';
import { nearest } from './nearest.ts';
import { pathTo } from './problem.ts';

type Shape = CurrentSpec['shape'];
type Named = Extract<Requirement, { scenario: string }>;
type Of<M extends Requirement['measure']> = Extract<Requirement, { measure: M }>;

/** Measures that are not here take any current. */
const SHAPES: Partial<Record<Requirement['measure'], { shape: Shape; why: string }>> = {
  noise: { shape: 'dc', why: 'the spread of a reading that moves is not noise' },
  zeroOverTime: { shape: 'dc', why: 'the drift of a reading that moves is not seen' },
  settling: { shape: 'step', why: '' },
  transition: { shape: 'step', why: '' },
  overshoot: { shape: 'step', why: '' },
  zeroAfterOverload: { shape: 'pulse', why: '' },
  gain: { shape: 'sine', why: 'it is found by fitting a sine' },
  phase: { shape: 'sine', why: 'it is found by fitting a sine' },
  sinad: { shape: 'sine', why: 'it is found by fitting a sine' },
  effectiveBits: { shape: 'sine', why: 'it is found by fitting a sine' },
};

/** IEEE Std 1057: a record for a sine fit holds at least five periods. */
const LEAST_PERIODS = 5;
/** Two make one difference of neighbours, which is no mean; the judge takes three and more. */
const LEAST_TAUS = 3;

export function measureConflicts(
  requirement: Named, scenario: Scenario, path: string, probe: Probe, note: Note,
): void {
  const { current } = scenario;
  if ((current.shape as string) === '') return;
  if (shapeConflict(requirement, scenario, path, probe, note)) return;
  switch (requirement.measure) {
    case 'settling':
    case 'transition':
    case 'overshoot':
      stepConflict(requirement.measure, scenario, path, note);
      if (requirement.measure === 'settling') settlingConflict(requirement, scenario, path, note);
      return;
    case 'zeroAfterOverload': return pulseConflict(scenario, path, note);
    case 'zeroOverTime': return averagingConflict(requirement, scenario, path, note);
    case 'gain':
    case 'phase':
    case 'sinad':
    case 'effectiveBits': return fitConflicts(scenario, path, probe, note);
    case 'overRangeDelay':
    case 'overRangeRecovery': return overRangeConflict(requirement.measure, scenario, path, probe, note);
  }
}

/** `"mains" (shape "sine")`, and in the brackets whatever else is in the way. */
function scenarioText(scenario: Scenario, more: string): string {
  return `${JSON.stringify(scenario.name)} (${more})`;
}

function shapeConflict(
  requirement: Named, scenario: Scenario, path: string, probe: Probe, note: Note,
): boolean {
  const needed = SHAPES[requirement.measure];
  if (needed === undefined || scenario.current.shape === needed.shape) return false;
  const fit = probe.scenarios.filter(({ current, name }) => current.shape === needed.shape && name !== '');
  const names = fit.map(({ name }) => name);
  const near = nearest(scenario.name, names);
  const others = names.length === 0 ? '' : `such as ${near === null ? oneOf(names.slice(0, 1)) : JSON.stringify(near)}`;
  note(pathTo(path, 'scenario'), scenarioText(scenario, `shape ${JSON.stringify(scenario.current.shape)}`),
    `a scenario with a current of shape ${JSON.stringify(needed.shape)}`,
    [others, needed.why].filter((part) => part !== '').join('; '));
  return true;
}

function stepConflict(measure: string, scenario: Scenario, path: string, note: Note): void {
  const { current } = scenario;
  if (current.shape !== 'step' || current.from_A !== current.to_A) return;
  note(pathTo(path, 'scenario'), scenarioText(scenario, `from_A and to_A both ${current.to_A} A`),
    `a step between two different currents for ${JSON.stringify(measure)}`);
}

function settlingConflict(requirement: Of<'settling'>, scenario: Scenario, path: string, note: Note): void {
  const { current, name, duration_ms } = scenario;
  if (current.shape !== 'step') return;
  const left_ms = duration_ms - current.at_ms - current.edge_us / 2000;
  if (current.at_ms < duration_ms && requirement.limit_ms > left_ms) {
    note(pathTo(path, 'limit_ms'), `${requirement.limit_ms} ms`,
      `a time that duration_ms (${duration_ms} ms) of scenario ${JSON.stringify(name)} leaves after the middle of ` +
      'its step (at_ms, edge_us)');
  }
}

function pulseConflict(scenario: Scenario, path: string, note: Note): void {
  const { current, judgeFrom_ms } = scenario;
  if (current.shape !== 'pulse' || !(current.at_ms <= judgeFrom_ms)) return;
  note(pathTo(path, 'scenario'),
    scenarioText(scenario, `its pulse begins at_ms ${current.at_ms}, judged from judgeFrom_ms ${judgeFrom_ms} on`),
    'a scenario whose pulse begins behind judgeFrom_ms', 'the zero after it is compared with the zero before it');
}

function averagingConflict(requirement: Of<'zeroOverTime'>, scenario: Scenario, path: string, note: Note): void {
  const judged_s = (scenario.duration_ms - scenario.judgeFrom_ms) / 1e3;
  // a duration of whole averaging times must not lose one by the last bit of a difference
  if (judged_s <= 0 || !(requirement.tau_s * LEAST_TAUS > judged_s * (1 + 1e-9))) return;
  note(pathTo(path, 'tau_s'), `${requirement.tau_s} s`,
    `at most ${judged_s / LEAST_TAUS} s, a third of what duration_ms and judgeFrom_ms of scenario ` +
    `${JSON.stringify(scenario.name)} leave (${judged_s} s)`, 'better a tenth: few averages make a poor deviation');
}

function fitConflicts(scenario: Scenario, path: string, probe: Probe, note: Note): void {
  const { current, duration_ms, judgeFrom_ms } = scenario;
  if (current.shape !== 'sine') return;
  const rate = rateAhead(probe, probe.chain);
  const frequency = `frequency_Hz ${current.frequency_Hz}`;
  if (current.frequency_Hz >= rate.value * 500) {
    note(pathTo(path, 'scenario'), scenarioText(scenario, frequency),
      `a sine below ${rate.value * 500} Hz, half the rate of readings (${rate.path})`);
  }
  const periods = ((duration_ms - judgeFrom_ms) / 1e3) * current.frequency_Hz;
  if (judgeFrom_ms < duration_ms && periods * (1 + 1e-9) < LEAST_PERIODS) {
    note(pathTo(path, 'scenario'), scenarioText(scenario, `${periods} periods at ${frequency} between judgeFrom_ms ` +
      'and duration_ms'), `a scenario that judges at least ${LEAST_PERIODS} periods`);
  }
}

/** Refuses only where the current is sure never to leave the range, or never to come back into it. */
function overRangeConflict(
  measure: 'overRangeDelay' | 'overRangeRecovery', scenario: Scenario, path: string, probe: Probe, note: Note,
): void {
  const { current } = scenario;
  const range = `range_A (${probe.range_A} A)`;
  const refuse = (more: string, allowed: string): void => {
    note(pathTo(path, 'scenario'), scenarioText(scenario, `shape ${JSON.stringify(current.shape)}, ${more}`), allowed);
  };
  const bound = largestOf(current);
  if (bound.amperes <= probe.range_A) {
    refuse(`${bound.fields}: at most ${bound.amperes} A`, `a scenario whose current leaves ${range}`);
    return;
  }
  if (current.shape === 'dc') {
    refuse(`level_A ${current.level_A} A`, `a scenario whose current leaves ${range} and comes back`);
    return;
  }
  if (current.shape !== 'step' && current.shape !== 'ramp') return;
  const { from_A, to_A } = current;
  const [inside, which] = measure === 'overRangeDelay' ? [from_A, 'leaves'] : [to_A, 'comes back into'];
  if (Math.abs(inside) > probe.range_A) {
    refuse(`from_A ${from_A} A to to_A ${to_A} A`, `a scenario whose current ${which} ${range}`);
  }
}

/** The most that a current can reach, by which fields; NaN or Infinity: the fields do not tell. */
function largestOf(current: CurrentSpec): { amperes: number; fields: string } {
  const most = (...values: number[]): number => Math.max(...values.map(Math.abs));
  switch (current.shape) {
    case 'dc': return { amperes: most(current.level_A), fields: 'level_A' };
    case 'staircase': return { amperes: most(...current.levels_A), fields: 'levels_A' };
    case 'sine':
    case 'sweep': return { amperes: most(current.peak_A) + most(current.offset_A), fields: 'peak_A and offset_A' };
    case 'harmonics': {
      const shares = current.percents.reduce((sum, percent) => sum + most(percent), 100) / 100;
      const amperes = most(current.peak_A) * shares + most(current.offset_A);
      return { amperes, fields: 'peak_A, percents and offset_A' };
    }
    case 'phaseCut': return { amperes: most(current.peak_A), fields: 'peak_A' };
    case 'pwm': return { amperes: most(current.low_A, current.high_A), fields: 'low_A and high_A' };
    case 'step':
    case 'ramp': return { amperes: most(current.from_A, current.to_A), fields: 'from_A and to_A' };
    case 'pulse': return { amperes: most(current.base_A, current.peak_A), fields: 'base_A and peak_A' };
    case 'ripple': {
      return { amperes: most(current.mean_A) + current.peakToPeak_A / 2, fields: 'mean_A and peakToPeak_A' };
    }
    case 'inrush': return { amperes: most(current.peak_A, current.steady_A), fields: 'peak_A and steady_A' };
    case 'motor': return { amperes: most(current.stall_A, current.run_A), fields: 'stall_A and run_A' };
    case 'file': return { amperes: Infinity, fields: 'path' };
    case 'sum': {
      const parts = current.parts.map((part) => largestOf(part));
      const amperes = most(current.times) * parts.reduce((sum, part) => sum + part.amperes, 0);
      return { amperes, fields: ['times', ...new Set(parts.map((part) => part.fields))].join(', ') };
    }
  }
  return { amperes: NaN, fields: '' };
}
