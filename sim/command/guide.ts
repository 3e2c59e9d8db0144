/**
 * npm run guide: writes what is made by running the project into its guides: the table of fields (sim/probe/FIELDS.md)
 * and the marked regions of README.md. With --verify nothing is written; exit 1 names what is out of date.
 */
import { readFileSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { codeTable } from '../judging/codetable.ts';
import { prove } from '../judging/prove.ts';
import { fieldTable } from '../probe/table.ts';
import { CAUTIONS } from '../report/caution.ts';
import { statusWords } from '../report/status.ts';
import { paintFor, rowLines, TABLE_HEAD } from '../report/terminal.ts';
import { starterText } from '../demo/starter.ts';
import { demoProbe } from './demo.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));
const verify = process.argv.includes('--verify');
const outdated: string[] = [];

const REGIONS: { [name: string]: () => string } = {
  'demo verdict': demoVerdict, 'codes of the demo probe': codes, 'starter probe file': starter, cautions,
};

put('sim/probe/FIELDS.md', `# Fields of a probe file\n\nMade from sim/probe/fields.ts by \`npm run guide\`.\n\n${fieldTable().trim()}\n`);
put('README.md', withRegions(readFileSync(`${root}/README.md`, 'utf8')));
for (const path of outdated) console.error(`${path} is out of date; npm run guide writes it`);
process.exitCode = outdated.length > 0 ? 1 : 0;

function put(path: string, text: string): void {
  const before = readFileOrNothing(`${root}/${path}`);
  if (before === text) return;
  if (verify) outdated.push(path);
  else writeFileSync(`${root}/${path}`, text);
}

function readFileOrNothing(path: string): string {
  try {
    return readFileSync(path, 'utf8');
  } catch {
    return '';
  }
}

function withRegions(text: string): string {
  let result = text;
  for (const [name, make] of Object.entries(REGIONS)) {
    const region = new RegExp(`(<!-- made: ${name} -->\n)[^]*?(<!-- end -->)`);
    if (!region.test(result)) throw new Error(`README.md: no region "<!-- made: ${name} -->"`);
    result = result.replace(region, (_, open: string, close: string) => `${open}${make()}\n${close}`);
  }
  return result;
}

function demoVerdict(): string {
  const { probe, folder } = demoProbe();
  const lines: string[] = [TABLE_HEAD];
  const shown = new Set<string>();
  for (const row of prove(probe, { seed: 1, trial: 1, folder })) {
    if (!shown.has(row.measure)) lines.push(...rowLines(row, paintFor({})));
    shown.add(row.measure);
  }
  return fenced('', lines.join('\n'));
}

function codes(): string {
  const { probe } = demoProbe();
  const rows = codeTable(probe).map(({ code, amperes, status }) =>
    `| ${code} | ${amperes.toFixed(6)} A | ${statusWords(status) || 'good'} |`);
  return ['| code | reading | status |', '| ---: | ---: | --- |', ...rows].join('\n');
}

function starter(): string {
  return fenced('js', starterText().trimEnd());
}

function cautions(): string {
  return CAUTIONS.map((line) => `> ${line}`).join('\n');
}

function fenced(language: string, text: string): string {
  return `\`\`\`${language}\n${text}\n\`\`\``;
}
