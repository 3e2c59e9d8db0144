/**
 * The verdict on a terminal: one line a requirement, a line of reason under each that falls short, then what the run
 * has shown, what was left to defaults, and the cautions. Colour only where the terminal wants it.
 */
import { styleText } from 'node:util';
import type { Row, Summary, Verdict } from '../judging/prove.ts';
import { CAUTIONS, reachOfVerdict } from './caution.ts';
import { weighedLines } from './weigh.ts';

/** Lines of defaults on a terminal; the JSON has all of them. */
const PRESETS_SHOWN = 12;

export interface Paint {
  good(text: string): string;
  bad(text: string): string;
  faint(text: string): string;
}

export function paintFor(stream: { isTTY?: boolean }): Paint {
  if (!stream.isTTY || process.env['NO_COLOR']) return { good: (t) => t, bad: (t) => t, faint: (t) => t };
  return {
    good: (text) => styleText('green', text), bad: (text) => styleText(['red', 'bold'], text), faint: (text) => styleText('dim', text),
  };
}

export const TABLE_HEAD = `${'verdict'.padEnd(8)}${'share'.padStart(7)}  ${'requirement'.padEnd(38)}  ${'measured'.padStart(12)}  ${'allowed'.padStart(12)}  where`;

export function rowLines(row: Row, paint: Paint): string[] {
  const verdict = row.holds ? paint.good('holds'.padEnd(8)) : paint.bad('SHORT'.padEnd(8));
  const share = (row.share === null ? '' : `${shareText(row.share)} %`).padStart(7);
  const measured = (row.value === null ? 'not measured' : quantity(row.value, row.unit)).padStart(12);
  // an allowance in percent of something that was not measured is no number
  const known = row.value !== null || row.limit !== 0;
  const allowed = (known ? `${row.better === 'more' ? '≥ ' : ''}${quantity(row.limit, row.unit)}` : '').padStart(12);
  const name = row.scenario === '' || WHOLE_RUN.includes(row.measure) ? titleOf(row) : `${titleOf(row)}: ${row.scenario}`;
  const line = `${verdict}${share}  ${name.padEnd(38)}  ${measured}  ${allowed}  ${paint.faint(row.where)}`;
  return row.because === null ? [line] : [line, `${' '.repeat(8)}because ${row.because}`];
}

function shareText(share: number): string {
  const percent = share * 100;
  return percent >= 10 || percent === 0 ? percent.toFixed(0) : percent.toPrecision(2);
}

/** Measures of the run as a whole: their scenario is only the worst one, named in the reason. */
const WHOLE_RUN = ['unexplainedFlags', 'hiddenClipping'];

const TITLES: { [measure: string]: string } = {
  trueRms: 'true RMS', acRms: 'AC RMS', zeroOverTemperature: 'zero over temperature', zeroAfterOverload: 'zero after overload',
  zeroOverTime: 'zero over time', overRangeDelay: 'over-range delay', overRangeRecovery: 'over-range recovery', sinad: 'SINAD',
  effectiveBits: 'effective bits', swallowed: 'direct current that zeroing may swallow', unexplainedFlags: 'flags without a cause',
  hiddenClipping: 'clipping behind a clean status',
};

function titleOf(row: Row): string {
  return TITLES[row.measure] ?? row.measure;
}

export function quantity(value: number, unit: string): string {
  if (unit === 'readings') return `${value}`;
  if (unit === 'A' && value !== 0 && Math.abs(value) < 0.1) return `${(value * 1e3).toPrecision(3)} mA`;
  const space = unit === '°' ? '' : ' ';
  return value === 0 ? `0${space}${unit}` : `${value.toPrecision(4)}${space}${unit}`;
}

export function summaryLines(verdict: Verdict, paint: Paint): string[] {
  const { summary } = verdict;
  const short = verdict.rows.filter((row) => !row.holds).length;
  const overall = short === 0
    ? paint.good(`All ${verdict.rows.length} requirements hold.`)
    : paint.bad(`${short} of ${verdict.rows.length} requirements fall short.`);
  return [
    '', overall, ...leftOutLines(verdict.leftOut), '', ...shownLines(summary), ...weighedLines(summary.weighed), '', ...presetLines(summary, paint), '',
    ...summary.warnings.map((warning) => `Warning: ${warning}`), reachOfVerdict(verdict), ...CAUTIONS,
  ];
}

function leftOutLines(leftOut: number): string[] {
  return leftOut === 0 ? [] : [`${leftOut} more of long scenarios were not asked for: --all.`];
}

function shownLines(summary: Summary): string[] {
  const { noise, settling, zeroRemoved, swallowed } = summary;
  const lines = [
    noise === null ? 'output noise       no steady scenario to take it from'
      : `output noise       ${quantity(noise.amperes, 'A')} RMS, ${noise.counts.toPrecision(3)} counts (scenario "${noise.scenario}")`,
    `delay              ${summary.delayMs.toPrecision(4)} ms`,
    `settling of chain  ${settlingText(settling.onePercentMs)} to 1 %, ${settlingText(settling.oneThousandthMs)} to 0.1 %`,
    `clamped            ${summary.clampedReadings} of ${summary.readings} readings carry an arithmetic clamp`,
    zeroRemoved === null ? 'zero removed       no zero stage'
      : `zero removed       ${quantity(zeroRemoved.lowest, 'A')} to ${quantity(zeroRemoved.highest, 'A')}`,
  ];
  for (const { by, amperes } of swallowed) lines.push(`zero may swallow   ${quantity(amperes, 'A')} direct current by ${by}`);
  lines.push('', 'largest value      behind stage         reached        of       headroom');
  for (const { stage, largest, limit } of summary.reach) {
    const headroom = largest > 0 ? `${Math.log2(limit / largest).toFixed(1)} bits` : '';
    lines.push(`                   ${stage.padEnd(12)}${String(largest).padStart(16)}${String(limit).padStart(12)}${headroom.padStart(12)}`);
  }
  return lines;
}

function settlingText(ms: number | null): string {
  return ms === null ? 'none (no steady current passes)' : `${ms.toPrecision(4)} ms`;
}

function presetLines(summary: Summary, paint: Paint): string[] {
  if (summary.presets.length === 0) return ['Nothing was left to defaults.'];
  const lines = [`Left to defaults: ${summary.presets.length} fields, the weightiest first`];
  for (const { path, value, unit, meaning, amperesForTenPercent } of summary.presets.slice(0, PRESETS_SHOWN)) {
    const weight = amperesForTenPercent ? `; 10 % of it move full range by ${quantity(amperesForTenPercent, 'A')}` : '';
    lines.push(paint.faint(`  ${path} = ${value}${unit ? ` ${unit}` : ''}  (${meaning}${weight})`));
  }
  if (summary.presets.length > PRESETS_SHOWN) lines.push(paint.faint(`  and ${summary.presets.length - PRESETS_SHOWN} more: --json lists all`));
  return lines;
}
