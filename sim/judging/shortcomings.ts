/**
 * What a shunt or a current transformer cannot do, in sentences: of any scenario by closed forms of its parts (those of
 * one unit), of one scenario from what was played. Nothing is said where there is nothing to say.
 *   droop exp(-t R/L);  corner R/(2 pi L);  seen from the conductor R/N^2
 *   white noise behind one pole: density * sqrt(pi/2 * corner)
 */
import type { ShuntUnit, TransformerUnit } from '../hardware/draw.ts';
import { shuntOhms, steadyHeating, type Shunt } from '../hardware/shunt.ts';
import { droopSeconds, loopOhms, saturationHz } from '../hardware/transformer.ts';
import type { Probe, Scenario } from '../probe/fields.ts';
import type { ErrorTally } from './errortally.ts';

/** Below these nothing is worth a sentence. */
const SHARE_WORTH_TELLING = 1e-4;
const DIRECT_SHARE_OF_RANGE = 1e-3;
/** Of a direct current: less than this is nothing, more than that is all. */
const AS_GOOD_AS_NOTHING = 0.05;
const AS_GOOD_AS_ALL = 0.95;

export function shuntAnywhere(shunt: ShuntUnit, probe: Probe): string[] {
  const range = probe.range_A;
  const ohms = shuntOhms(shunt, 25);
  const atRange = told(range, 'A');
  const sentences = [taken(range, ohms)];
  const heating = steadyHeating(shunt, range);
  const shift = heating * shunt.tempco_ppm_per_K * 1e-6;
  if (heating === Infinity) sentences.push(`runs away: a steady ${atRange} heats it without end`);
  else if (Math.abs(shift) >= SHARE_WORTH_TELLING) {
    sentences.push(`self-heating by ${told(heating, 'K')} moves its gain by ${percent(shift)} at a steady ${atRange}`);
  }
  const perAmpere = Math.abs(shunt.gain) * ohms;
  const least = Math.min(shunt.rest_V - shunt.railLow_V, shunt.railHigh_V - shunt.rest_V) / perAmpere;
  if (least < range) sentences.push(`is at a rail from ${told(least, 'A')} on, short of the range of ${atRange}`);
  const code = (shunt.railHigh_V - shunt.railLow_V) / 2 ** probe.converter.bits / perAmpere;
  const noiseVolts = shunt.noise_nV_per_rtHz * 1e-9 * Math.sqrt((Math.PI / 2) * shunt.bandwidth_kHz * 1e3);
  const noise = noiseVolts / ohms;
  sentences.push(`cannot tell less than ${told(code, 'A')}, one code` +
    (noise > 0 ? `; its noise is ${told(noise, 'A')} RMS` : ''));
  const offset = (shunt.offset_mV * 1e-3) / ohms;
  if (Math.abs(offset) >= code) sentences.push(`its offset reads as ${told(offset, 'A')} without current`);
  return sentences;
}

function taken(amperes: number, ohms: number): string {
  return `takes ${told(amperes * ohms, 'V')} and ${told(amperes * amperes * ohms, 'W')} from the circuit at ` +
    told(amperes, 'A');
}

export function shuntSentences(shunt: Shunt, tally: ErrorTally): string[] {
  const sentences: string[] = [];
  const { mostVolts, mostWatts, mostHeating, mostGainShift } = shunt;
  if (mostWatts > 0) {
    sentences.push(`takes up to ${told(mostVolts, 'V')} and ${told(mostWatts, 'W')} from the circuit`);
  }
  if (Math.abs(mostGainShift) >= SHARE_WORTH_TELLING) {
    sentences.push(`self-heating by ${told(mostHeating, 'K')} moves its gain by ${percent(mostGainShift)}`);
  }
  if (tally.clipped > 0) {
    sentences.push(`is at a rail in ${percent(tally.clipped / tally.judged)} of the judged samples`);
  }
  return sentences;
}

