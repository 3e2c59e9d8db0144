import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { Block, Chain, checkConstants, CLAMPED, type SectionsConstants } from '../../../lib/index.ts';
import { nominalTransfer } from '../../../sim/hardware/transfer.ts';
import { ProbeError } from '../../../sim/probe/problem.ts';
import { calibrate } from '../../../sim/tuning/calibrate.ts';
import { residueOf } from '../../../sim/tuning/residue.ts';
import { tune, type Tuned } from '../../../sim/tuning/tune.ts';
import { memoryOf, realOf } from '../../../sim/tuning/sections.ts';
import { demoData, probeOf, quietProbe, QUIET_CODE_AMPERES, type Given } from '../probes.ts';

function tuned(chain: Given[], change: Given = {}): Tuned {
  return tune(probeOf(quietProbe({ chain, ...change })));
}

function refusal(chain: Given[], change: Given = {}): ProbeError {
  try {
    tuned(chain, change);
  } catch (error) {
    if (error instanceof ProbeError) return error;
    throw error;
  }
  throw new Error('it was not refused');
}

function sectionsOf(result: Tuned): SectionsConstants {
  return result.constants.design.find((stage): stage is SectionsConstants => stage.kind === 'sections')!;
}

const INTAKE = { stage: 'intake', guardBits: 4 };

