/**
 * A study is what one requirement needs: scenarios to be played, each with an observer, and what they give together.
 * Most watch one scenario of the probe file; some make their own. Plays are taken one after the other, each when the
 * one before it has been played, so a study may choose the next by what the last has shown (bandwidth does).
 */
import type { Probe, Requirement, Scenario } from '../probe/fields.ts';
import { BandError } from './band.ts';
import { Bandwidth } from './bandwidth.ts';
import { NoiseOfReading, ReadingError, RecordError, SettlingTime, type Measure, type Measured } from './measures.ts';
import { OverRangeDelay, OverRangeRecovery } from './overrangetimes.ts';
import type { Observer } from './play.ts';
import { EffectiveBits, SineGain, SinePhase, Sinad } from './sines.ts';
import { Overshoot, TransitionDuration } from './transition.ts';
import { ZeroAfterOverload, ZeroOverTemperature, ZeroOverTime } from './zeros.ts';

export interface Play {
  /** A scenario of the probe file itself (the same object), or one that the study has made. */
  scenario: Scenario;
  observer: Observer;
}

export interface Study {
  plays: Iterable<Play>;
  result(): Measured | string;
}

type Named = Extract<Requirement, { scenario: string }>;
type Made = Exclude<Requirement, Named | { measure: 'swallowed' }>;

/** `swallowed` is told from the constants and has no study. `folder`: where paths of recorded currents start. */
export function studyFor(requirement: Requirement, probe: Probe, folder = '.'): Study {
  if ('scenario' in requirement) return namedStudy(requirement, probe, folder);
  if (requirement.measure === 'swallowed') throw new TypeError('swallowed: told from the constants, not from a scenario');
  return madeStudy(requirement, probe);
}

function madeStudy(requirement: Made, probe: Probe): Study {
  switch (requirement.measure) {
    case 'band': return new BandError(requirement, probe);
    case 'bandwidth': return new Bandwidth(requirement, probe);
    case 'zeroOverTemperature': return new ZeroOverTemperature(requirement, probe);
  }
}

function namedStudy(requirement: Named, probe: Probe, folder: string): Study {
  const scenario = probe.scenarios.find(({ name }) => name === requirement.scenario);
  if (scenario === undefined) throw new RangeError(`scenario: found "${requirement.scenario}", allowed the name of a scenario of the probe`);
  const measure = measureOf(requirement, probe, scenario, folder);
  return { plays: [{ scenario, observer: measure }], result: () => measure.result() };
}

function measureOf(requirement: Named, probe: Probe, scenario: Scenario, folder: string): Measure {
  switch (requirement.measure) {
    case 'reading': return new ReadingError(requirement, probe.range_A);
    case 'mean':
    case 'trueRms':
    case 'acRms': return new RecordError(requirement, probe, scenario);
    case 'noise': return new NoiseOfReading(requirement.limit_A);
    case 'settling': return new SettlingTime(requirement, scenario);
    case 'transition': return new TransitionDuration(requirement, scenario);
    case 'overshoot': return new Overshoot(requirement, scenario);
    case 'zeroAfterOverload': return new ZeroAfterOverload(requirement, scenario);
    case 'zeroOverTime': return new ZeroOverTime(requirement, scenario);
    case 'overRangeDelay': return new OverRangeDelay(requirement, probe, scenario, folder);
    case 'overRangeRecovery': return new OverRangeRecovery(requirement, probe, scenario, folder);
    case 'gain': return new SineGain(requirement, probe, scenario);
    case 'phase': return new SinePhase(requirement, probe, scenario);
    case 'sinad': return new Sinad(requirement, probe, scenario);
    case 'effectiveBits': return new EffectiveBits(requirement, probe, scenario);
  }
}
