/**
 * What travels between two stages, as far as the constants tell it: the domain of the values, the largest magnitude
 * they can reach, and what has been done to them. Each stage's check reads it, proves its own bounds with it, and
 * leaves it as the next stage will see it.
 */
import type { Problems } from './problems.ts';

/** Raw words of the converter; undisturbed samples; counts; readings in µA or mA. */
export type Domain = 'codes' | 'samples' | 'counts' | 'reading';

export class Flow {
  domain: Domain;
  /** Largest magnitude of a value. */
  limit: number;
  /** Input samples for one sample here. */
  ratio: number;
  /** true once a thermometer fills the temperature lane. */
  temperature: boolean;
  /** true once a zero has removed the offset. */
  zeroed: boolean;

  constructor() {
    this.domain = 'codes';
    this.limit = 2147483648;
    this.ratio = 1;
    this.temperature = false;
    this.zeroed = false;
  }

  /** For stages that work on counts, undisturbed or not. */
  takeCounts(problems: Problems): void {
    if (this.domain !== 'counts' && this.domain !== 'samples') {
      problems.add('order', this.domain, 'counts', this.domain === 'codes' ? 'put intake first' : 'put it ahead of scale');
    }
    this.domain = 'counts';
  }

  /** For stages that work on counts as well as on readings. */
  takeAny(problems: Problems): void {
    if (this.domain === 'codes') problems.add('order', this.domain, 'counts or readings', 'put intake first');
    if (this.domain !== 'reading') this.domain = 'counts';
  }

  /** The values that a stage gives must fit 32 bits. */
  give(problems: Problems, limit: number, remedy: string): void {
    if (limit > 2147483647) problems.add('output', limit, 'at most 2147483647', remedy);
    // what does not fit is told once, not again by every stage behind
    this.limit = limit > 2147483647 ? 2147483647 : limit;
  }
}
