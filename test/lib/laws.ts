/**
 * What holds for every stage, as one set of tests: it equals its oracle however the record is cut into blocks, its
 * state is integers below 2^53, reset() equals new, a state loaded into another instance goes on as if nothing had
 * been, a power cycle keeps the kept fields and nothing else.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  Flow, loadState, powerCycle, Problems, saveState, type Domain, type Stage, type StageConstants, type UnitConstants,
} from '../../lib/index.ts';
import { expectSamples, feed } from './feed.ts';
import { blockLengths, evenly, records } from './records.ts';
import { Tally } from './tally.ts';
import type { Oracle, Sample } from './oracle/record.ts';

export interface StageCase<C extends StageConstants> {
  constants: C;
  unit: UnitConstants;
  /** Largest magnitude that comes in. */
  limit: number;
  /** Where values often are. */
  around?: number;
  /** Status bits that come in often. */
  favoured?: readonly number[];
}

export interface StageLaws<C extends StageConstants> {
  name: string;
  make: (constants: C, unit: UnitConstants) => Stage;
  cases: fc.Arbitrary<StageCase<C>>;
  oracle: Oracle<C>;
  /** Branches that random inputs must reach, and how to see from outside that they did. */
  branches: readonly string[];
  observe(tally: Tally, given: StageCase<C>, input: Sample[], output: Sample[]): void;
  runs?: number;
}

type StageCheck<C> = (c: C, unit: UnitConstants, flow: Flow, problems: Problems) => void;

/** The problems that a stage's check finds behind a flow of this domain and largest magnitude. */
export function problemsOf<C>(
  check: StageCheck<C>, c: C, unit: UnitConstants, limit: number, domain: Domain = 'counts', part: Partial<Flow> = {},
): Problems['list'] {
  const flow = Object.assign(new Flow(), { domain, limit }, part);
  const problems = new Problems();
  problems.at(3, 'tested');
  check(c, unit, flow, problems);
  return problems.list;
}

/** Exactly one problem, at this field, with stage, value, what is allowed and a remedy. */
export function expectRefusal(list: Problems['list'], field: string): void {
  expect(list.map((problem) => problem.field)).toEqual([field]);
  expect(list[0]).toMatchObject({ stage: 3, kind: 'tested' });
  expect(list[0].allowed.length > 0 && list[0].remedy.length > 0).toBe(true);
}

export function expectIntegerState(stage: Stage): void {
  for (let i = 0; i < stage.state.length; i++) {
    if (!Number.isSafeInteger(stage.state[i])) throw new Error(`${stage.kind}.${stage.fields[i]} = ${stage.state[i]}`);
  }
}

export function describeStageLaws<C extends StageConstants>(laws: StageLaws<C>): void {
  const tally = new Tally(laws.branches);
  const numRuns = laws.runs ?? 150;
  const given = laws.cases.chain((c) => fc.tuple(fc.constant(c), records(c.limit, c.around, c.favoured), blockLengths));
  const cut = evenly(0, 1);

  describe(`laws of every stage: ${laws.name}`, () => {
    test('equals its oracle however the record is cut; state integers stay below 2^53', () => {
      fc.assert(fc.property(given, ([c, input, lengths]) => {
        const stage = laws.make(c.constants, c.unit);
        const output = feed(stage, input, lengths, () => expectIntegerState(stage));
        const expected = laws.oracle(c.constants, c.unit, input);
        expectSamples(output, expected);
        laws.observe(tally, c, input, expected);
      }), { numRuns: 2 * numRuns });
    });

    test('reset in the middle equals a new stage', () => {
      fc.assert(fc.property(given, cut, ([c, input, lengths], part) => {
        const stage = laws.make(c.constants, c.unit);
        const fresh = saveState(stage);
        feed(stage, input.slice(0, Math.floor(part * input.length)), lengths);
        stage.reset();
        expect(saveState(stage)).toEqual(fresh);
        expectSamples(feed(stage, input, lengths), laws.oracle(c.constants, c.unit, input));
      }), { numRuns });
    });

    test('a state saved in the middle and loaded into a new stage goes on uninterrupted', () => {
      fc.assert(fc.property(given, cut, ([c, input, lengths], part) => {
        const at = Math.floor(part * input.length);
        const first = laws.make(c.constants, c.unit);
        const second = laws.make(c.constants, c.unit);
        const head = feed(first, input.slice(0, at), lengths);
        loadState(second, JSON.parse(JSON.stringify(saveState(first))));
        const tail = feed(second, input.slice(at), lengths);
        expectSamples([...head, ...tail], laws.oracle(c.constants, c.unit, input));
      }), { numRuns });
    });

    test('a power cycle keeps the kept fields and nothing else', () => {
      fc.assert(fc.property(given, ([c, input, lengths]) => {
        const stage = laws.make(c.constants, c.unit);
        const fresh = saveState(stage);
        feed(stage, input, lengths);
        const before = saveState(stage);
        powerCycle(stage);
        const expected = fresh.map((word, i) => (stage.kept.includes(stage.fields[i]) ? before[i] : word));
        expect(saveState(stage)).toEqual(expected);
      }), { numRuns });
    });

    test('random inputs reached every branch often enough', () => {
      expect(tally.missing()).toEqual([]);
    });

    test('a state of the wrong length is refused', () => {
      const [c] = fc.sample(laws.cases, 1);
      const stage = laws.make(c.constants, c.unit);
      expect(() => loadState(stage, [...saveState(stage), 0])).toThrow(RangeError);
    });
  });
}
