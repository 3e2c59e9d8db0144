/**
 * A/D converter: volts to the word that firmware reads.
 *   x = V / LSB * (1 + gain error) + offset error,  LSB = reference / 2^bits
 *   code = number of transitions at or below x + bow(x) + noise, held within 0 .. 2^bits - 1
 *   transition k = k - 1/2 + deviation(k),  bow = inl * 4 q (1 - q), q from 0 at the first transition to 1 at the last
 * V is taken at a jittered instant: V + dV/dt * jitter. A reference from the supply scales with it, a fixed one drifts.
 * deviation(k) is uniform, fixed for a unit, independent from k to k and 0 at both ends: a code width is 1 LSB with a
 * standard deviation of dnl. (Independent widths would add up to a walk that no converter has.) The word holds the
 * code as offset binary or two's complement (code - 2^(bits-1)), at the right or the left of word_bits; 32 bits of
 * offset binary appear as int32. Source: IEEE Std 1241, code transition levels (from memory).
 */
import { CLIP_CONVERTER } from './clip.ts';
import type { ConverterUnit } from './draw.ts';
import { RandomStream } from './random.ts';
import { REFERENCE_CELSIUS } from './sensor.ts';
import type { Surroundings } from './surroundings.ts';

export function lsbVolts(
  converter: ConverterUnit, supplyRatio: number, converterCelsius: number = REFERENCE_CELSIUS,
): number {
  const ratio = converter.reference === 'supply' ? supplyRatio
    : 1 + converter.referenceDrift_ppm_per_K * 1e-6 * (converterCelsius - REFERENCE_CELSIUS);
  return (converter.reference_V * ratio) / 2 ** converter.bits;
}

export interface ConverterLine {
  codesPerVolt: number;
  offsetCodes: number;
}

/** Reference, gain and offset error: the straight part of x(V). */
export function converterLine(
  converter: ConverterUnit, { converterCelsius, supplyRatio }: Pick<Surroundings, 'converterCelsius' | 'supplyRatio'>,
): ConverterLine {
  const gain = 1 + converter.gainError_percent * 1e-2;
  return {
    codesPerVolt: gain / lsbVolts(converter, supplyRatio, converterCelsius), offsetCodes: converter.offset_codes,
  };
}

/** How far the reading stands above the straight line at `codes`; 0 beyond the transitions at both ends. */
export function bowCodes(converter: ConverterUnit, codes: number): number {
  const q = (codes - 0.5) / (2 ** converter.bits - 2);
  return q > 0 && q < 1 ? 4 * converter.inl_codes * q * (1 - q) : 0;
}

/** What the format takes off a code that counts from 0. */
export function formatOffset(converter: ConverterUnit): number {
  return converter.format === "two's complement" ? 2 ** (converter.bits - 1) : 0;
}

/** The word for a code that counts from 0. */
export function wordOf(converter: ConverterUnit, code: number): number {
  const shift = converter.justified === 'left' ? converter.word_bits - converter.bits : 0;
  return (code - formatOffset(converter)) << shift;
}

export class Converter {
  /** Samples clipped so far. */
  clips = 0;
  private readonly noise: RandomStream;
  private readonly jitter: RandomStream;
  private readonly jitterSeconds: number;
  private readonly deviations: TransitionDeviations | null;
  private readonly highest: number;
  private line: ConverterLine;

  constructor(private readonly converter: ConverterUnit, options: { seed: number; trial: number; scenario?: string }) {
    const { seed, trial, scenario = '' } = options;
    this.noise = new RandomStream(seed, trial, `converter noise ${scenario}`);
    this.jitter = new RandomStream(seed, trial, `converter jitter ${scenario}`);
    this.jitterSeconds = converter.jitter_ns * 1e-9;
    this.highest = 2 ** converter.bits - 1;
    const widths = new RandomStream(seed, trial, 'converter code widths');
    this.deviations = converter.dnl_codes === 0 ? null
      : new TransitionDeviations(converter.dnl_codes, this.highest, widths);
    this.line = converterLine(converter, { converterCelsius: REFERENCE_CELSIUS, supplyRatio: 1 });
  }

  surround(surroundings: Pick<Surroundings, 'converterCelsius' | 'supplyRatio'>): void {
    this.line = converterLine(this.converter, surroundings);
  }

  /** The code that counts from 0; a clip is marked at `marks[at]`. */
  code(volts: number, slopeVoltsPerSecond: number, marks: Uint8Array, at: number): number {
    const { converter, jitterSeconds, highest, deviations } = this;
    const late = jitterSeconds === 0 ? 0 : jitterSeconds * this.jitter.normal();
    let x = (volts + slopeVoltsPerSecond * late) * this.line.codesPerVolt + this.line.offsetCodes;
    if (converter.inl_codes !== 0) x += bowCodes(converter, x);
    if (converter.noise_codes !== 0) x += converter.noise_codes * this.noise.normal();
    const code = deviations === null ? Math.floor(x + 0.5) : deviations.passed(x);
    if (code >= 0 && code <= highest) return code;
    marks[at] |= CLIP_CONVERTER;
    this.clips++;
    return code < 0 ? 0 : highest;
  }

  word(code: number): number {
    return wordOf(this.converter, code);
  }
}

/** Deviations from a hash of unit and transition: the same for ever, and no table of up to 2^24 of them. */
class TransitionDeviations {
  private readonly key: number;
  private readonly halfWidth: number;

  constructor(dnlCodes: number, private readonly highest: number, stream: RandomStream) {
    this.key = stream.word();
    // a width holds two deviations, each of variance halfWidth^2/3
    this.halfWidth = dnlCodes * Math.sqrt(1.5);
  }

  /** How many transitions stand at or below x; below 1, so only the two around x can be on the other side. */
  passed(x: number): number {
    const sure = Math.floor(x - 0.5);
    let code = sure;
    if (sure + 0.5 + this.deviation(sure + 1) <= x) code++;
    if (sure + 1.5 + this.deviation(sure + 2) <= x) code++;
    return code;
  }

  private deviation(transition: number): number {
    if (transition <= 1 || transition >= this.highest) return 0;
    // finaliser of MurmurHash3 (A. Appleby, public domain), twice so that neighbours and units have nothing in common
    const hash = mixed(mixed(transition ^ this.key) + this.key) >>> 0;
    return this.halfWidth * ((hash + 0.5) * 2 ** -31 - 1);
  }
}

function mixed(word: number): number {
  let h = word | 0;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return h ^ (h >>> 16);
}
