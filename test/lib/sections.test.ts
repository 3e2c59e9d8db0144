/**
 * Second-order sections against exact wide sums over the whole record, by hand, against published limit cycles,
 * and on the promise of error feedback: a constant comes out as that constant in the mean, without a dead band.
 */
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import {
  CLAMPED, OVER_RANGE, SETTLING, Sections, checkSections, loadState, type SectionConstants, type SectionsConstants,
} from '../../lib/index.ts';
import { feed } from './feed.ts';
import { describeStageLaws, expectRefusal, problemsOf } from './laws.ts';
import { edgy, evenly, sampleOf, unitOf } from './records.ts';
import { sectionOracle, sectionsOracle } from './oracle/sections.ts';

const MOST = 2147483647;

/** A section with poles anywhere inside the circle, its very edge included, for values of up to 2^valueBits. */
function sectionArbitrary(valueBits: number): fc.Arbitrary<SectionConstants> {
  const mostBits = Math.min(30, 50 - valueBits);
  return fc.record({
    fractionBits: edgy(1, mostBits),
    radius: fc.constantFrom(0, 0.5, 0.9, 0.999, 1),
    angle: evenly(0, Math.PI),
    corner: fc.constantFrom('pair', 'pair', 'pair', 'high a1', 'low a1', 'low a2'),
    b: fc.tuple(evenly(-1, 1), evenly(-1, 1), evenly(-1, 1)),
    feedback: fc.constantFrom(0, 1, 2),
    limit: fc.oneof(edgy(1, Math.min(MOST, 2 ** valueBits)), fc.integer({ min: 1, max: 2 })),
  }).map((d) => {
    const unity = 2 ** d.fractionBits;
    const pair = [Math.round(-2 * d.radius * Math.cos(d.angle) * unity), Math.round(d.radius * d.radius * unity)];
    const inside = { a2: Math.min(pair[1], unity - 1), a1: 0 };
    inside.a1 = Math.max(-(unity + inside.a2) + 1, Math.min(unity + inside.a2 - 1, pair[0]));
    if (d.corner === 'high a1') Object.assign(inside, { a2: unity - 1, a1: 2 * unity - 2 });
    if (d.corner === 'low a1') Object.assign(inside, { a2: unity - 1, a1: -(2 * unity - 2) });
    if (d.corner === 'low a2') Object.assign(inside, { a2: -(unity - 1), a1: 0 });
    const [b0, b1, b2] = d.b.map((b) => Math.round(b * unity));
    return { fractionBits: d.fractionBits, b0, b1, b2, ...inside, feedback: d.feedback, limit: d.limit };
  });
}

const cases = fc.constantFrom(1, 8, 15, 20, 24, 31).chain((valueBits) => fc.record({
  constants: fc.record({
    kind: fc.constant<'sections'>('sections'),
    sections: fc.array(sectionArbitrary(valueBits), { minLength: 1, maxLength: 4 }),
    primed: fc.constantFrom(0, 1),
    memorySamples: fc.oneof(fc.nat(20), edgy(0, 2147483646)),
  }),
  unit: fc.constant(unitOf()),
  limit: edgy(1, Math.min(MOST, 2 ** valueBits)),
})).chain((c) => fc.constantFrom(0, c.limit, -c.limit).map((around) => ({ ...c, around })))
  .filter((c) => problemsOf(checkSections, c.constants, c.unit, c.limit).length === 0);