describe('tuning', () => {
  test('every chain it gives is accepted by checkConstants and can be made', () => {
    const result = tune(probeOf(demoData()));
    expect(checkConstants(result.constants).problems).toEqual([]);
    expect(new Chain(result.constants).stages.length).toBe(demoData().chain.length);
  });

  test('the product of all integer gains is within 1 ppm of readings per ampere, over units, ranges and guard bits', () => {
    fc.assert(fc.property(
      fc.constantFrom('µA', 'mA', 'auto'), fc.integer({ min: 0, max: 12 }), fc.double({ min: 1, max: 200, noNaN: true }),
      (unit, guardBits, sensitivity) => {
        const probe = probeOf(quietProbe({
          range_A: 5, chain: [{ stage: 'intake', guardBits }, { stage: 'gainTrim' }, { stage: 'scale', unit }],
          sensor: { sensitivity_mV_per_mT: sensitivity, rest_V: 2.5, bandwidth_kHz: 20 }, converter: { bits: 12, rate_kHz: 40, reference_V: 5 },
        }));
        const { constants, readingsPerAmpere } = tune(probe);
        const scale = constants.design[2];
        if (scale.kind !== 'scale') throw new Error('no scale');
        const gain = 2 ** guardBits * (constants.unit.gainQ24 / 2 ** 24) * (constants.unit.gainsQ24[0] / 2 ** 24) * (scale.gain / 2 ** scale.shift);
        const asked = readingsPerAmpere / Math.abs(nominalTransfer(probe).codesPerAmpere);
        expect(Math.abs(gain / asked - 1)).toBeLessThan(1e-6);
      },
    ), { numRuns: 200 });
  });

  test('auto reads in µA while twice the full scale of the converter fits 32 bits, in mA beyond', () => {
    expect(tuned([INTAKE, { stage: 'scale' }]).readingsPerAmpere).toBe(1e6);
    const wide = { gap_mm: 100, path_mm: 80, permeability: 2200 };
    // 2.5 V / (2 * 50 mV/mT * 4 pi 1e-4 mT/A / (100 mm + 80/2200)) = 1990 A full scale
    expect(tuned([INTAKE, { stage: 'scale' }], { core: wide, range_A: 1000 }).readingsPerAmpere).toBe(1000);
  });

  test.each(['low-pass', 'notch'])('the integers of a %s have a DC gain of exactly one', (filter) => {
    fc.assert(fc.property(fc.double({ min: 20, max: 18000, noNaN: true }), fc.integer({ min: 1, max: 8 }), (corner_Hz, order) => {
      for (const s of sectionsOf(tuned([INTAKE, { stage: 'sections', filter, corner_Hz, errorFeedback: 2, ...(filter === 'notch' ? { width_Hz: 50 } : { order }) }, { stage: 'scale' }])).sections) {
        expect(s.b0 + s.b1 + s.b2).toBe(2 ** s.fractionBits + s.a1 + s.a2);
      }
    }), { numRuns: 200 });
  });

  test('the integers of a high-pass have a DC gain of exactly zero', () => {
    fc.assert(fc.property(fc.double({ min: 20, max: 18000, noNaN: true }), fc.integer({ min: 1, max: 8 }), (corner_Hz, order) => {
      for (const s of sectionsOf(tuned([INTAKE, { stage: 'sections', filter: 'high-pass', corner_Hz, order, errorFeedback: 2 }, { stage: 'scale' }])).sections) {
        expect(s.b0 + s.b1 + s.b2).toBe(0);
      }
    }), { numRuns: 200 });
  });

  test('a section takes the most fraction bits that fit: one more breaks the law of width or a coefficient', () => {
    const result = tuned([INTAKE, { stage: 'sections', corner_Hz: 400, order: 2 }, { stage: 'scale' }]);
    const [section] = sectionsOf(result).sections;
    expect(section.fractionBits).toBe(30);
    const noisy = tuned([{ stage: 'intake', guardBits: 12 }, { stage: 'sections', corner_Hz: 400, order: 2 }, { stage: 'scale', unit: 'mA' }]);
    const [wide] = sectionsOf(noisy).sections;
    expect(wide.fractionBits).toBeLessThan(30);
    const more = structuredClone(noisy.constants);
    const target = more.design[1] as SectionsConstants;
    Object.assign(target.sections[0], {
      fractionBits: wide.fractionBits + 1, b0: wide.b0 * 2, b1: wide.b1 * 2, b2: wide.b2 * 2, a1: wide.a1 * 2, a2: wide.a2 * 2,
    });
    expect(checkConstants(more).problems.map((problem) => problem.field)).toContain('section 1 sum');
  });

  test('over-range stays as long as a full-range sample can move the output by half a code', () => {
    const result = tuned([INTAKE, { stage: 'sections', corner_Hz: 400, order: 2 }, { stage: 'scale' }]);
    const sections = sectionsOf(result);
    // by the integers: full range for one sample, then rest; the last output beyond half a code (8 counts of 16)
    const chain = new Chain({ design: [result.constants.design[0], sections], unit: result.constants.unit });
    const block = new Block(4096);
    block.count = 4096;
    block.value.fill(32768);
    block.value[100] = 65535;
    chain.process(block);
    let last = 0;
    for (let i = 0; i < block.count; i++) if (Math.abs(block.value[i]) >= 8) last = i;
    expect(sections.memorySamples).toBeGreaterThanOrEqual(last - 100);
    // the stated bound sums magnitudes of the tail; it is not more than twice the time of the single sample
    expect(sections.memorySamples).toBeLessThan(2 * (last - 100));
    expect(memoryOf(sections.sections.map(realOf), 32768 * 16, 1e9)).toBe(0);
  });

  test('the stated delay is that of a slow ramp through the integer chain', () => {
    const result = tuned([
      { stage: 'intake', guardBits: 6 }, { stage: 'despike' }, { stage: 'decimate', order: 3, ratio: 5 },
      { stage: 'sections', corner_Hz: 300, order: 3 }, { stage: 'average', length_ms: 2 }, { stage: 'scale' },
    ]);
    const chain = new Chain(result.constants);
    const block = new Block(30000);
    block.count = 30000;
    for (let i = 0; i < block.count; i++) block.value[i] = 20000 + i;
    chain.process(block);
    const ratio = result.ratios.at(-1)!;
    const last = block.count - 1;
    const input = (last + 1) * ratio - 1;
    const code = result.constants.design[0].kind === 'intake' ? result.constants.design[0].midCode : NaN;
    const delayed = (20000 + input - result.delaySamples - code) / nominalTransfer(probeOf(quietProbe({}))).codesPerAmpere;
    // rounding of each stage: at most half a count of 1/64 code and the dither of two sections
    const code64 = 1 / nominalTransfer(probeOf(quietProbe({}))).codesPerAmpere / 64;
    expect(Math.abs(block.value[last] / result.readingsPerAmpere - delayed)).toBeLessThan(8 * code64);
  });

  test('a start-up zero of a negative-gain amplifier and a turned direction still reads positive current as positive', () => {
    for (const gain of [2, -2]) {
      for (const direction of [1, -1]) {
        const probe = probeOf(quietProbe({ direction, amplifier: { gain, virtualGround_V: 2.5, bandwidth_kHz: 2000 } }));
        const { constants } = tune(probe);
        expect(constants.unit.sign).toBe(Math.sign(gain) * direction);
      }
    }
  });

  test('factory calibration takes the tolerance of gain and rest out, to what its noise and quantisation allow', () => {
    const probe = probeOf(demoData());
    for (const trial of [1, 2, 3]) {
      const measured = calibrate(probe, { seed: 1, trial, folder: '.' });
      const nominal = calibrate(probe, { seed: 1, trial: 0, folder: '.' });
      const unit = tune(probe, measured).constants.unit;
      expect(measured.codesPerAmpere).not.toBe(nominal.codesPerAmpere);
      // readings of +-25 A to a code of 0.02 A with 0.6 codes of noise over 8192 samples: well within 0.1 %
      const residual = (unit.gainQ24 / 2 ** 24) * (measured.codesPerAmpere / nominalTransfer(probe).codesPerAmpere);
      const drift = 1 + 350e-6 * (23 - 25);
      expect(Math.abs(residual * (1 / drift) - 1)).toBeLessThan(1e-3);
    }
  });
});