export function transformerAnywhere(transformer: TransformerUnit, { range_A: range }: Probe): string[] {
  const ohms = loopOhms(transformer) / transformer.turns ** 2;
  const tau = droopSeconds(transformer);
  const sentences = [
    taken(range, ohms),
    `shows half the power at ${told(1 / (2 * Math.PI * tau), 'Hz')}, less below, and nothing at 0 Hz: ` +
      `a step droops with a time constant of ${told(tau, 's')}`,
  ];
  const direct = saturatingDirect(transformer);
  if (direct < range) sentences.push(`saturates by a direct current of ${told(direct, 'A')}`);
  const lowest = saturationHz(transformer, range);
  if (lowest > 0) sentences.push(`saturates below ${told(lowest, 'Hz')} by a sine of ${told(range, 'A')} peak`);
  return sentences;
}

function saturatingDirect({ saturation_V_ms, magnetising_mH, turns }: TransformerUnit): number {
  return saturation_V_ms === null ? Infinity : (turns * saturation_V_ms) / magnetising_mH;
}

export function transformerSentences(
  transformer: TransformerUnit, saturatedSeconds: number | null, tally: ErrorTally, scenario: Scenario, range: number,
): string[] {
  const sentences = [...directSentence(tally, scenario, range), ...droopSentence(tally)];
  if (saturatedSeconds !== null) {
    const when = saturatedSeconds === 0 ? 'from the start' : `for the first time at ${told(saturatedSeconds, 's')}`;
    const share = tally.clipped === 0 ? '' : `, in ${percent(tally.clipped / tally.judged)} of the judged samples`;
    sentences.push(`saturates at ${told(transformer.saturation_V_ms! * 1e-3, 'V·s')}, ${when}${share}`);
  }
  return sentences;
}

function directSentence(tally: ErrorTally, { current }: Scenario, range: number): string[] {
  const { judged, truthSum, readingSum } = tally;
  if (judged === 0) return [];
  const truth = truthSum / judged;
  const reading = readingSum / judged;
  const share = reading / truth;
  if (Math.abs(truth) < DIRECT_SHARE_OF_RANGE * range || share >= AS_GOOD_AS_ALL) return [];
  const what = current.shape === 'dc' ? `the ${told(truth, 'A')} direct current`
    : `the mean current of ${told(truth, 'A')}`;
  if (Math.abs(share) < AS_GOOD_AS_NOTHING) return [`shows nothing of ${what}: it reads ${told(reading, 'A')}`];
  return share > 0 ? [`shows only ${percent(share)} of ${what}: it reads ${told(reading, 'A')}`]
    : [`shows ${what} with the wrong sign: it reads ${told(reading, 'A')}`];
}

function droopSentence(tally: ErrorTally): string[] {
  const { change, beforeChange, afterChange } = tally;
  if (change === null || beforeChange === null || afterChange === null) return [];
  const droop = 1 - (afterChange - beforeChange) / change.amperes;
  if (droop < SHARE_WORTH_TELLING) return [];
  const time = told(change.toSeconds - change.fromSeconds, 's');
  return [change.what === 'step' ? `droops by ${percent(droop)} in the ${time} after the step`
    : `droops by ${percent(droop)} within the pulse of ${time}`];
}

const PREFIXES = ['n', 'µ', 'm', '', 'k', 'M', 'G'];
const NO_PREFIX = 3;

/** Three digits, with the prefix that fits; less than half a billionth is 0. */
export function told(value: number, unit: string): string {
  const size = Math.abs(value);
  if (!(size >= 5e-10)) return `0 ${unit}`;
  // rounded first, so that 999.96 becomes 1 k
  const rounded = Number(size.toPrecision(3));
  const steps = Math.floor(Math.floor(Math.log10(rounded) + 1e-12) / 3);
  const prefix = unit === 'K' ? 0 : Math.max(-NO_PREFIX, Math.min(PREFIXES.length - 1 - NO_PREFIX, steps));
  return `${Number((value / 1000 ** prefix).toPrecision(3))} ${PREFIXES[prefix + NO_PREFIX]}${unit}`;
}

function percent(share: number): string {
  return `${Number((share * 100).toPrecision(3))} %`;
}