describeStageLaws<SectionsConstants>({
  name: 'sections',
  make: (c, unit) => new Sections(c, unit),
  cases,
  oracle: sectionsOracle,
  branches: ['clamped high', 'clamped low', 'settling', 'over range stays', 'feedback 0', 'feedback 1', 'feedback 2',
    'clamped when primed', 'several sections'],
  observe(tally, c, input, output) {
    const { sections } = c.constants;
    const last = BigInt(sections[sections.length - 1].limit);
    tally.count('several sections', sections.length > 1);
    for (const section of sections) tally.count(`feedback ${section.feedback}`);
    output.forEach((sample, n) => {
      const added = sample.status & ~input[n].status;
      tally.count('clamped high', (added & CLAMPED) !== 0 && sample.value === last);
      tally.count('clamped low', (added & CLAMPED) !== 0 && sample.value === -last);
      tally.count('settling', (added & SETTLING) !== 0);
      tally.count('over range stays', (added & OVER_RANGE) !== 0);
      tally.count('clamped when primed', n === 0 && c.constants.primed === 1 && (added & CLAMPED) !== 0);
    });
  },
  runs: 400,
});

type Output = { value: number; status: number }[];

function filtered(sections: SectionConstants[], values: number[], primed = 0, state?: number[]): Output {
  const stage = new Sections({ kind: 'sections', sections, primed, memorySamples: 0 }, unitOf());
  if (state !== undefined) loadState(stage, [1, 0, 0, 0, 0, 0, 0, ...state]);
  return feed(stage, values.map((v) => sampleOf(v)), [500]).map((s) => ({ value: Number(s.value), status: s.status }));
}

const valuesOf = (output: { value: number }[]) => output.map((s) => s.value);

/** y = x / 2 + y before / 2 in 1/2^4. */
const HALF: SectionConstants = { fractionBits: 4, b0: 8, b1: 0, b2: 0, a1: -8, a2: 0, feedback: 0, limit: 100 };

describe('sections, by hand', () => {
  test('from zero: 10 gives 5, then 7.5 and 9, a tie up; SETTLING for memorySamples', () => {
    // 10/2 + 0 = 5; 5 + 2.5 = 7.5 -> 8; 5 + 4 = 9; 5 + 4.5 = 9.5 -> 10
    expect(valuesOf(filtered([HALF], [10, 10, 10, 10]))).toEqual([5, 8, 9, 10]);
    const stage = new Sections({ kind: 'sections', sections: [HALF], primed: 0, memorySamples: 2 }, unitOf());
    expect(feed(stage, [1, 1, 1].map((v) => sampleOf(v)), [2]).map((s) => s.status)).toEqual([SETTLING, SETTLING, 0]);
  });

  test('primed: as if the first sample had always been there, also through a gain and a second section', () => {
    // DC gain 16 / 8 = 2, then 1
    expect(valuesOf(filtered([{ ...HALF, b0: 16 }, HALF], [10, 10, 10], 1))).toEqual([20, 20, 20]);
  });

  test('error feedback of order 1 adds the last rounding error, of order 2 twice the last less the one before', () => {
    // in 1/16: 5 sixteenths a sample through a gain of 5/16, no poles
    const gain = { ...HALF, b0: 5, a1: 0 };
    // order 0: round(5/16) = 0. order 1: s = 5, 10 -> 1 (e -6), -1 -> 0, 4 -> 0 (e 4), 9 -> 1, ...
    expect(valuesOf(filtered([gain], [1, 1, 1, 1, 1]))).toEqual([0, 0, 0, 0, 0]);
    expect(valuesOf(filtered([{ ...gain, feedback: 1 }], [1, 1, 1, 1, 1]))).toEqual([0, 1, 0, 0, 1]);
    // order 2: s = 5 (0, e 5); 5 + 10 = 15 (1, e -1); 5 - 2 - 5 = -2 (0, e -2); 5 - 4 + 1 = 2 (0, e 2); 5 + 4 + 2 = 11
    // (1)
    expect(valuesOf(filtered([{ ...gain, feedback: 2 }], [1, 1, 1, 1, 1]))).toEqual([0, 1, 0, 0, 1]);
  });

  test('a clamped value is what is fed back, and the clamp empties the errors', () => {
    const small = { ...HALF, limit: 7, feedback: 2 };
    const stage = new Sections({ kind: 'sections', sections: [small], primed: 0, memorySamples: 0 }, unitOf());
    const output = feed(stage, [20, -20, 0, 0].map((v) => sampleOf(v)), [1]);
    // 10 -> 7; -10 + 3.5 = -6.5 -> -6 with e = -8/16; -3 + 2 * -0.5 = -4, e 0; -2 + 0.5 = -1.5 -> -1
    expect(output.map((s) => [Number(s.value), s.status])).toEqual([[7, CLAMPED], [-6, 0], [-4, 0], [-1, 0]]);
    feed(stage, [20].map((v) => sampleOf(v)), [1]);
    expect([stage.state[11], stage.state[12]]).toEqual([0, 0]);
  });

  test('a clamp is exactly beyond the limit, at both ends', () => {
    const pass = { ...HALF, b0: 16, a1: 0 };
    expect(filtered([pass], [100, 101, -100, -101]).map((s) => [s.value, s.status]))
      .toEqual([[100, 0], [100, CLAMPED], [-100, 0], [-100, CLAMPED]]);
  });

  test('a lingering bit stays for exactly memorySamples', () => {
    const stage = new Sections({ kind: 'sections', sections: [HALF], primed: 1, memorySamples: 2 }, unitOf());
    const input = [0, OVER_RANGE, 0, 0, 0].map((status) => sampleOf(0, { status }));
    expect(feed(stage, input, [2]).map((s) => s.status)).toEqual([0, OVER_RANGE, OVER_RANGE, OVER_RANGE, 0]);
  });
});