/** The chain of the quiet probe with a stage more, fed one steady code; in amperes. */
function steadyReading(stage: Given, amperes: number): { amperes: number; status: number } {
  const probe = probeOf(quietProbe({ chain: [INTAKE, stage, { stage: 'scale' }] }));
  const result = tune(probe);
  const block = new Block(1);
  block.count = 1;
  block.value[0] = Math.round(32768 + amperes * nominalTransfer(probe).codesPerAmpere);
  new Chain(result.constants).process(block);
  return { amperes: block.value[0] / result.readingsPerAmpere, status: block.status[0] };
}

describe('error feedback', () => {
  const at = (corner_Hz: number, errorFeedback: number | undefined) => sectionsOf(tuned(
    [{ stage: 'intake', guardBits: 4 }, { stage: 'sections', corner_Hz, order: 2, ...(errorFeedback === undefined ? {} : { errorFeedback }) }, { stage: 'scale' }],
  ));

  test('without it a constant of 5 counts dies in the dead band of a corner at a hundredth of the rate; with order 2 it comes out', () => {
    expect(residueOf(at(400, 0)).meanError).toBeGreaterThanOrEqual(1);
    expect(residueOf(at(400, 2)).meanError).toBeLessThan(0.01);
  });

  test('left out, the order is one without a dead band, and no other such order leaves less dither', () => {
    for (const corner of [4, 40, 400, 4000, 12000, 17000]) {
      const chosen = residueOf(at(corner, undefined));
      expect(chosen.meanError).toBeLessThan(0.5);
      for (const order of [0, 1, 2]) {
        const other = residueOf(at(corner, order));
        if (other.meanError < 0.5) expect(other.dither).toBeGreaterThanOrEqual(chosen.dither);
      }
    }
  });

  test('at corners up to a tenth of the rate one count of dither is the most', () => {
    for (const corner of [4, 40, 400, 4000]) expect(residueOf(at(corner, undefined)).dither).toBeLessThanOrEqual(1);
  });
});

