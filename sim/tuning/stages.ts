/**
 * One stage of the probe file to its constants: seconds to samples, amperes to counts. Only nominal values of the
 * hardware enter here, never those of a drawn unit.
 */
import type {
  DecimateConstants, DemodulateConstants, IntakeConstants, LineariseConstants, MeterConstants, OverRangeConstants,
  ScaleConstants, StageConstants, ThermometerConstants, ZeroConstants,
} from '../../lib/index.ts';
import { celsiusOfCode, thermometerCodeUnrounded } from '../hardware/thermometer.ts';
import { nominalUnit } from '../hardware/draw.ts';
import type { Probe, StageSpec, StageSpecOf } from '../probe/fields.ts';
import { complain, countsOf, countsWithin, samplesOf, type Place } from './place.ts';
import { tuneSections } from './sections.ts';

const NO_LIMIT = 2147483647;
const NO_SLEW_LIMIT = 4294967295;
/** Records a meter holds for whoever reads them. */
const METER_RECORDS = 64;
const LARGEST_READING = 2147483647;

/** Lowest and highest code of the converter, in the numbers of its format. */
export function codeSpan(probe: Probe): { lowest: number; highest: number } {
  const { bits, format } = probe.converter;
  return format === 'offset binary'
    ? { lowest: 0, highest: 2 ** bits - 1 }
    : { lowest: -(2 ** (bits - 1)), highest: 2 ** (bits - 1) - 1 };
}

/** null: the problem has been noted and the stage cannot be made. */
export function tuneStage(spec: StageSpec, place: Place, midCode: number): StageConstants | null {
  switch (spec.stage) {
    case 'intake': return tuneIntake(spec, place.probe, midCode);
    case 'overRange': return tuneOverRange(spec, place, midCode);
    case 'despike': return { kind: 'despike', window: spec.window_samples, primed: primed(spec) };
    case 'demodulate': return tuneDemodulate(spec);
    case 'decimate': return tuneDecimate(spec);
    case 'thermometer': return tuneThermometer(spec, place);
    case 'offsetTrim': return { kind: 'offsetTrim', limit: place.roof };
    case 'zero': return tuneZero(spec, place);
    case 'gainTrim': return { kind: 'gainTrim', limit: place.roof };
    case 'linearise': return tuneLinearise(spec, place);
    case 'sections': return tuneSections(spec, place);
    case 'average': return { kind: 'average', length: samplesOf(place, spec.length_ms / 1e3, 'length_ms', 1), primed: primed(spec) };
    case 'scale': return tuneScale(spec, place);
    case 'meter': return tuneMeter(spec, place);
    case 'custom':
      return { kind: 'custom', name: spec.name, version: spec.version, words: [...spec.words], limit: place.roof };
  }
}

function primed(spec: { start: 'primed' | 'zero' }): number {
  return spec.start === 'primed' ? 1 : 0;
}

function tuneIntake(spec: StageSpecOf<'intake'>, probe: Probe, midCode: number): IntakeConstants {
  const { bits, format, justified, word_bits } = probe.converter;
  return {
    kind: 'intake', bits, signed: format === 'offset binary' ? 0 : 1,
    justifyShift: justified === 'left' ? word_bits - bits : 0, midCode, guardBits: spec.guardBits,
  };
}

function tuneOverRange(spec: StageSpecOf<'overRange'>, place: Place, midCode: number): OverRangeConstants {
  const span = codeSpan(place.probe);
  const highCode = spec.highCode ?? span.highest;
  const lowCode = spec.lowCode ?? span.lowest;
  for (const [field, code] of [['highCode', highCode], ['lowCode', lowCode]] as const) {
    if (code < span.lowest || code > span.highest) {
      complain(place, field, `${code}`, `${span.lowest} to ${span.highest} codes`, 'a code that the converter can give');
    }
  }
  const limit = spec.limit_A === null ? NO_LIMIT : countsOf(place, spec.limit_A);
  if (spec.limit_A !== null && limit > place.limit) {
    complain(place, 'limit_A', `${spec.limit_A} A`,
      `at most ${(place.limit / place.countsPerAmpere).toPrecision(4)} A, where the converter ends`,
      'such a limit never trips; the rail does');
  }
  const slew = spec.slew_A_per_ms === null ? NO_SLEW_LIMIT : countsOf(place, (spec.slew_A_per_ms * 1e3) / place.rateHz);
  return {
    kind: 'overRange', highLimit: (highCode - midCode) * place.countsPerCode, lowLimit: (lowCode - midCode) * place.countsPerCode,
    consecutive: spec.consecutive, magnitudeLimit: limit, slewLimit: slew,
    holdSamples: samplesOf(place, spec.hold_ms / 1e3, 'hold_ms'), stuckAfter: spec.stuckAfter_samples,
  };
}