// D. L. Jones, "Limit Cycles", Connexions m11928: H(z) = 1 / (1 - z^-1 + 0.5 z^-2), no input, outputs +0.8 (latest) and
// -0.8 (before). Wrapping arithmetic swings between -0.8 and +0.8 for ever; saturating arithmetic dies out. The
// saturating sequence is exact arithmetic with the upper limit of Q15.
describe('overflow oscillation', () => {
  const resonance = (feedback: number): SectionConstants =>
    ({ fractionBits: 15, b0: 0, b1: 0, b2: 0, a1: -32768, a2: 16384, feedback, limit: 32767 });
  const start = [0, 0, 26214, -26214, 0, 0]; // 0.8 * 2^15 = 26214.4

  test('saturation gives the published sequence', () => {
    const published = [0.99997, 0.59997, 0.09998, -0.2, -0.24999, -0.14999, -0.025, 0.05, 0.0625, 0.0375];
    // half a count for each rounding and 0.4 for the start, each through sum |h| = 3.125 * 16/15 < 3.34; 5 digits
    // printed
    const tolerance = (0.5 + 0.4) * 3.34 / 32768 + 0.5e-5;
    const output = valuesOf(filtered([resonance(0)], new Array(10).fill(0), 0, start));
    output.forEach((y, n) => expect(Math.abs(y / 32768 - published[n]), `sample ${n}`).toBeLessThanOrEqual(tolerance));
  });

  test.each([0, 1, 2])('it has died out to a count or two after 60 samples, error feedback %i', (feedback) => {
    // 0.7071^60 * 2^15 < 1e-4; what is left is the rounding: half a count times the sum of |h * (1 - z^-1)^order|,
    // which is 3.34 at orders 0 and 2, 2.5 at order 1; so below 1.67 + 1e-4
    const output = valuesOf(filtered([resonance(feedback)], new Array(200).fill(0), 0, start));
    expect(Math.max(...output.slice(60).map(Math.abs))).toBeLessThanOrEqual(1);
    expect(output[0]).toBe(32767);
  });
});