describe('a table for linearise', () => {
  const table = [{ reads_A: -11, is_A: -11.5 }, { reads_A: 3, is_A: 3 }, { reads_A: 11, is_A: 11.5 }];
  const code = QUIET_CODE_AMPERES;

  test('is met at each of its points within a code', () => {
    for (const { reads_A, is_A } of table) {
      // half a code where the grid misses the point, and one where the code next to the point is fed, at slopes near 1
      expect(Math.abs(steadyReading({ stage: 'linearise', table }, reads_A).amperes - is_A)).toBeLessThan(1.2 * code);
    }
  });

  test('held, it gives the end value beyond its end, clamped and flagged; with the slope it goes on', () => {
    const held = steadyReading({ stage: 'linearise', table, beyond: 'hold' }, 15);
    // the grid ends less than half of its cells of 22 A / 256 at the most beyond the table
    expect(Math.abs(held.amperes - 11.5)).toBeLessThan(0.5 * (22 / 128) * (8.5 / 8) + code);
    expect(held.status & CLAMPED).toBe(CLAMPED);
    const on = steadyReading({ stage: 'linearise', table, beyond: 'slope' }, 15);
    expect(Math.abs(on.amperes - (11.5 + (4 * 8.5) / 8))).toBeLessThan(3 * code);
    expect(on.status & CLAMPED).toBe(0);
  });

  test('that no grid can follow is refused with what it misses', () => {
    const kinked = [{ reads_A: -11, is_A: -11 }, { reads_A: 0.001, is_A: -9 }, { reads_A: 0.02, is_A: 9 }, { reads_A: 11, is_A: 11 }];
    const error = refusal([INTAKE, { stage: 'linearise', table: kinked }, { stage: 'scale' }]);
    expect(error.problems[0]).toMatchObject({ path: 'chain[1].table' });
    expect(error.problems[0].found).toContain('misses a point of the table by');
  });
});

describe('tables over temperature', () => {
  const thermometer = { element: 'linear', slope_mV_per_K: 10, at25_V: 0.75, bits: 16 };

  test('keep their own points as knots, and only their changes from the calibration temperature count', () => {
    const result = tuned([
      INTAKE, { stage: 'thermometer' },
      { stage: 'offsetTrim', table: [{ at_C: -7, offset_A: 0.4 }, { at_C: 25, offset_A: 0.5 }, { at_C: 61, offset_A: 0.8 }] },
      { stage: 'zero', span_A: 1, window_A: 1 }, { stage: 'gainTrim', table: [{ at_C: 0, gain: 1.1 }, { at_C: 50, gain: 1.2 }] }, { stage: 'scale' },
    ], { thermometer });
    const { unit } = result.constants;
    expect(unit.offsetTemperatures).toEqual([-7 * 256, 25 * 256, 61 * 256]);
    [-0.1, 0, 0.3].forEach((amperes, i) => expect(Math.abs(unit.offsets[i] - amperes * result.countsPerAmpere)).toBeLessThanOrEqual(0.5));
    expect(unit.gainTemperatures).toEqual([0, 50 * 256]);
    // at 25 degrees the unit's gain makes up for the table's 1.15: together 1
    const together = (unit.gainQ24 / 2 ** 24) * ((unit.gainsQ24[0] + unit.gainsQ24[1]) / 2 / 2 ** 24);
    expect(Math.abs(together - (1.15 * (1 / 1.1 + 1 / 1.2)) / 2)).toBeLessThan(1e-6);
  });

  test('of one point are refused: it would do nothing', () => {
    const error = refusal([INTAKE, { stage: 'thermometer' }, { stage: 'gainTrim', table: [{ at_C: 25, gain: 1.1 }] }, { stage: 'scale' }], { thermometer });
    expect(error.problems[0]).toMatchObject({ path: 'chain[2].table', found: '1 point' });
  });
});

