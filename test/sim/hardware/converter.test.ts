import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Intake } from '../../../lib/intake.ts';
import { Block } from '../../../lib/block.ts';
import { CLIP_CONVERTER } from '../../../sim/hardware/clip.ts';
import { Converter, lsbVolts, wordOf } from '../../../sim/hardware/converter.ts';
import type { ConverterUnit } from '../../../sim/hardware/draw.ts';
import { AT_HOME, converterUnit } from './parts.ts';
import { endPointErrors, histogramTransitions, measuredTransitions } from './transitions.ts';

function converterOf(change: Partial<ConverterUnit> = {}, surroundings = AT_HOME, trial = 0): Converter {
  const converter = new Converter(converterUnit(change), { seed: 2, trial });
  converter.surround(surroundings);
  return converter;
}

const mark = new Uint8Array(1);

describe('ideal quantiser', () => {
  test('every code is centred on its voltage, transitions stand half an LSB beside it', () => {
    fc.assert(fc.property(fc.integer({ min: 1, max: 4094 }), fc.double({ min: -0.4999, max: 0.4999, noNaN: true }),
      (code, beside) => {
        expect(converterOf({ reference_V: 4.096 }).code((code + beside) * 1e-3, 0, mark, 0)).toBe(code);
      }), { examples: [[1, -0.4999], [4094, 0.4999], [2048, 0]] });
  });

  test('codes stop at both ends, and only what is beyond them is marked as clipped', () => {
    const converter = converterOf({ reference_V: 4.096 });
    const outcome = (volts: number) => {
      mark[0] = 0;
      return [converter.code(volts, 0, mark, 0), mark[0]];
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
    const half = { ...AT_HOME, supplyRatio: 0.5 };
    expect(converterOf({ reference: 'supply' }, half).code(1.25, 0, mark, 0)).toBe(2048);
    expect(converterOf({}, half).code(1.25, 0, mark, 0)).toBe(1024);
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
      const error = converter.code(ideal, 0, mark, 0) - ideal;
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
      const deviation = converter.code(2.0003, 0, mark, 0) - 2000.3;
      sum += deviation;
      squares += deviation * deviation;
    }
    // at 1.5 codes the quantiser error is uniform and independent to exp(-2 pi^2 1.5^2) = 5e-20 (Widrow)
    const variance = 1.5 ** 2 + 1 / 12;
    expect(Math.abs(sum / count)).toBeLessThan(5 * Math.sqrt(variance / count));
    expect(Math.abs(squares / count / variance - 1)).toBeLessThan(5 * Math.sqrt(2 / count));
  });
});

describe('errors of a real converter', () => {
  test('a fixed reference drifts from 25 °C, one from the supply does not', () => {
    const warm = { ...AT_HOME, converterCelsius: 65 };
    // 40 K * 500 ppm/K = 2 %: 2.5 V are 2048/1.02 = 2007.8 codes
    expect(converterOf({ referenceDrift_ppm_per_K: 500 }, warm).code(2.5, 0, mark, 0)).toBe(2008);
    expect(converterOf({ referenceDrift_ppm_per_K: 500, reference: 'supply' }, warm).code(2.5, 0, mark, 0)).toBe(2048);
  });

  test('offset moves every code, gain error turns the line about 0 V', () => {
    // 1 mV a code
    const off = converterOf({ reference_V: 4.096, offset_codes: -3 });
    const turned = converterOf({ reference_V: 4.096, gainError_percent: 2 });
    for (const code of [10, 1000, 4000]) {
      expect(off.code(code * 1e-3, 0, mark, 0)).toBe(code - 3);
      expect(turned.code(code * 1e-3, 0, mark, 0)).toBe(Math.round(1.02 * code));
    }
  });

  test('jitter turns a slope into noise of slope * jitter, and leaves a steady voltage alone', () => {
    const jittery = converterOf({ reference_V: 4.096, bits: 12, jitter_ns: 50 });
    const count = 200_000;
    let sum = 0;
    let squares = 0;
    for (let i = 0; i < 1000; i++) expect(jittery.code(2.0003, 0, mark, 0)).toBe(2000);
    for (let i = 0; i < count; i++) {
      // 40 mV/us * 50 ns = 2 mV = 2 codes
      const deviation = jittery.code(2.0003, 40e3, mark, 0) - 2000.3;
      sum += deviation;
      squares += deviation * deviation;
    }
    const variance = 4 + 1 / 12;
    expect(Math.abs(sum / count)).toBeLessThan(5 * Math.sqrt(variance / count));
    expect(Math.abs(squares / count / variance - 1)).toBeLessThan(5 * Math.sqrt(2 / count));
  });

  test('jitter of a full-scale sine limits it to -20 log10(2 pi f t) dB (W. Kester, textbook; from memory)', () => {
    const jittery = converterOf({ bits: 20, word_bits: 24, reference_V: 2, jitter_ns: 10 });
    const hertz = 1e5;
    const count = 100_000;
    let squares = 0;
    for (let i = 0; i < count; i++) {
      const angle = (2 * Math.PI * ((12347 * i) % count)) / count;
      const ideal = 1 + 0.999 * Math.sin(angle);
      const got = jittery.code(ideal, 0.999 * 2 * Math.PI * hertz * Math.cos(angle), mark, 0) * 2 ** -19;
      squares += (got - ideal) ** 2;
    }
    const decibel = 10 * Math.log10(0.999 ** 2 / 2 / (squares / count));
    // product of a cosine and a normal: kurtosis 4.5, so 3.5/N; 10/ln 10 times it
    const allowed = 5 * Math.sqrt(3.5 / count) * (10 / Math.LN10);
    expect(Math.abs(decibel + 20 * Math.log10(2 * Math.PI * hertz * 10e-9))).toBeLessThan(allowed);
  });
});

