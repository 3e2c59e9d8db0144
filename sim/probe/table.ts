/**
 * The description of a probe file as Markdown tables for the guide: one table a group, in the order of the file,
 * each with field, unit, range, default and meaning. Groups inside a group follow it with tables of their own.
 */
import { allowedText, mayBeEmpty, rangeText } from './allowed.ts';
import type { Field, Fields, GroupField, ListField, VariantField } from './describe.ts';
import { PROBE } from './fields.ts';
import { pathTo } from './problem.ts';

const HEAD = ['| field | unit | range | default | meaning |', '| --- | --- | --- | --- | --- |'];

export function fieldTable(): string {
  return groupTables('', '', PROBE.meaning, PROBE.fields).join('\n');
}

/** `which` tells, behind the path, of which variant the group is or is a part. */
function groupTables(path: string, which: string, meaning: string, fields: Fields): string[] {
  const rows = Object.keys(fields).map((name) => row(name, fields[name]));
  const inner = Object.keys(fields).flatMap((name) => innerTables(fields[name], pathTo(path, name), which));
  const title = path === '' ? 'the file' : `\`${path}\`${which}`;
  const table = rows.length === 0 ? ['No fields.'] : [...HEAD, ...rows];
  return [`### ${title}`, '', `${meaning}.`, '', ...table, '', ...inner];
}

function innerTables(field: Field, path: string, which: string): string[] {
  switch (field.kind) {
    case 'group': {
      const group = field as GroupField<Fields>;
      return groupTables(path, which, group.meaning, group.fields);
    }
    case 'list': return innerTables((field as ListField<Field>).item, `${path}[]`, which);
    case 'variant': {
      const { tag, variants, variantMeanings } = field as VariantField<string, Record<string, Fields>>;
      return Object.keys(variants).flatMap((name) => (
        groupTables(path, `, \`${tag}\`: \`"${name}"\``, variantMeanings[name], variants[name])
      ));
    }
    default: return [];
  }
}

function row(name: string, field: Field): string {
  const cells = [`\`${name}\``, unitCell(field), rangeCell(field), defaultCell(field), field.meaning];
  return `| ${cells.map((cell) => cell.replaceAll('|', '\\|')).join(' | ')} |`;
}

function unitCell(field: Field): string {
  if (field.kind === 'list') return unitCell((field as ListField<Field>).item);
  return field.kind === 'number' ? field.unit : '';
}

function rangeCell(field: Field): string {
  switch (field.kind) {
    case 'number':
      return rangeText({ ...field, unit: '' }) + (field.toleranced ? '; may have a tolerance' : '');
    case 'choice':
      return field.choices.map((word) => `\`"${word}"\``).join(', ');
    case 'group':
      return 'a group, below';
    case 'variant': {
      const names = Object.keys(field.variants).map((name) => `\`"${name}"\``);
      return `a group, below, with \`${field.tag}\` one of ${names.join(', ')}`;
    }
    case 'list': {
      const { minLength, maxLength, item } = field as ListField<Field>;
      return `${minLength} to ${maxLength} of: ${rangeCell(item)}`;
    }
    default:
      return allowedText(field);
  }
}

function defaultCell(field: Field): string {
  switch (field.kind) {
    case 'group': return field.whenMissing === 'required' ? 'required' : 'may be left out';
    case 'list': return field.optional ? 'may be left out' : 'required';
    case 'variant': return 'required';
    case 'code': return 'may be left out';
    case 'text':
      if (field.preset === undefined) return 'required';
      return mayBeEmpty(field.preset) ? 'empty' : `\`"${field.preset}"\``;
    case 'choice': return field.preset === undefined ? 'required' : `\`"${field.preset}"\``;
    default:
      if (field.preset === undefined) return 'required';
      return field.preset === null ? 'may be left out' : String(field.preset);
  }
}
