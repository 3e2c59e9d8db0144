/**
 * Whole chains: every order that joins, against the composed oracles, and the laws that hold for a chain as for a
 * stage.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  Block, Chain, CLAMPED, EVENT_DEGAUSSED, EVENT_REVERSED, EVENT_ZERO, Meter, OVER_RANGE, RECORD_WORDS, checkConstants,
  makeStage,
  problemText, type ChainConstants, type CustomMaker, type Stage, type StageConstants,
} from '../../lib/index.ts';
import { bundle } from './bundle.ts';
import { chains } from './draw.ts';
import { expectSamples, feed } from './feed.ts';
import { expectIntegerState } from './laws.ts';
import { blockLengths, evenly, records, sampleOf, unitOf } from './records.ts';
import { Tally } from './tally.ts';
import { chainOracle, KINDS, kindsWithOracle } from './oracle/chain.ts';
import { meterRecords } from './oracle/meter.ts';
import type { Sample } from './oracle/record.ts';

/** Words of the converter, near the middle code half of the time, with the events that switch stages. */
function codes({ design }: ChainConstants): fc.Arbitrary<Sample[]> {
  const first = design[0];
  const middle = first.kind === 'intake' ? (first.midCode * 2 ** first.justifyShift) | 0 : 0;
  return records(2147483647, Math.max(middle, -2147483647), [EVENT_REVERSED, EVENT_ZERO, EVENT_DEGAUSSED]);
}

const given = chains.chain((constants) => fc.tuple(fc.constant(constants), codes(constants), blockLengths));

function ringRecords(stage: Stage, written: number): number[][] {
  const capacity = stage.ring.length / RECORD_WORDS;
  return Array.from({ length: Math.min(written, capacity) }, (_, k) => {
    const at = ((written - Math.min(written, capacity) + k) % capacity) * RECORD_WORDS;
    return [...stage.ring.slice(at, at + RECORD_WORDS)];
  });
}

/** Every meter's ring holds the newest records that its oracle tells from the record it stood in. */
function expectMeters(chain: { stages: Stage[] }, constants: ChainConstants, behind: Sample[][]): number {
  let count = 0;
  chain.stages.forEach((stage, i) => {
    const c = constants.design[i];
    if (c.kind !== 'meter') return;
    const all = meterRecords(c, behind[i]);
    expect(ringRecords(stage, all.length)).toEqual(all.slice(-c.capacity));
    expect(stage.state[stage.fields.indexOf('written')]).toBe(all.length);
    count += all.length;
  });
  return count;
}

describe('random whole chains', () => {
  const branches = [
    ...KINDS, 'meter records', 'over range out', 'clamped out', 'three stages or more', 'sections behind scale',
    'two meters',
  ];
  const tally = new Tally(branches);

  test('every kind of stage has an oracle', () => {
    expect(KINDS.filter((kind) => !kindsWithOracle.has(kind))).toEqual([]);
  });

  test('equal the composed oracles, records of meters included, however the record is cut', () => {
    fc.assert(fc.property(given, ([constants, input, lengths]) => {
      const chain = new Chain(constants);
      const output = feed(chain, input, lengths, () => chain.stages.forEach(expectIntegerState));
      const behind = chainOracle(constants, input);
      expectSamples(output, behind[behind.length - 1]);
      tally.count('meter records', expectMeters(chain, constants, behind));
      const kinds = constants.design.map((stage) => stage.kind);
      for (const kind of new Set(kinds)) if (kind !== 'custom') tally.count(kind);
      tally.count('three stages or more', kinds.length >= 3);
      tally.count('two meters', kinds.filter((kind) => kind === 'meter').length >= 2);
      tally.count('sections behind scale', kinds.includes('scale') &&
        kinds.lastIndexOf('sections') > kinds.indexOf('scale'));
      for (const sample of output) {
        tally.count('over range out', (sample.status & OVER_RANGE) !== 0);
        tally.count('clamped out', (sample.status & CLAMPED) !== 0);
      }
    }), { numRuns: 2500 });
    expect(tally.missing()).toEqual([]);
  });

  test('give the same samples and the same state however the record is cut', () => {
    fc.assert(fc.property(given, ([constants, input, lengths]) => {
      const one = new Chain(constants);
      const other = new Chain(constants);
      expectSamples(feed(one, input, lengths), feed(other, input, [1]));
      expect(one.save()).toEqual(other.save());
    }), { numRuns: 200 });
  });

  test('reset equals new; save and load go on uninterrupted; a power cycle keeps the kept fields only', () => {
    fc.assert(fc.property(given, evenly(0, 1), ([constants, input, lengths], part) => {
      const at = Math.floor(part * input.length);
      const chain = new Chain(constants);
      const fresh = chain.save();
      const whole = feed(chain, input, lengths);
      const before = chain.save();
      chain.powerCycle();
      expect(chain.save()).toEqual(fresh.map((table, i) => table.map((word, k) => {
        const { kept, fields } = chain.stages[i];
        return kept.includes(fields[k]) ? before[i][k] : word;
      })));
      chain.reset();
      expect(chain.save()).toEqual(fresh);
      const head = feed(chain, input.slice(0, at), lengths);
      const next = new Chain(constants);
      next.load(JSON.parse(JSON.stringify(chain.save())));
      expectSamples([...head, ...feed(next, input.slice(at), lengths)], whole);
      expect(next.save()).toEqual(before);
    }), { numRuns: 200 });
  });

  test('never pass the largest magnitude, nor miss the ratio, that checkConstants states behind each stage', () => {
    fc.assert(fc.property(given, ([constants, input]) => {
      const { limits, ratios } = checkConstants(constants);
      const chain = new Chain(constants);
      const counts = chain.stages.map(() => 0);
      const watched = {
        process(block: Block): void {
          chain.stages.forEach((stage, i) => {
            stage.process(block);
            for (let k = 0; k < block.count; k++) expect(Math.abs(block.value[k])).toBeLessThanOrEqual(limits[i]);
            counts[i] += block.count;
          });
        },
      };
      feed(watched, input, [17]);
      // decimators in a row: the floor of a floor is the floor of the product
      expect(counts).toEqual(ratios.map((ratio) => Math.floor(input.length / ratio)));
    }), { numRuns: 100 });
  });
});