describe('transition levels (IEEE Std 1241)', () => {
  const unit: Partial<ConverterUnit> = { bits: 10, reference_V: 1024 };

  test('the measuring functions give the known answers', () => {
    const { dnl, inl } = endPointErrors([0.5, 1.6, 2.4, 3.5, 4.7, 5.4, 6.5]);
    const close = (got: number[], expected: number[]) => got.forEach((x, k) => expect(x).toBeCloseTo(expected[k], 9));
    close(dnl, [0.1, -0.2, 0.1, 0.2, -0.3, 0.1]);
    close(inl, [0, 0.1, -0.1, 0, 0.2, -0.1, 0]);
    close(histogramTransitions([500, 250, 250, 500], 1, 0), [-0.5, 0, 0.5]);
  });

  test('an ideal converter has none', () => {
    const { dnl, inl } = endPointErrors(measuredTransitions(converterOf(unit), 10));
    // bisection to 2^-32 of the range
    for (const x of [...dnl, ...inl]) expect(Math.abs(x)).toBeLessThan(1e-6);
  });

  test('a bow of 3 codes is 3 codes high in the middle and zero at both ends', () => {
    const transitions = measuredTransitions(converterOf({ ...unit, inl_codes: 3 }), 10);
    const { inl } = endPointErrors(transitions);
    expect(Math.abs(inl[0])).toBeLessThan(1e-6);
    expect(Math.abs(inl[1022])).toBeLessThan(1e-6);
    // a reading that is high has its transitions low
    const lowest = Math.min(...inl);
    // x + bow(x) = k - 1/2 with |bow'| <= 12/1022: the height is met within the rounding of the bisection, and the
    // place of the middle lies between two transitions, where a parabola of height 3 loses 3 (1/511)^2
    expect(Math.abs(lowest + 3)).toBeLessThan(3 / 511 ** 2 * 20);
    expect(Math.abs(inl.indexOf(lowest) - 511)).toBeLessThanOrEqual(4);
  });

  test('code widths have the standard deviation dnl; ends stay; the sum of the widths does not walk away', () => {
    const { dnl, inl } = endPointErrors(measuredTransitions(converterOf({ ...unit, dnl_codes: 0.3 }), 10));
    const power = dnl.reduce((sum, x) => sum + x * x, 0) / dnl.length;
    // widths of neighbours share a transition (correlation -1/2): variance of the mean square below 2.5/N of it
    expect(Math.abs(power / 0.09 - 1)).toBeLessThan(5 * Math.sqrt(2.5 / dnl.length) + 3 / dnl.length);
    for (const x of inl) expect(Math.abs(x)).toBeLessThan(0.3 * Math.sqrt(1.5) + 1e-6);
    expect(Math.abs(inl[0]) + Math.abs(inl[1022])).toBeLessThan(1e-6);
  });

  test('code widths belong to the unit: the same again, others in another trial', () => {
    const bent = { ...unit, dnl_codes: 0.2 };
    const widths = (trial: number) => measuredTransitions(converterOf(bent, AT_HOME, trial), 10);
    const first = widths(1);
    expect(widths(1)).toEqual(first);
    const other = widths(2);
    expect(first.filter((x, k) => Math.abs(x - other[k]) > 1e-4).length).toBeGreaterThan(900);
    // no tie between trials: correlation of 1021 independent deviations
    const correlation = first.reduce((sum, x, k) => sum + (x - k - 0.5) * (other[k] - k - 0.5), 0) / 1021 / (0.04 / 2);
    expect(Math.abs(correlation)).toBeLessThan(5 / Math.sqrt(1021));
  });

  test('a higher voltage never gives a lower code, at the largest dnl', () => {
    const converter = converterOf({ ...unit, dnl_codes: 0.5 });
    let before = 0;
    for (let volts = 0; volts < 1023; volts += 0.03) {
      const code = converter.code(volts, 0, mark, 0);
      expect(code).toBeGreaterThanOrEqual(before);
      before = code;
    }
  });

  test('the histogram of a sine finds the same transitions as the search', () => {
    const bent = { bits: 6, reference_V: 64, dnl_codes: 0.25, inl_codes: 0.8 };
    const amplitude = 33;
    const counts = new Array<number>(64).fill(0);
    const converter = converterOf(bent);
    const samples = 2_000_000;
    for (let n = 0; n < samples; n++) {
      // every phase once, and none twice
      counts[converter.code(31.5 - amplitude * Math.cos((2 * Math.PI * (n + 0.5)) / samples), 0, mark, 0)]++;
    }
    const found = histogramTransitions(counts, amplitude, 31.5);
    const searched = measuredTransitions(converterOf(bent), 6);
    // each count is off by at most 2, which is a phase of 2 pi 2/samples, times the amplitude
    found.forEach((level, k) => expect(Math.abs(level - searched[k])).toBeLessThan(4 * Math.PI * amplitude / samples));
  });

  test('24 bits need no table', () => {
    const fine = converterOf({ bits: 24, word_bits: 32, reference_V: 2 ** 24, dnl_codes: 0.3 });
    // within one code of the ideal one
    for (const volts of [5.5, 1e6 + 0.4, 2 ** 23, 2 ** 24 - 7.6]) {
      expect(Math.abs(fine.code(volts, 0, mark, 0) - volts)).toBeLessThan(0.5 + 0.3 * Math.sqrt(1.5));
    }
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