function tuneDemodulate(spec: StageSpecOf<'demodulate'>): DemodulateConstants {
  return {
    kind: 'demodulate', quarter: spec.bias === 'quarter turn' ? 1 : 0, blank: spec.blank_samples, longest: spec.longestPhase_samples,
  };
}

function tuneDecimate(spec: StageSpecOf<'decimate'>): DecimateConstants {
  return { kind: 'decimate', order: spec.order, ratio: spec.ratio, primed: primed(spec) };
}

function tuneThermometer(spec: StageSpecOf<'thermometer'>, place: Place): ThermometerConstants | null {
  const hardware = place.probe.thermometer;
  if (hardware === null) return null; // told when the file was validated
  const values = nominalUnit(place.probe).thermometer!;
  const ends = [thermometerCodeUnrounded(values, spec.lowest_C), thermometerCodeUnrounded(values, spec.highest_C)];
  const lowCode = Math.max(0, Math.ceil(Math.min(...ends)));
  const highCode = Math.min(2 ** hardware.bits - 1, Math.floor(Math.max(...ends)));
  if (highCode - lowCode < 32) {
    complain(place, 'lowest_C', `codes ${lowCode} to ${highCode}`, 'at least 32 codes between lowest_C and highest_C',
      'a converter with more bits, or another series resistor');
    return null;
  }
  const codes: number[] = [];
  for (let knot = 0; knot <= 32; knot++) codes.push(Math.round(lowCode + ((highCode - lowCode) * knot) / 32));
  const timeConstantSamples = Math.max(1, spec.timeConstant_s * place.rateHz);
  return {
    kind: 'thermometer', codes, temperatures: codes.map((code) => Math.round(celsiusOfCode(values, code) * 256)),
    lowCode, highCode, shift: Math.round(Math.log2(timeConstantSamples)),
    holdSamples: samplesOf(place, spec.hold_s, 'hold_s'), fallback: Math.round(spec.fallback_C * 256),
  };
}

function tuneZero(spec: StageSpecOf<'zero'>, place: Place): ZeroConstants {
  const countsPerSecond = spec.trackRate_A_per_s * place.countsPerAmpere;
  const step = countsPerSecond > 0 ? Math.round(place.rateHz / countsPerSecond) : NO_LIMIT;
  if (spec.tracking && step < 1) {
    complain(place, 'trackRate_A_per_s', `${spec.trackRate_A_per_s} A/s`,
      `at most ${(place.rateHz / place.countsPerAmpere).toPrecision(4)} A/s, one count a sample`, '');
  }
  return {
    kind: 'zero', startMode: spec.atStart ? 1 : 0, settleSamples: samplesOf(place, spec.settle_ms / 1e3, 'settle_ms'),
    meanSamples: samplesOf(place, spec.mean_ms / 1e3, 'mean_ms', 1), spanLimit: Math.max(1, countsOf(place, spec.span_A)),
    windowLimit: countsWithin(place, spec.window_A), buttonMode: spec.onButton ? 1 : 0, trackMode: spec.tracking ? 1 : 0,
    trackWindow: countsWithin(place, spec.trackWindow_A), holdSamples: samplesOf(place, spec.trackHold_s, 'trackHold_s'),
    stepSamples: Math.min(NO_LIMIT, Math.max(1, step)), authority: countsWithin(place, spec.trackAuthority_A),
    suspectMode: spec.suspectAfterOverload ? 1 : 0, limit: place.roof,
  };
}

const MOST_SEGMENTS_LOG2 = 8;

/**
 * The table as given, read at the knots of a grid of powers of two that covers it; the smallest grid that misses no point
 * of the table by more than half a code, or a refusal that says by how much the finest one does.
 */