describe('a calibration', () => {
  test('that clips is refused', () => {
    const probe = probeOf(quietProbe({ calibration: { at_C: 25, span_A: 60, samples: 64 } }));
    expect(() => calibrate(probe, { seed: 1, trial: 0, folder: '.' })).toThrow(/clipping at 60 A/);
  });

  test('sees noise of its own at each point: the gain scatters as the noise says', () => {
    const probe = probeOf(quietProbe({ converter: { bits: 16, rate_kHz: 40, reference_V: 5, noise_codes: 200 }, calibration: { at_C: 25, span_A: 10, samples: 16 } }));
    const nominal = nominalTransfer(probe).codesPerAmpere;
    const errors = Array.from({ length: 200 }, (_, seed) => calibrate(probe, { seed, trial: 1, folder: '.' }).codesPerAmpere - nominal);
    const deviation = Math.sqrt(errors.reduce((sum, error) => sum + error * error, 0) / errors.length);
    // two means of 16 codes: 200 / sqrt(16) * sqrt(2) over 20 A; 200 estimates: 1 / sqrt(400) = 5 %, four of them
    expect(Math.abs(deviation / ((200 / 4) * Math.SQRT2 / 20) - 1)).toBeLessThan(0.2);
  });
});

describe('tuning refuses', () => {
  test('a corner at or above half the rate where the filter stands', () => {
    const error = refusal([INTAKE, { stage: 'decimate', ratio: 8 }, { stage: 'sections', corner_Hz: 2500 }, { stage: 'scale' }]);
    expect(error.problems).toMatchObject([{ path: 'chain[2].corner_Hz', found: '2500 Hz' }]);
    expect(error.message).toContain('below 2500 Hz');
  });

  test('a corner that the asked fraction bits cannot hold within 1 %, and says what the integers make of it', () => {
    const error = refusal([INTAKE, { stage: 'sections', corner_Hz: 20, fractionBits: 10 }, { stage: 'scale' }]);
    expect(error.problems[0].path).toBe('chain[1].corner_Hz');
    expect(error.problems[0].hint).toContain('decimate first');
  });

  test('a growth beyond 32 bits, with the advice of two decimators', () => {
    const error = refusal([INTAKE, { stage: 'decimate', order: 4, ratio: 100 }, { stage: 'scale' }]);
    expect(error.problems[0].path).toBe('chain[1]');
    expect(error.message).toContain('two decimators in a row');
  });

  test('an absolute offset table behind a zero', () => {
    const error = refusal([INTAKE, { stage: 'zero', span_A: 1, window_A: 1 }, { stage: 'offsetTrim' }, { stage: 'scale' }]);
    expect(error.message).toContain('the zero has already removed this offset');
  });

  test('stages that do not join', () => {
    expect(refusal([INTAKE, { stage: 'despike' }, { stage: 'overRange' }, { stage: 'scale' }]).message).toContain('directly behind intake');
    expect(refusal([{ stage: 'despike' }, INTAKE]).message).toContain('put intake first');
    expect(refusal([INTAKE, { stage: 'scale' }, { stage: 'linearise', table: [{ reads_A: -1, is_A: -1 }, { reads_A: 1, is_A: 1 }] }]).message)
      .toContain('ahead of scale');
  });

  test('a zero shorter than a sample, a limit that never trips, a range that does not fit the unit: all at once', () => {
    const error = refusal([
      INTAKE, { stage: 'overRange', limit_A: 500 }, { stage: 'zero', mean_ms: 0.001, span_A: 1, window_A: 1 }, { stage: 'scale', unit: 'µA' },
    ], { range_A: 3000 });
    expect(error.problems.map((problem) => problem.path)).toEqual(['chain[1].limit_A', 'chain[2].mean_ms', 'chain[3].unit']);
  });

  test('hardware whose rest lies outside the converter', () => {
    const error = refusal([INTAKE, { stage: 'scale' }], { converter: { bits: 12, rate_kHz: 40, reference_V: 2 } });
    expect(error.problems[0].path).toBe('chain[0].midCode');
  });
});
