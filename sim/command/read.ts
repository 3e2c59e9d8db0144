/** hallproof read: A/D codes recorded from a board, through the chain of a probe file. */
import {
  EVENT_CLEAR, EVENT_DEGAUSSED, EVENT_QUARTER, EVENT_REVERSED, EVENT_ZERO,
} from '../../lib/index.ts';
import { RecordedPlayer, type RecordedReading, type RecordedVerdict } from '../judging/recorded.ts';
import { loadProbe } from '../probe/load.ts';
import { CsvError, CsvReader } from '../recorded/csv.ts';
import { AMPERES_POWER, nameAndUnit, plainUnit, scaled } from '../recorded/units.ts';
import { CAUTIONS } from '../report/caution.ts';
import { statusWords } from '../report/status.ts';
import { quantity } from '../report/terminal.ts';
import { tune } from '../tuning/tune.ts';
import { readArguments } from './arguments.ts';
import type { Probe } from '../probe/fields.ts';
import { FALLS_SHORT, HOLDS, UsageError } from './fault.ts';
import { NewFile } from './newfile.ts';
import { quoted } from './readingscsv.ts';

export const READ_HELP = `hallproof read PROBE CODES.csv [--to FILE] [--json]
  Puts A/D codes recorded from a board through the probe's chain, with the constants of nominal parts. Columns, by
  heading: code (or the only column), temperature (code), zero, clear, degaussed, reversed, quarter (0 or 1 each), and
  reference_A (or mA, µA): the true current, against which the readings are then judged by the first "reading"
  requirement, or the first "mean" where there is none.
  --to FILE   readings as CSV: sample, time, reading, status in words (otherwise on standard output)
  --json      the result as JSON on standard output (with --to)
  Exit status: 0 read (and within the accuracy), 1 the accuracy falls short, 2 bad input.`;

type Converter = Probe['converter'];

const OPTIONS = {
  to: { type: 'string' }, json: { type: 'boolean', default: false }, help: { type: 'boolean', short: 'h', default: false },
} as const;

const EVENTS: [string, number][] = [
  ['zero', EVENT_ZERO], ['clear', EVENT_CLEAR], ['degaussed', EVENT_DEGAUSSED], ['reversed', EVENT_REVERSED], ['quarter', EVENT_QUARTER],
];

export async function readCommand(given: string[]): Promise<number> {
  const { values, positionals } = readArguments('read', given, OPTIONS, { min: 2, max: 2 });
  if (values.help) {
    console.log(READ_HELP);
    return HOLDS;
  }
  const { probe, file } = await loadProbe(positionals[0]);
  const tuned = tune(probe, undefined, file);
  const reader = new CsvReader(positionals[1]);
  const columns = columnsOf(reader, probe.thermometer !== null);
  const judgedBy = probe.requirements.find(({ measure }) => measure === 'reading' || measure === 'mean');
  if (columns.reference >= 0 && judgedBy === undefined) {
    throw new UsageError(`read: ${positionals[1]} has a reference, and ${positionals[0]} no requirement "reading" or "mean" to judge by`);
  }
  const target = values.to === undefined ? null : new NewFile(values.to, '--to');
  const write = target === null ? (text: string): void => void process.stdout.write(text) : (text: string): void => target.write(text);
  try {
    const rateHz = probe.converter.rate_kHz * 1e3;
    if (target !== null || !values.json) write('sample,time_s,reading_A,status\n');
    const player = new RecordedPlayer(probe, tuned, ({ sample, amperes, status }: RecordedReading) => {
      if (target !== null || !values.json) write(`${sample},${(sample / rateHz).toFixed(9)},${amperes},${quoted(statusWords(status))}\n`);
    });
    feed(reader, columns, player, probe.converter);
    target?.finish();
    const judged = columns.reference < 0 || player.verdict.worst !== null;
    tell(player.verdict, values.json, rateHz, judged);
    return judged && player.verdict.holds ? HOLDS : FALLS_SHORT;
  } catch (error) {
    target?.abandon();
    throw error;
  } finally {
    reader.close();
  }
}

interface Columns {
  code: number;
  temperature: number;
  events: [number, number][];
  reference: number;
  /** Amperes = cell * 10^power. */
  referencePower: number;
}

