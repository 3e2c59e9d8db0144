/**
 * The times of a scenario that are judged: from judgeFrom_ms on, and not within settle_ms after the current has
 * changed its level (staircase, step). A window is judged when no part of it is left out and no level begins in it.
 */
import type { Scenario } from '../probe/fields.ts';

export class JudgedTimes {
  private readonly fromSeconds: number;
  private readonly settleSeconds: number;

  constructor(private readonly scenario: Scenario) {
    this.fromSeconds = scenario.judgeFrom_ms / 1e3;
    this.settleSeconds = scenario.settle_ms / 1e3;
  }

  /** For a single reading both times are the same. */
  judges(beginSeconds: number, endSeconds: number): boolean {
    if (beginSeconds < this.fromSeconds) return false;
    if (this.settleSeconds === 0) return true;
    const change = this.lastChange(endSeconds);
    return beginSeconds >= change + this.settleSeconds;
  }

  /** When the level last changed before or at a time. */
  private lastChange(seconds: number): number {
    const { current } = this.scenario;
    if (current.shape === 'step') return seconds >= current.at_ms / 1e3 ? current.at_ms / 1e3 : -Infinity;
    if (current.shape !== 'staircase') return -Infinity;
    const level = Math.min(Math.floor(seconds / (current.hold_ms / 1e3)), current.levels_A.length - 1);
    return level === 0 ? -Infinity : (level * current.hold_ms) / 1e3;
  }
}
