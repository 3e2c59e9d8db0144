/**
 * Random whole chains: a list of drawn stages is taken in order, and each stage that checkConstants accepts behind
 * those already taken joins the chain, so every order that joins can come up and every chain drawn is accepted.
 */
import fc from 'fast-check';
import {
  checkConstants, type ChainConstants, type IntakeConstants, type StageConstants, type UnitConstants,
} from '../../lib/index.ts';
import { edgy, evenly, unitOf } from './records.ts';

const flag = fc.constantFrom(0, 1);
const few = fc.nat(12);
const limit = fc.oneof(edgy(1, 2147483647), edgy(1, 20000), fc.constant(2147483647));
const kind = <K extends string>(name: K) => fc.constant<K>(name);

const intake: fc.Arbitrary<IntakeConstants> = fc.record({
  bits: fc.oneof(fc.constantFrom(1, 12, 16, 24), fc.integer({ min: 1, max: 24 })), signed: flag,
  middle: evenly(0, 1), left: flag, word: fc.constantFrom(24, 32), guard: fc.nat(8),
}).map((d) => {
  const lowest = d.signed === 1 ? -(2 ** (d.bits - 1)) : 0;
  return {
    kind: 'intake', bits: d.bits, signed: d.signed, justifyShift: d.left === 1 ? d.word - d.bits : 0,
    midCode: lowest + Math.round(d.middle * (2 ** d.bits - 1)), guardBits: Math.min(d.guard, 30 - d.bits),
  };
});

const section = fc.record({
  fractionBits: fc.integer({ min: 1, max: 30 }), radius: fc.constantFrom(0, 0.5, 0.9, 0.99), angle: evenly(0, 3.1),
  b: fc.array(evenly(-1, 1), { minLength: 3, maxLength: 3 }), feedback: fc.nat(2), limit,
}).map((d) => {
  const unity = 2 ** d.fractionBits;
  return {
    fractionBits: d.fractionBits, b0: Math.round(d.b[0] * unity), b1: Math.round(d.b[1] * unity),
    b2: Math.round(d.b[2] * unity),
    a1: Math.round(-2 * d.radius * Math.cos(d.angle) * unity), a2: Math.round(d.radius ** 2 * unity),
    feedback: d.feedback, limit: d.limit,
  };
});

const overRange = fc.record({
  kind: kind('overRange'), highLimit: edgy(1, 40000), lowLimit: edgy(-40000, 0),
  consecutive: fc.integer({ min: 1, max: 4 }),
  magnitudeLimit: edgy(0, 2147483647), slewLimit: edgy(0, 4294967295), holdSamples: few,
  stuckAfter: fc.constantFrom(0, 2, 3, 10),
});
const despike = fc.record({ kind: kind('despike'), window: fc.constantFrom(3, 5), primed: flag });
const demodulate = fc.record({
  kind: kind('demodulate'), quarter: flag, longest: fc.integer({ min: 4, max: 60 }), blank: fc.nat(3),
});
const decimate = fc.record({
  kind: kind('decimate'), order: fc.integer({ min: 1, max: 5 }), ratio: fc.integer({ min: 2, max: 8 }), primed: flag,
});
const thermometer = fc.record({
  kind: kind('thermometer'), codes: fc.constant<number[]>([100, 2000, 4000]),
  temperatures: fc.array(edgy(-131072, 131072), { minLength: 3, maxLength: 3 }), lowCode: fc.nat(200),
  highCode: fc.integer({ min: 300, max: 4500 }),
  shift: fc.nat(12), holdSamples: few, fallback: edgy(-131072, 131072),
});
const offsetTrim = fc.record({ kind: kind('offsetTrim'), limit });
const gainTrim = fc.record({ kind: kind('gainTrim'), limit });
const zero = fc.record({
  kind: kind('zero'), startMode: flag, settleSamples: few, meanSamples: fc.integer({ min: 1, max: 12 }),
  spanLimit: edgy(0, 4294967295),
  windowLimit: edgy(0, 2147483647), buttonMode: flag, trackMode: flag, trackWindow: edgy(0, 2147483647),
  holdSamples: few,
  stepSamples: fc.integer({ min: 1, max: 4 }), authority: fc.nat(20), suspectMode: flag, limit,
});
const linearise = fc.record({
  kind: kind('linearise'), origin: edgy(-100000, 100000), gridBits: fc.integer({ min: 0, max: 16 }),
  knots: fc.array(edgy(-100000, 100000), { minLength: 2, maxLength: 9 }), beyond: flag, limit,
});
const sections = fc.record({
  kind: kind('sections'), sections: fc.array(section, { minLength: 1, maxLength: 3 }), primed: flag, memorySamples: few,
});
const average = fc.record({ kind: kind('average'), length: fc.integer({ min: 1, max: 20 }), primed: flag });
const scale = fc.record({
  kind: kind('scale'), gain: edgy(1, 2000000), shift: fc.nat(30), readingsPerAmpere: fc.constantFrom(1000, 1000000),
  limit,
});
const meter = fc.record({
  kind: kind('meter'), windowSamples: fc.integer({ min: 1, max: 60 }), cycles: fc.nat(3), hysteresis: edgy(1, 1000),
  capacity: fc.integer({ min: 1, max: 4 }),
});

const anyStage: fc.Arbitrary<StageConstants> = fc.oneof(
  overRange, despike, demodulate, decimate, thermometer, offsetTrim, gainTrim, zero, linearise, sections, sections,
  average, scale, meter, meter,
);

/** A table of one knot half of the time: it needs no thermometer. */
const table = (low: number, high: number) => fc.oneof(
  fc.array(edgy(low, high), { minLength: 1, maxLength: 1 }), fc.array(edgy(low, high), { minLength: 2, maxLength: 4 }),
);

const unit: fc.Arbitrary<UnitConstants> = fc.record({
  sign: fc.constantFrom(1, -1), factoryZero: fc.oneof(fc.constant(0), edgy(-200, 200)),
  gainQ24: edgy(4194304, 67108864),
  offsets: table(-1000, 1000), gains: table(4194304, 67108864),
}).map((d) => unitOf({
  sign: d.sign, factoryZero: d.factoryZero, gainQ24: d.gainQ24, offsets: d.offsets, gainsQ24: d.gains,
  offsetTemperatures: d.offsets.map((_, i) => 5000 * i - 7000), gainTemperatures: d.gains.map((_, i) =>
    9000 * i - 11000),
}));

/** Chains of 1 to 10 stages; most have an over-range watch behind intake. */
export const chains: fc.Arbitrary<ChainConstants> = fc.tuple(
  unit, intake, fc.option(overRange), fc.array(anyStage, { minLength: 0, maxLength: 14, size: 'max' }),
).map(([drawnUnit, first, watch, rest]) => {
  const design: StageConstants[] = [first];
  for (const stage of watch === null ? rest : [watch, ...rest]) {
    if (design.length === 10) break;
    const problems = checkConstants({ design: [...design, stage], unit: drawnUnit }).problems;
    if (problems.length === 0) design.push(stage);
  }
  return { design, unit: drawnUnit };
}).filter((c) => checkConstants(c).problems.length === 0);
