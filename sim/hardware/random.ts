/**
 * Counted random numbers: every noise source and every drawn part has a stream of its own, keyed by (seed, trial,
 * source), so a trial is the same whoever runs it and in whatever order.
 *
 * key = SplitMix64 mixing of seed, trial and an FNV-1a hash of the source name; four 32-bit state words from two
 * SplitMix64 outputs, low word first; then xoshiro128** 1.1.
 * Sources: G. Steele, D. Lea, C. Flood, "Fast splittable pseudorandom number generators" (2014), and D. Blackman,
 * S. Vigna, "Scrambled linear pseudorandom number generators", ACM Trans. Math. Softw. 47 (2021) - in the line of
 * G. Marsaglia, "Xorshift RNGs", J. Stat. Softw. 8 (2003). FNV-1a: Fowler, Noll, Vo.
 */
import { normalQuantile } from './quantile.ts';

const GOLDEN = 0x9e3779b97f4a7c15n;

/** SplitMix64: the 64-bit outputs that follow from `state`. Slow (BigInt); for seeding only. */
export class SplitMix64 {
  private state: bigint;

  constructor(state: bigint) {
    this.state = BigInt.asUintN(64, state);
  }

  next(): bigint {
    this.state = BigInt.asUintN(64, this.state + GOLDEN);
    let z = this.state;
    z = BigInt.asUintN(64, (z ^ (z >> 30n)) * 0xbf58476d1ce4e5b9n);
    z = BigInt.asUintN(64, (z ^ (z >> 27n)) * 0x94d049bb133111ebn);
    return z ^ (z >> 31n);
  }
}

/** Four state words from SplitMix64, low word of each output first. */
export function seedWords(key: bigint): Int32Array {
  const mixer = new SplitMix64(key);
  const words = new Int32Array(4);
  for (let i = 0; i < 4; i += 2) {
    const output = mixer.next();
    words[i] = Number(BigInt.asIntN(32, output));
    words[i + 1] = Number(BigInt.asIntN(32, output >> 32n));
  }
  return words;
}

function hashOf(name: string): bigint {
  let hash = 0xcbf29ce484222325n;
  for (const byte of new TextEncoder().encode(name)) {
    hash = BigInt.asUintN(64, (hash ^ BigInt(byte)) * 0x100000001b3n);
  }
  return hash;
}

function keyOf(seed: number, trial: number, source: string): bigint {
  if (!Number.isSafeInteger(seed)) throw new RangeError(`seed: expected an integer below 2^53, got ${seed}`);
  if (!Number.isSafeInteger(trial) || trial < 0) {
    throw new RangeError(`trial: expected an integer from 0, got ${trial}`);
  }
  // each step is one-to-one in what it mixes in, so two trials of one seed never share a key
  let key = new SplitMix64(BigInt(seed)).next();
  key = new SplitMix64(key ^ BigInt(trial)).next();
  return new SplitMix64(key ^ hashOf(source)).next();
}

/** xoshiro128** 1.1. */
export class Xoshiro128 {
  private readonly words: Int32Array;

  /** Four words, not all zero. They are copied. */
  constructor(words: ArrayLike<number>) {
    this.words = Int32Array.from(words);
    if (this.words.length !== 4 || !this.words.some((word) => word !== 0)) {
      throw new RangeError('state: expected four words that are not all zero');
    }
  }

  /** The next 32 bits, as a signed number. */
  word(): number {
    const s = this.words;
    const s1 = s[1];
    const five = Math.imul(s1, 5);
    const result = Math.imul((five << 7) | (five >>> 25), 9);
    const s2 = s[2] ^ s[0];
    const s3 = s[3] ^ s1;
    s[1] = s1 ^ s2;
    s[0] ^= s3;
    s[2] = s2 ^ (s1 << 9);
    s[3] = (s3 << 11) | (s3 >>> 21);
    return result;
  }

  /** Never 0 and never 1: the middle of one of 2^32 equal cells. */
  uniform(): number {
    return ((this.word() >>> 0) + 0.5) * 2.3283064365386963e-10;
  }

  /** One draw by inversion; with 2^32 cells it reaches 6.3 standard deviations. */
  normal(): number {
    return normalQuantile(this.uniform());
  }

  /** The same as `count` calls of normal(), faster. */
  fillNormals(target: Float64Array, count: number): void {
    const s = this.words;
    let s0 = s[0];
    let s1 = s[1];
    let s2 = s[2];
    let s3 = s[3];
    for (let i = 0; i < count; i++) {
      const five = Math.imul(s1, 5);
      const word = Math.imul((five << 7) | (five >>> 25), 9);
      const shifted = s1 << 9;
      s2 ^= s0;
      s3 ^= s1;
      s1 ^= s2;
      s0 ^= s3;
      s2 ^= shifted;
      s3 = (s3 << 11) | (s3 >>> 21);
      target[i] = normalQuantile(((word >>> 0) + 0.5) * 2.3283064365386963e-10);
    }
    s[0] = s0;
    s[1] = s1;
    s[2] = s2;
    s[3] = s3;
  }
}

/** The stream of one source in one trial. */
export class RandomStream extends Xoshiro128 {
  constructor(seed: number, trial: number, source: string) {
    super(seedWords(keyOf(seed, trial, source)));
  }
}