function columnsOf(reader: CsvReader, wantsTemperature: boolean): Columns {
  const column = (name: string): number => reader.headings.findIndex((heading) => bare(heading) === name);
  const code = column('code') >= 0 ? column('code') : reader.columns === 1 ? 0 : -1;
  const there = reader.headings.map((heading) => `"${heading}"`).join(', ');
  if (code < 0) throw new CsvError(`no column "code"; there are ${there}`, reader.file);
  const temperature = column('temperature');
  if (wantsTemperature && temperature < 0) {
    throw new CsvError('no column "temperature": this probe has a thermometer, so its codes must come with the record', reader.file);
  }
  const events = EVENTS.map(([name, bit]): [number, number] => [column(name), bit]).filter(([index]) => index >= 0);
  const reference = column('reference');
  const columns = { code, temperature, events, reference, referencePower: powerOf(reader, reference) };
  const used = new Set([code, temperature, reference, ...events.map(([index]) => index)]);
  const unused = reader.headings.filter((heading, index) => !used.has(index) && heading !== '');
  for (let index = 0; index < reader.columns; index++) if (!used.has(index)) reader.demand(index, 'anything');
  if (unused.length > 0) {
    const known = ['code', 'temperature', ...EVENTS.map(([name]) => name), 'reference_A'];
    process.stderr.write(`not used: ${unused.map((heading) => `"${heading}"`).join(', ')} (columns are ${known.join(', ')})\n`);
  }
  return columns;
}

/** Power of ten of the unit in the heading of the reference: reference_mA, reference (A); amperes without one. */
function powerOf(reader: CsvReader, column: number): number {
  if (column < 0) return 0;
  const unit = reader.units[column] ?? /_(\w+)$/.exec(reader.headings[column])?.[1] ?? 'A';
  const known = Object.entries(AMPERES_POWER).find(([name]) => name.toLowerCase() === plainUnit(unit).toLowerCase());
  if (known !== undefined) return known[1];
  throw new CsvError(`unit "${unit}", allowed ${Object.keys(AMPERES_POWER).join(', ')}`, reader.file, null, reader.columnName(column));
}

function feed(reader: CsvReader, columns: Columns, player: RecordedPlayer, converter: Converter): void {
  const { code, temperature, events, reference, referencePower } = columns;
  const full = 2 ** (converter.justified === 'left' ? converter.word_bits : converter.bits);
  // a logger may write the words of two's complement unsigned as well
  const lowest = converter.format === 'offset binary' ? 0 : -full / 2;
  const row = new Float64Array(reader.columns);
  while (reader.next(row)) {
    demandWhole(reader, row[code], code, lowest, full - 1);
    if (temperature >= 0) demandWhole(reader, row[temperature], temperature, 0, 2 ** 24);
    let bits = 0;
    for (const [index, bit] of events) {
      demandWhole(reader, row[index], index, 0, 1);
      if (row[index] === 1) bits |= bit;
    }
    player.push({
      code: row[code], temperatureCode: temperature < 0 ? 0 : row[temperature], events: bits,
      reference: reference < 0 ? NaN : scaled(row[reference], referencePower),
    });
  }
  player.flush();
}

/** A heading without its unit: "reference_A", "Reference (mA)" and "reference [A]" are one. */
function bare(heading: string): string {
  return nameAndUnit(heading).name.toLowerCase().trim().replace(/_(a|ma|µa|ua|ka)$/, '');
}

function demandWhole(reader: CsvReader, value: number, column: number, lowest: number, highest: number): void {
  if (Number.isInteger(value) && value >= lowest && value <= highest) return;
  throw new CsvError(`found ${value}, allowed a whole number from ${lowest} to ${highest}`, reader.file, reader.line,
    reader.columnName(column));
}

function tell(verdict: RecordedVerdict, json: boolean, rateHz: number, judged: boolean): void {
  if (json) {
    console.log(JSON.stringify({ ...verdict, holds: judged && verdict.holds, cautions: CAUTIONS }, null, 2));
    return;
  }
  // the readings may stand on standard output; what is said about them goes beside it
  const say = (line: string): void => void process.stderr.write(`${line}\n`);
  say(`${verdict.samples} samples, ${verdict.readings} readings, ${verdict.unusable} of them flagged as unusable`);
  const { worst } = verdict;
  if (!judged) say('SHORT: not judged, because no reading is left that is not flagged');
  if (worst !== null) {
    say(`${verdict.holds ? 'holds' : 'SHORT'}: worst error ${quantity(worst.error, 'A')} of ±${quantity(worst.limit, 'A')} allowed ` +
      `(${(worst.share * 100).toPrecision(3)} %), at ${(worst.sample / rateHz).toPrecision(6)} s, reference ${quantity(worst.reference, 'A')}`);
  }
  for (const line of CAUTIONS) say(line);
}