describe('the same chains as one ES5 bundle', () => {
  test('with checked operators no bound ever breaks, and every sample and state is the same', () => {
    const es5 = bundle({ arithmetic: 'checked' });
    fc.assert(fc.property(given, ([constants, input, lengths]) => {
      const chain = new Chain(constants);
      const proved = new es5.Chain(constants);
      expectSamples(feed(proved, input, lengths), feed(chain, input, lengths));
      expect(proved.save()).toEqual(chain.save());
    }), { numRuns: 300 });
  });

  test('with counted operators every sample and state is the same, and operations were counted', () => {
    const es5 = bundle({ arithmetic: 'counted' });
    const counts = es5.OPERATION_COUNTS as Float64Array;
    fc.assert(fc.property(given, ([constants, input, lengths]) => {
      const chain = new Chain(constants);
      const priced = new es5.Chain(constants);
      const before = counts.reduce((sum, times) => sum + times, 0);
      expectSamples(feed(priced, input, lengths), feed(chain, input, lengths));
      expect(priced.save()).toEqual(chain.save());
      // intake alone: shift, mask, subtract, shift, multiply for each sample
      expect(counts.reduce((sum, times) => sum + times, 0) - before).toBeGreaterThanOrEqual(5 * input.length);
    }), { numRuns: 100 });
  });
});

const INTAKE: StageConstants = { kind: 'intake', bits: 12, signed: 0, justifyShift: 0, midCode: 2048, guardBits: 8 };
const AVERAGE: StageConstants = { kind: 'average', length: 4, primed: 1 };
const SCALE: StageConstants = { kind: 'scale', gain: 1, shift: 0, readingsPerAmpere: 1000, limit: 1000000 };
const METER: StageConstants = { kind: 'meter', windowSamples: 10, cycles: 0, hysteresis: 1, capacity: 1 };
const TRIM: StageConstants = { kind: 'offsetTrim', limit: 600000 };
const WATCH: StageConstants = {
  kind: 'overRange', highLimit: 1, lowLimit: 0, consecutive: 1, magnitudeLimit: 1, slewLimit: 1, holdSamples: 0,
  stuckAfter: 0,
};
const ZERO: StageConstants = {
  kind: 'zero', startMode: 0, settleSamples: 0, meanSamples: 1, spanLimit: 0, windowLimit: 0, buttonMode: 0,
  trackMode: 0,
  trackWindow: 0, holdSamples: 0, stepSamples: 1, authority: 0, suspectMode: 0, limit: 600000,
};

