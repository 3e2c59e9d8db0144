/** hallproof read: A/D codes recorded from a board, through the chain of a probe file. */
import {
  EVENT_CLEAR, EVENT_DEGAUSSED, EVENT_QUARTER, EVENT_REVERSED, EVENT_ZERO,
} from '../../lib/index.ts';
import { RecordedPlayer, type RecordedReading, type RecordedVerdict } from '../judging/recorded.ts';
import { loadProbe } from '../probe/load.ts';
import { CsvError, CsvReader } from '../recorded/csv.ts';
import { CAUTIONS } from '../report/caution.ts';
import { statusWords } from '../report/status.ts';
import { quantity } from '../report/terminal.ts';
import { tune } from '../tuning/tune.ts';
import { readArguments } from './arguments.ts';
import { FALLS_SHORT, HOLDS } from './fault.ts';
import { NewFile } from './newfile.ts';
import { quoted } from './readingscsv.ts';

export const READ_HELP = `hallproof read PROBE CODES.csv [--to FILE] [--json]
  Puts A/D codes recorded from a board through the probe's chain, with the constants of nominal parts. Columns, by
  heading: code (or the only column), temperature (code), zero, clear, degaussed, reversed, quarter (0 or 1 each), and
  reference_A: the true current, against which the readings are then judged by the first "reading" requirement.
  --to FILE   readings as CSV: sample, time, reading, status in words (otherwise on standard output)
  --json      the result as JSON on standard output (with --to)
  Exit status: 0 read (and within the accuracy), 1 the accuracy falls short, 2 bad input.`;

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
  const target = values.to === undefined ? null : new NewFile(values.to, '--to');
  const write = target === null ? (text: string): void => void process.stdout.write(text) : (text: string): void => target.write(text);
  try {
    const rateHz = probe.converter.rate_kHz * 1e3;
    if (target !== null || !values.json) write('sample,time_s,reading_A,status\n');
    const player = new RecordedPlayer(probe, tuned, ({ sample, amperes, status }: RecordedReading) => {
      if (target !== null || !values.json) write(`${sample},${(sample / rateHz).toFixed(9)},${amperes},${quoted(statusWords(status))}\n`);
    });
    feed(reader, player, probe.thermometer !== null, probe.converter);
    target?.finish();
    tell(player.verdict, values.json, rateHz);
    return player.verdict.holds ? HOLDS : FALLS_SHORT;
  } catch (error) {
    target?.abandon();
    throw error;
  } finally {
    reader.close();
  }
}

function feed(
  reader: CsvReader, player: RecordedPlayer, wantsTemperature: boolean, converter: { bits: number; word_bits: number; justified: string },
): void {
  const column = (name: string): number => reader.headings.findIndex((heading) => bare(heading) === name);
  const code = column('code') >= 0 ? column('code') : reader.columns === 1 ? 0 : -1;
  if (code < 0) {
    throw new CsvError(`no column "code"; there are ${reader.headings.map((heading) => `"${heading}"`).join(', ')}`, reader.file);
  }
  const temperature = column('temperature');
  if (wantsTemperature && temperature < 0) {
    throw new CsvError('no column "temperature": this probe has a thermometer, so its codes must come with the record', reader.file);
  }
  const events = EVENTS.map(([name, bit]): [number, number] => [column(name), bit]).filter(([index]) => index >= 0);
  const reference = column('reference');
  const used = new Set([code, temperature, reference, ...events.map(([index]) => index)]);
  for (let index = 0; index < reader.columns; index++) if (!used.has(index)) reader.demand(index, 'anything');
  const widest = 2 ** (converter.justified === 'left' ? converter.word_bits : converter.bits);
  const row = new Float64Array(reader.columns);
  while (reader.next(row)) {
    demandWhole(reader, row[code], code, -widest / 2, widest - 1);
    if (temperature >= 0) demandWhole(reader, row[temperature], temperature, 0, 2 ** 24);
    let bits = 0;
    for (const [index, bit] of events) {
      demandWhole(reader, row[index], index, 0, 1);
      if (row[index] === 1) bits |= bit;
    }
    player.push({
      code: row[code], temperatureCode: temperature < 0 ? 0 : row[temperature], events: bits,
      reference: reference < 0 ? NaN : row[reference],
    });
  }
  player.flush();
}

/** A heading without its unit: "reference_A", "Reference (A)" and "reference [A]" are one. */
function bare(heading: string): string {
  return heading.toLowerCase().replace(/[\s_]*[([].*$/, '').replace(/_(a|ma)$/, '').trim();
}

function demandWhole(reader: CsvReader, value: number, column: number, lowest: number, highest: number): void {
  if (Number.isInteger(value) && value >= lowest && value <= highest) return;
  throw new CsvError(`found ${value}, allowed a whole number from ${lowest} to ${highest}`, reader.file, reader.line,
    reader.columnName(column));
}

function tell(verdict: RecordedVerdict, json: boolean, rateHz: number): void {
  if (json) {
    console.log(JSON.stringify({ ...verdict, cautions: CAUTIONS }, null, 2));
    return;
  }
  // the readings may stand on standard output; what is said about them goes beside it
  const say = (line: string): void => void process.stderr.write(`${line}\n`);
  say(`${verdict.samples} samples, ${verdict.readings} readings, ${verdict.unusable} of them flagged as unusable`);
  const { worst } = verdict;
  if (worst !== null) {
    say(`${verdict.holds ? 'holds' : 'SHORT'}: worst error ${quantity(worst.error, 'A')} of ±${quantity(worst.limit, 'A')} allowed ` +
      `(${(worst.share * 100).toPrecision(3)} %), at ${(worst.sample / rateHz).toPrecision(6)} s, reference ${quantity(worst.reference, 'A')}`);
  }
  for (const line of CAUTIONS) say(line);
}