function tuneLinearise(spec: StageSpecOf<'linearise'>, place: Place): LineariseConstants | null {
  const reads = spec.table.map((point) => point.reads_A * place.countsPerAmpere);
  const truths = spec.table.map((point) => point.is_A * place.countsPerAmpere);
  const sizes = spec.segments_log2 === null ? Array.from({ length: MOST_SEGMENTS_LOG2 }, (_, i) => i + 1) : [spec.segments_log2];
  const allowed = place.countsPerCode / 2;
  let missed = Infinity;
  for (const segmentsLog2 of sizes) {
    const grid = gridOf(reads, truths, segmentsLog2);
    missed = Math.max(...reads.map((x, i) => Math.abs(onGrid(grid, x) - truths[i])));
    if (missed <= allowed) return { kind: 'linearise', ...grid, beyond: spec.beyond === 'slope' ? 1 : 0, limit: place.roof };
  }
  const amperes = (counts: number): string => `${(counts / place.countsPerAmpere).toPrecision(3)} A`;
  complain(place, spec.segments_log2 === null ? 'table' : 'segments_log2',
    `a grid of 2^${sizes.at(-1)} segments that misses a point of the table by ${amperes(missed)}`, `at most half a code, ${amperes(allowed)}`,
    spec.segments_log2 === null ? 'a table whose slope changes less from point to point, or a shorter one' : 'leave it out, and it is chosen');
  return null;
}

interface Grid {
  origin: number;
  gridBits: number;
  knots: number[];
}

/** Cells of a power of two, as many as cover the table: the grid ends less than half a cell beyond it on either side. */
function gridOf(reads: readonly number[], truths: readonly number[], segmentsLog2: number): Grid {
  const span = reads[reads.length - 1] - reads[0];
  const gridBits = Math.max(0, Math.ceil(Math.log2(span / 2 ** segmentsLog2)));
  const cells = Math.max(1, Math.ceil(span / 2 ** gridBits));
  const origin = Math.round((reads[0] + reads[reads.length - 1] - cells * 2 ** gridBits) / 2);
  const knots: number[] = [];
  for (let knot = 0; knot <= cells; knot++) knots.push(Math.round(lineThrough(reads, truths, origin + knot * 2 ** gridBits)));
  return { origin, gridBits, knots };
}

/** What the stage makes of an input within its grid, without rounding. */
function onGrid({ origin, gridBits, knots }: Grid, x: number): number {
  const position = (x - origin) / 2 ** gridBits;
  const segment = Math.min(knots.length - 2, Math.max(0, Math.floor(position)));
  return knots[segment] + (knots[segment + 1] - knots[segment]) * (position - segment);
}

function lineThrough(xs: readonly number[], ys: readonly number[], x: number): number {
  let i = 0;
  while (i < xs.length - 2 && x > xs[i + 1]) i++;
  return ys[i] + ((ys[i + 1] - ys[i]) * (x - xs[i])) / (xs[i + 1] - xs[i]);
}

function tuneScale(spec: StageSpecOf<'scale'>, place: Place): ScaleConstants {
  const fullScaleAmperes = place.limit / place.countsPerAmpere;
  const micro = spec.unit === 'µA' || (spec.unit === 'auto' && 2 * fullScaleAmperes * 1e6 <= LARGEST_READING);
  const readingsPerAmpere = micro ? 1_000_000 : 1000;
  const range = place.probe.range_A * readingsPerAmpere;
  if (range > LARGEST_READING) {
    complain(place, 'unit', spec.unit, `a unit in which ${place.probe.range_A} A fits 32 bits`, 'read in mA');
  }
  const wanted = readingsPerAmpere / place.countsPerAmpere;
  let shift = 52;
  const fits = (bits: number): boolean => {
    const gain = Math.round(wanted * 2 ** bits);
    return gain < 2 ** 31 && gain * place.limit + 2 ** bits < 2 ** 53;
  };
  while (shift > 0 && !fits(shift)) shift--;
  const gain = Math.round(wanted * 2 ** shift);
  if (!(Math.abs(gain / 2 ** shift / wanted - 1) <= 1e-6)) {
    complain(place, 'unit', `a gain of ${wanted.toPrecision(6)} that integers hold only within ` +
      `${(Math.abs(gain / 2 ** shift / wanted - 1) * 1e6).toPrecision(3)} ppm`, 'within 1 ppm', 'use fewer guard bits or another unit');
  }
  return { kind: 'scale', gain: Math.max(1, gain), shift, readingsPerAmpere, limit: LARGEST_READING };
}

function tuneMeter(spec: StageSpecOf<'meter'>, place: Place): MeterConstants {
  return {
    kind: 'meter', windowSamples: samplesOf(place, spec.window_ms / 1e3, 'window_ms', 1), cycles: spec.cycles,
    hysteresis: Math.max(1, countsOf(place, spec.hysteresis_A)), capacity: METER_RECORDS,
  };
}
