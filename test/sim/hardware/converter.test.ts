import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Intake } from '../../../lib/intake.ts';
import { Block } from '../../../lib/block.ts';
import { CLIP_CONVERTER } from '../../../sim/hardware/clip.ts';
import { Converter, lsbVolts, wordOf } from '../../../sim/hardware/converter.ts';
import { nominalUnit, type ConverterUnit } from '../../../sim/hardware/draw.ts';
import { RandomStream } from '../../../sim/hardware/random.ts';
import { standProbe } from './stand.ts';

function converterUnit(change: Partial<ConverterUnit> = {}): ConverterUnit {
  return { ...nominalUnit(standProbe()).converter, ...change };
}

function converterOf(change: Partial<ConverterUnit> = {}, supplyRatio = 1): Converter {
  return new Converter(converterUnit(change), supplyRatio, new RandomStream(2, 0, 'c'));
}

const mark = new Uint8Array(1);

describe('ideal quantiser', () => {
  test('every code is centred on its voltage, transitions stand half an LSB beside it', () => {
    fc.assert(fc.property(fc.integer({ min: 1, max: 4094 }), fc.double({ min: -0.4999, max: 0.4999, noNaN: true }),
      (code, beside) => {
        expect(converterOf({ reference_V: 4.096 }).code((code + beside) * 1e-3, mark, 0)).toBe(code);
      }), { examples: [[1, -0.4999], [4094, 0.4999], [2048, 0]] });
  });

  test('codes stop at both ends, and only what is beyond them is marked as clipped', () => {
    const converter = converterOf({ reference_V: 4.096 });
    const outcome = (volts: number) => {
      mark[0] = 0;
      return [converter.code(volts, mark, 0), mark[0]];
    };
    expect(outcome(-0.0004)).toEqual([0, 0]);
    expect(outcome(-0.0006)).toEqual([0, CLIP_CONVERTER]);
    expect(outcome(4.0954)).toEqual([4095, 0]);
    expect(outcome(4.0956)).toEqual([4095, CLIP_CONVERTER]);
    expect(outcome(-1e9)).toEqual([0, CLIP_CONVERTER]);
    expect(outcome(1e9)).toEqual([4095, CLIP_CONVERTER]);
    expect(converter.clips).toBe(4);
  });

  test('a reference from the supply scales with it, a fixed one does not', () => {
    expect(lsbVolts(converterUnit({ reference: 'supply' }), 0.9)).toBe(4.5 / 4096);
    expect(lsbVolts(converterUnit(), 0.9)).toBe(5 / 4096);
    expect(converterOf({ reference: 'supply' }, 0.5).code(1.25, mark, 0)).toBe(2048);
  });

  test.each([
    // W. R. Bennett, Bell Syst. Tech. J. 27 (1948) 446: 20 N log10 2 + 10 log10 1.5 dB
    [8, 49.92571189679381], [10, 61.96691172335306], [12, 74.0081115499123], [16, 98.0905112032308],
  ])('%s bits: signal to noise of a full-scale sine is %s dB, rms error q/sqrt(12)', (bits, expected) => {
    const converter = converterOf({ bits, reference_V: 2 ** bits });
    const points = 2 ** 18;
    const amplitude = 2 ** (bits - 1) - 0.5;
    let errors = 0;
    let squares = 0;
    for (let n = 0; n < points; n++) {
      // 12345 periods, coprime to the points: every phase once
      const ideal = amplitude + amplitude * Math.sin(2 * Math.PI * ((12345 * n) % points) / points + 0.1);
      const error = converter.code(ideal, mark, 0) - ideal;
      errors += error * error;
      squares += (ideal - amplitude) ** 2;
    }
    // the squared error is 1/12 + sum of +-cos(2 pi k x)/(pi k)^2; over a sine the cosines average to J0(2 pi k A),
    // at most 1/(pi sqrt(k A)): together 12 zeta(5/2)/(pi^3 sqrt A) of 1/12. The points: variance 144/180 of a square
    const allowed = 12 * 1.3415 / (Math.PI ** 3 * Math.sqrt(amplitude)) + 5 * Math.sqrt(0.8 / points);
    expect(Math.abs(errors / points / (1 / 12) - 1)).toBeLessThan(allowed);
    // the amplitude is half an LSB short of half the range: 20 log10(1 - 2^-bits)
    const decibel = 10 * Math.log10(squares / errors) - 20 * Math.log10(1 - 2 ** -bits);
    expect(Math.abs(decibel - expected)).toBeLessThan(10 * Math.log10(1 / (1 - allowed)));
  });

  test('noise in codes adds to the quantiser: variance noise^2 + 1/12', () => {
    const converter = converterOf({ noise_codes: 1.5, reference_V: 4.096 });
    const count = 200_000;
    let sum = 0;
    let squares = 0;
    for (let i = 0; i < count; i++) {
      const deviation = converter.code(2.0003, mark, 0) - 2000.3;
      sum += deviation;
      squares += deviation * deviation;
    }
    // at 1.5 codes the quantiser error is uniform and independent to exp(-2 pi^2 1.5^2) = 5e-20 (Widrow)
    const variance = 1.5 ** 2 + 1 / 12;
    expect(Math.abs(sum / count)).toBeLessThan(5 * Math.sqrt(variance / count));
    expect(Math.abs(squares / count / variance - 1)).toBeLessThan(5 * Math.sqrt(2 / count));
  });
});

