/** Feeds a measure with readings that a test makes up, block by block, as often as the measure asks for. */
import type { Observer, Readings } from '../../../sim/judging/play.ts';
import type { Scenario } from '../../../sim/probe/fields.ts';
import { probeOf, quietProbe, type Given } from '../probes.ts';

export interface MadeReading {
  amperes: number;
  truth?: number;
  status?: number;
}

/** Readings at (n + 1) * periodSeconds, in blocks of an odd length. */
export function hearReadings(observer: Observer, scenario: Scenario, periodSeconds: number, at: (seconds: number, n: number) => MadeReading): void {
  const size = 37;
  const total = Math.floor(scenario.duration_ms / 1e3 / periodSeconds + 1e-6);
  const block: Readings = {
    count: 0, delaySeconds: 0, seconds: new Float64Array(size), amperes: new Float64Array(size), truth: new Float64Array(size),
    now: new Float64Array(size), slope: new Float64Array(size), status: new Int32Array(size), judged: new Uint8Array(size),
  };
  for (let pass = 1; pass <= observer.passes; pass++) {
    for (let first = 0; first < total; first += size) {
      block.count = Math.min(size, total - first);
      for (let i = 0; i < block.count; i++) {
        const seconds = (first + i + 1) * periodSeconds;
        const { amperes, truth = 0, status = 0 } = at(seconds, first + i);
        block.seconds[i] = seconds;
        block.amperes[i] = amperes;
        block.truth[i] = truth;
        block.now[i] = truth;
        block.status[i] = status;
        block.judged[i] = seconds >= scenario.judgeFrom_ms / 1e3 ? 1 : 0;
      }
      observer.readings(block, pass);
    }
  }
}

/** A scenario with every default filled in. */
export function scenarioOf(given: Given): Scenario {
  const whole = { name: 'way', duration_ms: 100, ...given };
  return probeOf(quietProbe({
    scenarios: [whole], requirements: [{ measure: 'swallowed', limit_A: 1 }],
  })).scenarios[0];
}
