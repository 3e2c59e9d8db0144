/**
 * Counts how often the branches of a stage were reached by random inputs, so that a property that passes because it
 * never went there fails: every listed branch must be reached `least` times.
 */
export class Tally {
  readonly least: number;
  private readonly times: Map<string, number>;

  constructor(branches: readonly string[], least = 100) {
    this.least = least;
    this.times = new Map(branches.map((branch) => [branch, 0]));
  }

  count(branch: string, times: number | boolean = 1): void {
    const before = this.times.get(branch);
    if (before === undefined) throw new RangeError(`tally: no branch called ${branch}`);
    this.times.set(branch, before + Number(times));
  }

  /** The branches that were reached too rarely, with their count. */
  missing(): string[] {
    return [...this.times].filter(([, times]) => times < this.least).map(([branch, times]) => `${branch}: ${times}`);
  }
}