describe('a chain that does not join is refused', () => {
  test.each<[string, StageConstants[], number, string]>([
    ['without intake', [AVERAGE], 0, 'put intake first'],
    ['meter ahead of intake', [METER, INTAKE], 0, 'put intake first'],
    ['with two intakes', [INTAKE, INTAKE], 1, 'have one intake, first'],
    ['counts behind scale', [INTAKE, SCALE, ZERO], 2, 'put it ahead of scale'],
    ['scaled twice', [INTAKE, SCALE, SCALE], 2, 'put it ahead of scale'],
    ['over-range behind a filter', [INTAKE, AVERAGE, WATCH], 2, 'put overRange directly behind intake'],
    ['absolute offset behind a zero', [INTAKE, ZERO, TRIM], 2, 'the zero has already removed this offset'],
    ['of a kind that is none', [INTAKE, { kind: 'magic' } as unknown as StageConstants], 1, 'see the list of stages'],
  ])('%s', (_name, design, stage, remedy) => {
    const constants = { design, unit: unitOf() };
    const { problems } = checkConstants(constants);
    expect(problems[0]).toMatchObject({ stage, kind: design[stage].kind, remedy });
    expect(() => new Chain(constants)).toThrow(RangeError);
    expect(() => new Chain(constants)).toThrow(problemText(problems[0]));
  });

  test('an offset table of several knots needs a thermometer ahead of it', () => {
    const unit = unitOf({ offsetTemperatures: [0, 1], offsets: [0, 1] });
    expect(checkConstants({ design: [INTAKE, TRIM], unit }).problems).toMatchObject([{ stage: 1, field: 'order' }]);
  });

  test('of no stages, and with a damaged unit record', () => {
    expect(() => new Chain({ design: [], unit: unitOf() })).toThrow('list the stages');
    const damaged = { ...unitOf(), factoryZero: 1 };
    expect(() => new Chain({ design: [INTAKE], unit: damaged })).toThrow('unit, crc');
  });

  test('all that is wrong is listed, not only the first', () => {
    const design = [{ ...INTAKE, bits: 0 }, { ...AVERAGE, length: 0 }] as StageConstants[];
    expect(checkConstants({ design, unit: unitOf() }).problems.map((p) => [p.stage, p.field])).toEqual([[0, 'bits'],
      [1, 'length']]);
  });

  test('a saved state of another chain is refused', () => {
    const chain = new Chain({ design: [INTAKE, AVERAGE], unit: unitOf() });
    expect(() => chain.load([[]])).toThrow('expected 2 tables, got 1');
    expect(() => chain.load([[], [1]])).toThrow('state of average: expected');
  });
});

/** A custom stage with memory: the largest value so far, less words[0]. */
class Largest implements Stage {
  kind = 'custom';
  fields = ['started', 'largest'];
  kept: string[] = [];
  state = new Float64Array(2);
  ring = new Int32Array(0);
  words: readonly number[];
  constructor(words: readonly number[]) {
    this.words = words;
  }
  reset(): void {
    this.state.fill(0);
  }
  process(block: Block): void {
    for (let i = 0; i < block.count; i++) {
      if (this.state[0] === 0 || block.value[i] > this.state[1]) this.state[1] = block.value[i];
      this.state[0] = 1;
      block.value[i] = this.state[1] - this.words[0];
    }
  }
  describe(): string {
    return 'largest';
  }
}

describe('a custom stage', () => {
  const maker: CustomMaker = { name: 'largest', version: 2, make: (words) => new Largest(words) };
  const custom: StageConstants = { kind: 'custom', name: 'largest', version: 2, words: [256], limit: 600000 };
  const constants = { design: [INTAKE, custom, METER, SCALE], unit: unitOf() };

  test('stands in the chain like any other: values go through it, block cuts and a loaded state change nothing', () => {
    const input = [2048, 2050, 2049, 2051, 0].map((code) => sampleOf(code));
    const expected = [0, 512, 512, 768, 768].map((v) => sampleOf(v - 256));
    expectSamples(feed(new Chain(constants, [maker]), input, [2]), expected);
    const first = new Chain(constants, [maker]);
    feed(first, input.slice(0, 2), [1]);
    const second = new Chain(constants, [maker]);
    second.load(first.save());
    expectSamples(feed(second, input.slice(2), [3]), expected.slice(2));
  });

  test('without its maker, or with another version, is refused by name', () => {
    expect(() => new Chain(constants)).toThrow('custom stage largest version 2: no maker was given for it');
    expect(() => new Chain(constants, [{ ...maker, version: 1 }])).toThrow(RangeError);
  });

  test.each<[string, Partial<Extract<StageConstants, { kind: 'custom' }>>]>([
    ['name', { name: '' }], ['version', { version: 0 }], ['version', { version: 65536 }], ['limit', { limit: 0 }],
    ['limit', { limit: 0.5 }], ['words', { words: [2147483648] }],
  ])('%s %j is refused', (field, part) => {
    const design = [INTAKE, { ...custom, ...part } as StageConstants];
    expect(checkConstants({ design, unit: unitOf() }).problems).toMatchObject([{ stage: 1, kind: 'custom', field }]);
  });

  test('works on counts only', () => {
    expect(checkConstants({ design: [INTAKE, SCALE, custom], unit: unitOf() }).problems)
      .toMatchObject([{ stage: 2, field: 'order' }]);
  });
});

test('every stage describes itself in one line that begins with its kind', () => {
  fc.assert(fc.property(chains, ({ design, unit }) => {
    for (const constants of design) {
      const stage = makeStage(constants, unit, []);
      expect(stage.kind).toBe(constants.kind);
      expect(stage.describe().startsWith(`${constants.kind}: `) && !stage.describe().includes('\n')).toBe(true);
    }
  }), { numRuns: 100 });
});

test('a meter leaves the block as it is', () => {
  fc.assert(fc.property(records(1000), (input) => {
    expectSamples(feed(new Meter({ kind: 'meter', windowSamples: 7, cycles: 1, hysteresis: 1, capacity: 2 }, unitOf()),
      input, [5]), input);
  }), { numRuns: 50 });
});
