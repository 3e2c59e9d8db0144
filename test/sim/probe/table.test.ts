import { expect, test } from 'vitest';
import type { Field, Fields } from '../../../sim/probe/describe.ts';
import { PROBE } from '../../../sim/probe/fields.ts';
import { fieldTable } from '../../../sim/probe/table.ts';

/** Every field of the description, by name: how often a row for it must stand in the tables. */
function countFields(field: Field, counts: Map<string, number>): Map<string, number> {
  let groups: Fields[] = field.kind === 'group' ? [field.fields] : [];
  if (field.kind === 'variant') groups = Object.values(field.variants);
  for (const fields of groups) {
    for (const name of Object.keys(fields)) {
      counts.set(name, (counts.get(name) ?? 0) + 1);
      countFields(fields[name], counts);
    }
  }
  return field.kind === 'list' ? countFields(field.item, counts) : counts;
}

const lines = fieldTable().split('\n');
const rows = lines.filter((line) => line.startsWith('| `'));

test('each described field has one row', () => {
  const inTable = new Map<string, number>();
  for (const line of rows) {
    const name = /^\| `([^`]+)`/.exec(line)![1];
    inTable.set(name, (inTable.get(name) ?? 0) + 1);
  }
  expect(Object.fromEntries(inTable)).toEqual(Object.fromEntries(countFields(PROBE, new Map())));
});

test('every row has five cells', () => {
  for (const line of rows) expect(line.split(/(?<!\\)\|/).length, line).toBe(7);
});

test('a row tells unit, range, default and meaning', () => {
  expect(rows).toContain('| `beta_K` | K | 1000 to 10000; may have a tolerance | 3435 | beta of a thermistor |');
  expect(rows).toContain('| `levels_A` | A | 1 to 1000 of: -1000000 to 1000000 | required | the levels in turn |');
});

test('headings differ', () => {
  const headings = lines.filter((line) => line.startsWith('#'));
  expect(new Set(headings).size).toBe(headings.length);
});
