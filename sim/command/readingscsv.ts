/** Every reading beside the true current, as CSV, for whoever wants to plot it. */
import { statusWords } from '../report/status.ts';
import type { Observer } from '../judging/play.ts';
import type { NewFile } from './newfile.ts';

export function readingsCsv(file: NewFile): (scenario: string) => Observer {
  file.write('scenario,time_s,true_A,reading_A,status\n');
  return (scenario) => ({
    passes: 1,
    readings(block) {
      for (let i = 0; i < block.count; i++) {
        file.write(`${quoted(scenario)},${block.seconds[i].toFixed(9)},${block.truth[i]},${block.amperes[i]},${quoted(statusWords(block.status[i]))}\n`);
      }
    },
    record() {},
  });
}

export function quoted(cell: string): string {
  return /[",\n\r]/.test(cell) ? `"${cell.replaceAll('"', '""')}"` : cell;
}
