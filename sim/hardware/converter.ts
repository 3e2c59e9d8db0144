/**
 * A/D converter: volts to the word that firmware reads.
 *   code = floor(V / LSB + noise + 1/2), held within 0 .. 2^bits - 1;  LSB = reference / 2^bits
 * A reference taken from the supply scales with it. The word holds the code as offset binary or two's complement
 * (code - 2^(bits-1)), at the right or at the left of word_bits. A 32-bit offset binary word appears as int32.
 * Source: IEEE Std 1241, ideal quantiser with transitions half an LSB beside the codes (from memory).
 */
import { CLIP_CONVERTER } from './clip.ts';
import type { ConverterUnit } from './draw.ts';
import type { Xoshiro128 } from './random.ts';

export function lsbVolts(converter: ConverterUnit, supplyRatio: number): number {
  const ratio = converter.reference === 'supply' ? supplyRatio : 1;
  return (converter.reference_V * ratio) / 2 ** converter.bits;
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
  private readonly codesPerVolt: number;
  private readonly highest: number;

  constructor(
    private readonly converter: ConverterUnit, supplyRatio: number, private readonly noise: Xoshiro128,
  ) {
    this.codesPerVolt = 1 / lsbVolts(converter, supplyRatio);
    this.highest = 2 ** converter.bits - 1;
  }

  /** The code that counts from 0; a clip is marked at `marks[at]`. */
  code(volts: number, marks: Uint8Array, at: number): number {
    const noisy = this.converter.noise_codes === 0 ? 0 : this.converter.noise_codes * this.noise.normal();
    const code = Math.floor(volts * this.codesPerVolt + noisy + 0.5);
    if (code >= 0 && code <= this.highest) return code;
    marks[at] |= CLIP_CONVERTER;
    this.clips++;
    return code < 0 ? 0 : this.highest;
  }

  word(code: number): number {
    return wordOf(this.converter, code);
  }
}