// Rounding dead band of y = Q[a y]: 0.5 / (1 - |a|) (A. V. Oppenheim, R. W. Schafer, Discrete-Time Signal Processing,
// zero-input limit cycles; value from memory). With ties up instead of away from zero the negative pole ends at 0.
describe('dead band of plain rounding', () => {
  const pole = (a: number, feedback: number): SectionConstants =>
    ({ fractionBits: 20, b0: 0, b1: 0, b2: 0, a1: Math.round(-a * 1048576), a2: 0, feedback, limit: 1000 });
  const decay = (a: number, first: number, feedback: number, samples: number) =>
    valuesOf(filtered([pole(a, feedback)], new Array(samples).fill(0), 0, [0, 0, first, 0, 0, 0]));

  test('a = 1/2 from 7 stays at 1; a = -1/2 by hand; a = 0.95 never lets 7 decay; a = 31/32 has a dead band of 16',
    () => {
    expect([7, ...decay(0.5, 7, 0, 5)]).toEqual([7, 4, 2, 1, 1, 1]);
    // -3.5 -> -3, 1.5 -> 2, -1, 0.5 -> 1, -0.5 -> 0
    expect([7, ...decay(-0.5, 7, 0, 5)]).toEqual([7, -3, 2, -1, 1, 0]);
    expect(decay(0.95, 7, 0, 1000)[999]).toBe(7);
    // 0.5 / (1 - 31/32) = 16: 15.5 is a tie and goes up to 16, -15.5 goes up to -15
    expect(decay(0.96875, 100, 0, 1000)[999]).toBe(16);
    expect(decay(0.96875, -100, 0, 1000)[999]).toBe(-15);
  });

  test.each([1, 2])('error feedback of order %i has none: the mean goes to zero', (feedback) => {
    // sum over N of (1 - a) y = edges of y and of the error: below (1 + 2) / N / (1 - 0.95) for |y| <= 1, |e| <= 1/2
    const tail = decay(0.95, 100, feedback, 3000).slice(1000);
    expect(Math.max(...tail.map(Math.abs))).toBeLessThanOrEqual(1);
    expect(Math.abs(tail.reduce((sum, y) => sum + y, 0) / 2000)).toBeLessThanOrEqual(3 / 2000 / 0.05);
  });
});

/**
 * Butterworth low-pass or high-pass of order 2 by the bilinear transform, with integers whose DC gain is exactly 1 or
 * 0. K = tan(pi fc / fs), Q = sqrt(1/2).
 */
function butterworth(corner: number, feedback: number, kind: 'low' | 'high', limit = 8388608): SectionConstants {
  const unity = 2 ** 30;
  const K = Math.tan(Math.PI * corner);
  const norm = 1 / (1 + K * Math.SQRT2 + K * K);
  const a1 = Math.round(2 * (K * K - 1) * norm * unity);
  const a2 = Math.round((1 - K * Math.SQRT2 + K * K) * norm * unity);
  const b0 = kind === 'low' ? Math.round(K * K * norm * unity) : Math.round(norm * unity);
  const b1 = kind === 'low' ? unity + a1 + a2 - 2 * b0 : -2 * b0;
  return { fractionBits: 30, b0, b1, b2: b0, a1, a2, feedback, limit };
}

/** Half a count times the sum of |(1 - z^-1)^2 / A(z)|: the most that order 2 can add to a constant. */
function ditherBound(c: SectionConstants): number {
  const [a1, a2] = [c.a1 / 2 ** 30, c.a2 / 2 ** 30];
  let sum = 0;
  let [h1, h2] = [0, 0];
  for (let n = 0; n < 20000; n++) {
    const h = ([1, -2, 1][n] ?? 0) - a1 * h1 - a2 * h2;
    sum += Math.abs(h);
    [h2, h1] = [h1, h];
  }
  return sum / 2;
}

/**
 * Summing A(z) (y - c) = -(shaped error) over N samples telescopes: A(1) * sum (y - c) is at most
 * (|a1| + 2 |a2|) * 2 * span + 2, span the largest |y - c| there, errors at most half a count each.
 */
function meanTolerance(c: SectionConstants, settled: number[], level: number): number {
  const unity = 2 ** 30;
  const span = furthest(settled, level);
  const edges = (Math.abs(c.a1) + 2 * Math.abs(c.a2)) / unity * 2 * span + 2;
  return edges / ((unity + c.a1 + c.a2) / unity) / settled.length;
}

