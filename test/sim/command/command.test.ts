import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { CAUTIONS } from '../../../sim/report/caution.ts';
import { checkConstants } from '../../../lib/index.ts';
import { tune } from '../../../sim/tuning/tune.ts';
import { probeOf, quietProbe, QUIET_CODE_AMPERES } from '../probes.ts';
import { emptyFolder, hallproof } from './program.ts';

const OWN_STAGE = `
class Halve {
  kind = 'custom'; fields = []; kept = []; state = new Float64Array(0); ring = new Int32Array(0);
  constructor(words) { this.shift = words[0]; }
  reset() {}
  process(block) { for (let i = 0; i < block.count; i++) block.value[i] = Math.floor(block.value[i] / 2 ** this.shift); }
  describe() { return 'halve'; }
}
export default ${JSON.stringify(quietProbe({
    chain: [{ stage: 'intake', guardBits: 4 }, { stage: 'custom', name: 'halve', version: 2, words: [1], make: 0 }, { stage: 'scale' }],
  })).replace('"make":0', '"make":(words) => new Halve(words)')};
`;

let folder = '';
let remove = (): void => {};

beforeAll(() => {
  ({ folder, remove } = emptyFolder());
  writeFileSync(join(folder, 'quiet.json'), JSON.stringify(quietProbe({})));
  writeFileSync(join(folder, 'short.json'), JSON.stringify(quietProbe({
    amplifier: { gain: 2, virtualGround_V: 2.4, bandwidth_kHz: 2000 }, chain: [{ stage: 'intake', midCode: 32000 }, { stage: 'scale' }],
    requirements: [{ measure: 'reading', scenario: 'steady', amperes: 0.1 }],
  })));
  writeFileSync(join(folder, 'wrong.json'), JSON.stringify(quietProbe({ range_A: -3, color: 'red' })));
});
afterAll(() => remove());

describe('prove', () => {
  test('exit 0 when all hold, with the cautions', () => {
    const { status, out } = hallproof(folder, 'prove', 'quiet.json');
    expect(status).toBe(0);
    expect(out).toMatch(/^holds .* reading: steady/m);
    for (const line of CAUTIONS) expect(out).toContain(line);
  });

  test('exit 1 when something falls short, with one line that starts with "because" under it', () => {
    const { status, out } = hallproof(folder, 'prove', 'short.json');
    expect(status).toBe(1);
    expect(out).toMatch(/^SHORT .*\n {8}because the reading is off by a steady/m);
  });

  test('exit 2 on a wrong file: every wrong field, on standard error, nothing on standard output', () => {
    const { status, out, err } = hallproof(folder, 'prove', 'wrong.json');
    expect(status).toBe(2);
    expect(out).toBe('');
    expect(err).toContain('range_A');
    expect(err).toContain('color');
  });

  test.each([
    [['prove', 'absent.json'], /absent\.json/],
    [['prove', '--only', 'nothing', 'quiet.json'], /no such scenario; there are "steady"/],
    [['prove', '--seed', 'x', 'quiet.json'], /--seed/],
    [['prove', '--trial', '-1', 'quiet.json'], /trial/],
    [['prove', '--frobnicate'], /frobnicate/],
    [['prove', 'a.json', 'b.json'], /expected 0 to 1 file names, got 2/],
    [['improve'], /no command "improve"; there are prove, read, new, constants, fields/],
    [['new', 'starter.txt'], /must end in \.mjs/],
    [['fields', 'nonsense'], /no table/],
  ])('exit 2 with a message that helps: %j', (given, message) => {
    const { status, err } = hallproof(folder, ...given);
    expect(status).toBe(2);
    expect(err).toMatch(message);
    expect(err).not.toContain('    at ');
  });

  test('--json is the whole verdict, with stable ids and the cautions', () => {
    const { status, out } = hallproof(folder, 'prove', 'quiet.json', '--json');
    expect(status).toBe(0);
    const verdict = JSON.parse(out);
    expect(verdict.rows.map((row: { id: string }) => row.id)).toEqual(['reading@steady', 'hiddenClipping', 'unexplainedFlags']);
    expect(verdict).toMatchObject({ holds: true, seed: 1, trial: 1, cautions: CAUTIONS });
  });

  test('--quiet prints only what falls short', () => {
    expect(hallproof(folder, 'prove', 'quiet.json', '--quiet').out).toBe('');
    expect(hallproof(folder, 'prove', 'short.json', '--quiet').out.trim().split('\n').length).toBe(2);
  });

  test('--csv writes every reading beside the truth, and never replaces a file', () => {
    expect(hallproof(folder, 'prove', 'quiet.json', '--csv', 'readings.csv').status).toBe(0);
    const lines = readFileSync(join(folder, 'readings.csv'), 'utf8').trim().split('\n');
    expect(lines[0]).toBe('scenario,time_s,true_A,reading_A,status');
    expect(lines.length).toBe(1 + 400);
    expect(Number(lines[200].split(',')[2])).toBe(10);
    const again = hallproof(folder, 'prove', 'quiet.json', '--csv', 'readings.csv');
    expect(again).toMatchObject({ status: 2 });
    expect(again.err).toContain('nothing was written');
    expect(readdirSync(folder).filter((name) => name.endsWith('.partial'))).toEqual([]);
  });

  test('--help of each command and of all', () => {
    for (const command of ['prove', 'read', 'new', 'constants', 'fields']) {
      const { status, out } = hallproof(folder, command, '--help');
      expect(status).toBe(0);
      expect(out).toContain(`hallproof ${command}`);
    }
    expect(hallproof(folder, '--help').out).toContain('hallproof read PROBE CODES.csv');
    expect(hallproof(folder).status).toBe(2);
  });
});