describe('words', () => {
  test.each([
    // codes 0, mid - 1, mid, mid + 1, highest of 12 bits, written by hand
    ['offset binary', 'right', 16, [0, 0x7ff, 0x800, 0x801, 0xfff]],
    ['offset binary', 'left', 16, [0, 0x7ff0, 0x8000, 0x8010, 0xfff0]],
    ["two's complement", 'right', 16, [-2048, -1, 0, 1, 2047]],
    ["two's complement", 'left', 16, [-32768, -16, 0, 16, 32752]],
    ["two's complement", 'left', 32, [-2147483648, -1048576, 0, 1048576, 2146435072]],
    ['offset binary', 'left', 32, [0, 0x7ff00000, -2147483648, -2146435072, -1048576]],
  ] as const)('%s, %s, %s bits', (format, justified, word_bits, expected) => {
    const unit = converterUnit({ format, justified, word_bits });
    expect([0, 2047, 2048, 2049, 4095].map((code) => wordOf(unit, code))).toEqual([...expected]);
  });

  test('intake of the firmware gets the code back from every format and width', () => {
    const formats = fc.constantFrom<ConverterUnit['format']>('offset binary', "two's complement");
    const places = fc.constantFrom<ConverterUnit['justified']>('right', 'left');
    const shares = fc.double({ min: 0, max: 1, noNaN: true });
    fc.assert(fc.property(fc.integer({ min: 6, max: 24 }), fc.nat(26), formats, places, shares,
      (bits, more, format, justified, share) => {
        const word_bits = Math.max(8, Math.min(32, bits + more));
        const code = Math.floor(share * (2 ** bits - 1));
        const signed = format === "two's complement" ? 1 : 0;
        const block = new Block(1);
        block.value[0] = wordOf(converterUnit({ bits, word_bits, format, justified }), code);
        block.count = 1;
        const justifyShift = justified === 'left' ? word_bits - bits : 0;
        const unit = { sign: 1 } as ConstructorParameters<typeof Intake>[1];
        new Intake({ kind: 'intake', bits, signed, justifyShift, midCode: 0, guardBits: 0 }, unit).process(block);
        expect(block.value[0]).toBe(code - signed * 2 ** (bits - 1));
      }), { examples: [[24, 8, "two's complement", 'left', 1], [24, 8, 'offset binary', 'left', 1]] });
  });
});