function furthest(values: number[], level: number): number {
  return values.reduce((most, y) => Math.max(most, Math.abs(y - level)), 0);
}

const meanOf = (values: number[]) => values.reduce((sum, y) => sum + y, 0) / values.length;

describe('a constant comes out as that constant in the mean, from any state', () => {
  test.each([1, 2])('low-pass, error feedback of order %i, corner 1/100', (feedback) => {
    const c = butterworth(0.01, feedback, 'low');
    const state = fc.tuple(edgy(-1000000, 1000000), edgy(-1000000, 1000000), edgy(-1000000, 1000000),
      edgy(-1000000, 1000000),
      edgy(-536870912, 536870911), edgy(-536870912, 536870911));
    fc.assert(fc.property(state, edgy(-1000000, 1000000), (words, level) => {
      // pole radius exp(-0.0444): 1000 samples take 2e6 * 100 to 1e-11
      const settled = valuesOf(filtered([c], new Array(21000).fill(level), 0, words)).slice(1000);
      const tolerance = meanTolerance(c, settled, level);
      expect(tolerance).toBeLessThan(0.5);
      expect(Math.abs(meanOf(settled) - level)).toBeLessThanOrEqual(tolerance);
    }), { numRuns: 20 });
  });

  test('a high-pass gives exactly zero in the mean', () => {
    const c = butterworth(0.01, 2, 'high');
    const settled = valuesOf(filtered([c], new Array(21000).fill(123456), 0)).slice(1000);
    expect(c.b0 + c.b1 + c.b2).toBe(0);
    expect(Math.abs(meanOf(settled))).toBeLessThanOrEqual(meanTolerance(c, settled, 0));
    expect(Math.max(...settled.map(Math.abs))).toBeLessThanOrEqual(1);
  });

  test('plain rounding turns a constant 5 into 0 at corners of 1/100 of the rate and below', () => {
    for (const corner of [0.01, 0.001]) {
      expect(valuesOf(filtered([butterworth(corner, 0, 'low')], new Array(40 / corner).fill(5))).pop()).toBe(0);
    }
  });

  test('first-order feedback is exact at 1/1000', () => {
    const c = butterworth(0.001, 1, 'low');
    const settled = valuesOf(filtered([c], new Array(240000).fill(5))).slice(40000);
    expect(Math.abs(meanOf(settled) - 5)).toBeLessThanOrEqual(meanTolerance(c, settled, 5));
  });

  test('first-order feedback at 1/10000 holds a step of 5 back until its errors have added up to half a count', () => {
    // each sample adds 5 (b0 + b1 + b2) to the carried error, which leaves as a count at 2^29: after 25 corner periods
    const c = butterworth(0.0001, 1, 'low');
    const samples = Math.floor(2 ** 29 / (5 * (c.b0 + c.b1 + c.b2)));
    expect(samples).toBeGreaterThan(250000);
    const output = valuesOf(filtered([c], new Array(samples + 5).fill(5)));
    expect(furthest(output.slice(0, samples), 0)).toBe(0);
    expect(output[samples + 4]).toBe(1);
  });

  test('second-order feedback follows at 1/10000 too', () => {
    const settled = valuesOf(filtered([butterworth(0.0001, 2, 'low')], new Array(400000).fill(5))).slice(100000);
    expect(new Set(settled.slice(-1000)).has(5)).toBe(true);
    expect(furthest(settled, 5)).toBeLessThanOrEqual(1);
  });

  test.each([[0.01, 1], [0.1, 1], [0.25, 1], [0.4, 5], [0.45, 14]])(
    'dither of second-order feedback at corner %f: within %i counts and within half of sum |(1 - z^-1)^2 / A|',
    (corner, most) => {
      const c = butterworth(corner, 2, 'low');
      const settled = valuesOf(filtered([c], new Array(22000).fill(5))).slice(2000);
      const dither = furthest(settled, 5);
      expect(dither).toBeLessThanOrEqual(Math.min(most, ditherBound(c)));
    },
  );

  test('DC gain is exactly one: primed with any constant, nothing ever moves', () => {
    fc.assert(fc.property(edgy(-8388608, 8388608), fc.constantFrom(0, 1, 2), (level, feedback) => {
      const output = filtered([butterworth(0.003, feedback, 'low')], new Array(50).fill(level), 1);
      expect(output.every((s) => s.value === level && s.status === 0)).toBe(true);
    }), { numRuns: 100 });
  });
});