describe('constants', () => {
  test('prints one line a stage, and as JSON the very table that a chain is made from', () => {
    const { out, status } = hallproof(folder, 'constants', 'quiet.json');
    expect(status).toBe(0);
    expect(out).toContain('intake: 16 bits offset binary, mid code 32768, 4 guard bits');
    const table = JSON.parse(hallproof(folder, 'constants', 'quiet.json', '--json').out);
    expect(checkConstants(table).problems).toEqual([]);
    expect(table).toEqual(tune(probeOf(quietProbe({}))).constants);
  });

  test('a stage of one\'s own, given as code in the probe file, works and is recorded with its name and version', () => {
    writeFileSync(join(folder, 'own.mjs'), OWN_STAGE);
    const { out, err, status } = hallproof(folder, 'constants', 'own.mjs', '--json');
    expect(err).toBe('');
    expect(status).toBe(0);
    expect(JSON.parse(out).design[1]).toMatchObject({ kind: 'custom', name: 'halve', version: 2, words: [1] });
    // 10 A, halved
    const verdict = JSON.parse(hallproof(folder, 'prove', 'own.mjs', '--json').out);
    expect(verdict.rows[0].value).toBeCloseTo(-5, 3);
  });
});

describe('code in a probe file', () => {
  test.each([
    ['throws.mjs', '() => { throw new TypeError("no such word"); }', /chain\[1\]\.make: found an error: no such word/],
    ['empty.mjs', '() => ({})', /chain\[1\]\.make: found something that is no stage/],
  ])('that fails is told with its place, exit 2: %s', (name, make, message) => {
    writeFileSync(join(folder, name), OWN_STAGE.replace('(words) => new Halve(words)', make));
    const { status, err } = hallproof(folder, 'prove', name);
    expect(status).toBe(2);
    expect(err).toMatch(message);
    expect(err).not.toContain('    at ');
  });
});

describe('a recorded current', () => {
  test('with a bad line is refused before the first row', () => {
    writeFileSync(join(folder, 'bad.csv'), `time_s,current_A\n${Array.from({ length: 30 }, (_, i) => `${i * 0.001},${i === 20 ? 'x' : 1}`).join('\n')}\n`);
    writeFileSync(join(folder, 'recorded.json'), JSON.stringify(quietProbe({
      scenarios: [
        { name: 'steady', current: { shape: 'dc', level_A: 10 }, duration_ms: 10 },
        { name: 'file', current: { shape: 'file', path: 'bad.csv' }, duration_ms: 25 },
      ],
      requirements: [{ measure: 'reading', scenario: 'steady', amperes: 1 }, { measure: 'reading', scenario: 'file', amperes: 1 }],
    })));
    const { status, out, err } = hallproof(folder, 'prove', 'recorded.json');
    expect(status).toBe(2);
    expect(out).toBe('');
    expect(err).toMatch(/bad\.csv, line 22/);
  });
});

describe('new', () => {
  test('writes a starter that holds, and never replaces a file', () => {
    expect(hallproof(folder, 'new', 'mine.mjs').status).toBe(0);
    const text = readFileSync(join(folder, 'mine.mjs'), 'utf8');
    expect(text.split('\n').length).toBeLessThan(35);
    expect(hallproof(folder, 'prove', 'mine.mjs').status).toBe(0);
    expect(hallproof(folder, 'new', 'mine.mjs').status).toBe(2);
    expect(readFileSync(join(folder, 'mine.mjs'), 'utf8')).toBe(text);
  });
});

