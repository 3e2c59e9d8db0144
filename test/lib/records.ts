/**
 * Random records for the tests of the chain: stretches of constants, steps, full-scale noise, small noise, rails,
 * impulses and ramps, with events, lingering bits, temperatures and temperature codes that change. Constants are
 * drawn with their ranges' ends and the values beside them overweighted.
 */
import fc from 'fast-check';
import { STATUS_BITS, UNIT_VERSION, UNITY_Q24, unitCrc, type UnitConstants } from '../../lib/index.ts';
import type { Sample } from './oracle/record.ts';

/** An integer of low..high, often an end of the range, beside it, or small. */
export function edgy(low: number, high: number): fc.Arbitrary<number> {
  const edges = [low, low + 1, high - 1, high, -1, 0, 1, 2].filter((n) => n >= low && n <= high);
  return fc.oneof(
    { arbitrary: fc.integer({ min: low, max: high }), weight: 2 },
    { arbitrary: fc.constantFrom(...edges), weight: 1 },
    { arbitrary: fc.integer({ min: Math.max(low, -300), max: Math.max(low, Math.min(high, 300)) }), weight: 1 },
  );
}

/** Evenly between low and high, both included (fc.double is even over the bits of a double, so mostly near zero). */
export function evenly(low: number, high: number): fc.Arbitrary<number> {
  return fc.integer({ min: 0, max: 1048576 }).map((n) => low + (high - low) * n / 1048576);
}

export function unitOf(part: Partial<UnitConstants> = {}): UnitConstants {
  const unit: UnitConstants = {
    version: UNIT_VERSION, sign: 1, factoryZero: 0, gainQ24: UNITY_Q24, offsetTemperatures: [0], offsets: [0],
    gainTemperatures: [0], gainsQ24: [UNITY_Q24], crc: 0, ...part,
  };
  return { ...unit, crc: unitCrc(unit) };
}

/** A plain sample: no status, temperature or zero unless given. */
export function sampleOf(value: number | bigint, part: Partial<Sample> = {}): Sample {
  return { value: BigInt(value), status: 0, temperatureCode: 0, temperature: 0n, zero: 0n, ...part };
}

const SHAPES = ['constant', 'full noise', 'small noise', 'rails', 'impulse', 'ramp'] as const;

interface Stretch {
  shape: (typeof SHAPES)[number];
  level: number;
  length: number;
  seed: number;
  status: number;
  /** One sample in so many has random status bits. */
  rarity: number;
  temperatureCode: number;
  temperature: number;
}

/** Numbers below 2^32 from a linear congruence (constants of D. E. Knuth, MMIX); enough for shapes. */
function draws(seed: number): () => number {
  let state = BigInt(seed);
  return () => {
    state = (state * 6364136223846793005n + 1442695040888963407n) & 0xffffffffffffffffn;
    return Number(state >> 32n);
  };
}

function stretchValue(s: Stretch, n: number, limit: number, next: () => number): number {
  const held = (value: number) => Math.max(-limit, Math.min(limit, value));
  switch (s.shape) {
    case 'constant': return s.level;
    case 'full noise': return (next() % (2 * limit + 1)) - limit;
    case 'small noise': return held(s.level + (next() % 7) - 3);
    case 'rails': return next() % 2 === 0 ? limit : -limit;
    case 'impulse': return n === s.seed % s.length ? (s.seed % 2 === 0 ? limit : -limit) : s.level;
    case 'ramp': return held(s.level + n * ((s.seed % 201) - 100));
  }
}

function stretchSamples(s: Stretch, limit: number, bits: readonly number[]): Sample[] {
  const next = draws(s.seed);
  const samples: Sample[] = [];
  for (let n = 0; n < s.length; n++) {
    const extra = next() % s.rarity === 0 ? bits[next() % bits.length] : 0;
    samples.push({
      value: BigInt(stretchValue(s, n, limit, next)), status: s.status | extra, temperatureCode: s.temperatureCode,
      temperature: BigInt(next() % 9 === 0 ? s.temperature - 1 : s.temperature), zero: BigInt(next() % 100) - 50n,
    });
  }
  return samples;
}

/** Records of 1 to 320 samples with |value| <= limit, near `around` half of the time; `favoured` bits come often. */
export function records(limit: number, around = 0, favoured: readonly number[] = []): fc.Arbitrary<Sample[]> {
  const bits = [...STATUS_BITS, ...favoured, ...favoured, ...favoured];
  const near = fc.integer({ min: -3, max: 3 }).map((n) => Math.max(-limit, Math.min(limit, around + n)));
  const stretch: fc.Arbitrary<Stretch> = fc.record({
    shape: fc.constantFrom(...SHAPES),
    level: fc.oneof(near, edgy(-limit, limit)),
    length: fc.integer({ min: 1, max: 40 }),
    seed: fc.nat(),
    status: fc.oneof({ arbitrary: fc.constant(0), weight: 5 }, { arbitrary: fc.constantFrom(...bits), weight: 1 }),
    rarity: fc.constantFrom(2, 20, 1000000),
    temperatureCode: fc.oneof(fc.constantFrom(0, 1), edgy(-1, 5000)),
    temperature: edgy(-131071, 131072),
  });
  return fc.array(stretch, { minLength: 1, maxLength: 8, size: 'max' })
    .map((list) => list.flatMap((s) => stretchSamples(s, limit, bits)));
}

/** Lengths of blocks: one sample each, odd mixtures with empty blocks, or everything at once. */
export const blockLengths: fc.Arbitrary<number[]> = fc.oneof(
  fc.constant<number[]>([1]),
  fc.constant<number[]>([4096]),
  fc.array(fc.integer({ min: 0, max: 50 }), { minLength: 1, maxLength: 6 }).map((list) => [...list, 1]),
);