describe('sections refuse', () => {
  const good: SectionsConstants = { kind: 'sections', sections: [HALF], primed: 1, memorySamples: 5 };
  const only = (part: Partial<SectionConstants>) => ({ ...good, sections: [{ ...HALF, ...part }] });
  test('nothing in order, on counts and on readings', () => {
    expect(problemsOf(checkSections, good, unitOf(), 1000)).toEqual([]);
    expect(problemsOf(checkSections, good, unitOf(), 1000, 'reading')).toEqual([]);
  });
  test.each<[keyof SectionConstants, number]>([
    ['fractionBits', 0], ['fractionBits', 31], ['b0', 2147483648], ['b1', -2147483648], ['b2', 0.5], ['a1', 2147483648],
    ['a2', NaN], ['feedback', 3], ['feedback', -1], ['limit', 0], ['limit', 2147483648],
  ])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkSections, only({ [field]: value }), unitOf(), 1000), `section 1 ${field}`);
  });
  test.each([['primed', 2], ['memorySamples', -1], ['memorySamples', 2147483647]])('%s %s', (field, value) => {
    expectRefusal(problemsOf(checkSections, { ...good, [field]: value }, unitOf(), 1000), field);
  });
  test('none and more than eight', () => {
    expectRefusal(problemsOf(checkSections, { ...good, sections: [] }, unitOf(), 1000), 'sections');
    expectRefusal(problemsOf(checkSections, { ...good, sections: new Array(9).fill(HALF) }, unitOf(), 1000),
      'sections');
  });
  test.each([[0, 16], [0, -16], [16, 0], [-16, 0], [31, 15], [-31, 15], [1, -15]])(
    'poles on the circle or outside: a1 %i, a2 %i of 16', (a1, a2) => {
      expectRefusal(problemsOf(checkSections, only({ a1, a2 }), unitOf(), 10), 'section 1 a1, a2');
    });
  test.each([[30, 15], [-30, 15], [0, -15], [15, 0]])('poles just inside are taken: a1 %i, a2 %i of 16', (a1, a2) => {
    expect(problemsOf(checkSections, only({ a1, a2 }), unitOf(), 10)).toEqual([]);
  });
  test('a sum that reaches 2^53, naming the section', () => {
    const wide = { ...HALF, fractionBits: 22, b0: 4194304, a1: 0, a2: 0, limit: MOST };
    // (2^22 - 1) * (2^31 - 1) + 2^23 is below 2^53, 2^22 * (2^31 - 1) + 2^23 is not
    const most = { ...wide, b0: 4194303 };
    expect(problemsOf(checkSections, { ...good, sections: [most, most] }, unitOf(), MOST)).toEqual([]);
    expectRefusal(problemsOf(checkSections, { ...good, sections: [most, wide] }, unitOf(), MOST), 'section 2 sum');
  });
  test('codes', () => expectRefusal(problemsOf(checkSections, good, unitOf(), 1, 'codes'), 'order'));
});

test('the section oracle itself: a plain gain of 3/2 without rounding', () => {
  const c = { ...HALF, b0: 24, a1: 0 };
  expect(sectionOracle(c, [2n, -2n, 4n], false, 0n).y).toEqual([3n, -3n, 6n]);
});