describe('read', () => {
  // mid code of the quiet probe: 2.5 V of 5 V in 16 bits
  const MID = 32768;

  function codes(name: string, lines: string[]): string {
    writeFileSync(join(folder, name), `${lines.join('\n')}\n`);
    return name;
  }

  test('puts codes through the chain: code to current by the formula of the README', () => {
    codes('codes.csv', ['code', ...[0, 100, -1].map((offset) => `${MID + offset}`)]);
    const { status, out } = hallproof(folder, 'read', 'quiet.json', 'codes.csv');
    expect(status).toBe(0);
    const readings = out.trim().split('\n').slice(1).map((line) => Number(line.split(',')[2]));
    // 1 uA is the last place of a reading
    [0, 100, -1].forEach((offset, i) => expect(Math.abs(readings[i] - offset * QUIET_CODE_AMPERES)).toBeLessThan(1e-6));
  });

  test('says the status in words and judges against a reference', () => {
    codes('referenced.csv', ['code;reference_A', `${MID};0,0`, `${MID + 1000};${String((1000 * QUIET_CODE_AMPERES).toFixed(6)).replace('.', ',')}`]);
    const good = hallproof(folder, 'read', 'quiet.json', 'referenced.csv', '--to', 'good.csv');
    expect(good.status).toBe(0);
    expect(good.err).toMatch(/^holds: worst error/m);
    codes('off.csv', ['code,reference_A', `${MID},3`]);
    const off = hallproof(folder, 'read', 'quiet.json', 'off.csv', '--json', '--to', 'off-readings.csv');
    expect(off.status).toBe(1);
    expect(JSON.parse(off.out)).toMatchObject({ holds: false, samples: 1, worst: { error: -3, limit: 1, share: 3 } });
  });

  test.each([
    ['fraction.csv', ['code', '1', '1.5'], /line 3.*column "code".*found 1\.5/],
    ['large.csv', ['code', '65536'], /line 2.*found 65536, allowed a whole number from 0 to 65535/],
    ['text.csv', ['code', '1', 'n\/a'], /line 3.*"n\/a" is not a number/],
    ['nocode.csv', ['volts,amperes', '1,2'], /no column "code"; there are "volts", "amperes"/],
  ])('exit 2 with the line that is wrong, and nothing written: %s', (name, lines, message) => {
    codes(name, lines);
    const { status, err } = hallproof(folder, 'read', 'quiet.json', name, '--to', `${name}.out`);
    expect(status).toBe(2);
    expect(err).toMatch(message);
    expect(existsSync(join(folder, `${name}.out`))).toBe(false);
  });

  test('a reference in mA is one in amperes divided by a thousand; other units are refused', () => {
    codes('milli.csv', ['code,reference (mA)', `${MID + 1000},${(1e6 * QUIET_CODE_AMPERES).toFixed(3)}`]);
    expect(hallproof(folder, 'read', 'quiet.json', 'milli.csv').err).toMatch(/^holds: worst error/m);
    codes('volts.csv', ['code,reference (V)', `${MID},0`]);
    expect(hallproof(folder, 'read', 'quiet.json', 'volts.csv')).toMatchObject({ status: 2 });
  });

  test('what cannot be judged does not pass: no accuracy in the probe file, or no reading left', () => {
    writeFileSync(join(folder, 'noaccuracy.json'), JSON.stringify(quietProbe({ requirements: [{ measure: 'noise', scenario: 'steady', limit_A: 1 }] })));
    const none = hallproof(folder, 'read', 'noaccuracy.json', 'referenced.csv');
    expect(none.status).toBe(2);
    expect(none.err).toContain('no requirement "reading" or "mean" to judge by');
    writeFileSync(join(folder, 'railed.json'), JSON.stringify(quietProbe({ chain: [{ stage: 'intake' }, { stage: 'overRange' }, { stage: 'scale' }] })));
    codes('rail.csv', ['code,reference_A', '65535,26', '65535,26']);
    const railed = hallproof(folder, 'read', 'railed.json', 'rail.csv');
    expect(railed.status).toBe(1);
    expect(railed.err).toContain('not judged, because no reading is left that is not flagged');
  });

  test('columns that it does not know are named', () => {
    codes('misspelt.csv', ['code,refrence_A', `${MID},0`]);
    expect(hallproof(folder, 'read', 'quiet.json', 'misspelt.csv').err).toContain('not used: "refrence_A"');
  });

  test('a code that the format cannot give is refused', () => {
    codes('negative.csv', ['code', '-5']);
    expect(hallproof(folder, 'read', 'quiet.json', 'negative.csv')).toMatchObject({ status: 2 });
  });

  test('events and temperature travel with the codes; how the record is long does not matter', () => {
    const probe = quietProbe({ chain: [{ stage: 'intake', guardBits: 4 }, { stage: 'zero', mean_ms: 1, span_A: 1, window_A: 5 }, { stage: 'scale' }] });
    writeFileSync(join(folder, 'zero.json'), JSON.stringify(probe));
    const rows = Array.from({ length: 700 }, (_, i) => `${MID + 1000},${i >= 300 && i < 310 ? 1 : 0}`);
    codes('button.csv', ['code,zero', ...rows]);
    const { status, out } = hallproof(folder, 'read', 'zero.json', 'button.csv');
    expect(status).toBe(0);
    const cells = out.trim().split('\n').slice(1).map((line) => line.split(','));
    expect(Math.abs(Number(cells[299][2]) - 1000 * QUIET_CODE_AMPERES)).toBeLessThan(1e-6);
    expect(cells[305][3]).toContain('settling');
    expect(Number(cells[699][2])).toBe(0);
  });
});
