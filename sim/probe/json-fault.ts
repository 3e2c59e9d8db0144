/**
 * Finds the first place where a text stops being JSON (RFC 8259), with a hint for the mistakes that people make in
 * files written by hand. `JSON.parse` decides whether a text is JSON, but its messages differ between versions of
 * the engine and often name no place. Also found: a field that stands twice in one group, of which JSON.parse
 * silently keeps the last. Works with a stack of its own, so that nesting of any depth is no trouble.
 */
export interface JsonFault {
  offset: number;
  found: string;
  allowed: string;
  hint: string;
  /** true: JSON.parse accepts the text all the same. */
  twice: boolean;
}

type Expected = 'value' | 'first item' | 'name' | 'first name' | 'colon' | 'comma or end' | 'nothing';

const TOKEN = new RegExp([
  /[{}[\],:]/,
  /"[^"\\\u0000-\u001f]*(?:\\(?:["\\/bfnrt]|u[0-9a-fA-F]{4})[^"\\\u0000-\u001f]*)*"/,
  /-?(?:0|[1-9][0-9]*)(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?/,
  /true|false|null/,
].map((part) => part.source).join('|'), 'y');

const WORDS: Record<Expected, string> = {
  value: 'a value',
  'first item': 'a value or ]',
  name: 'the name of a field in double quotes',
  'first name': 'the name of a field in double quotes, or }',
  colon: 'a colon',
  'comma or end': 'a comma or a closing bracket',
  nothing: 'nothing more',
};

export function jsonFault(text: string): JsonFault | null {
  /** One entry for each bracket that is open: the names of a group so far, null for a list. */
  const open: (Set<string> | null)[] = [];
  let expected: Expected = 'value';
  let twice: JsonFault | null = null;
  let offset = afterBlanks(text, 0);
  let commaBefore = false;
  while (offset < text.length) {
    TOKEN.lastIndex = offset;
    const token = TOKEN.exec(text)?.[0] ?? '';
    const names = open.at(-1);
    const next: Expected | null = token === '' ? null : follow(token, expected, open);
    if (next === null) return faultAt(text, offset, token, expected, commaBefore);
    if (next === 'colon' && names instanceof Set) {
      const name = JSON.parse(token) as string;
      if (names.has(name)) twice ??= repeatedName(offset, token);
      names.add(name);
    }
    commaBefore = token === ',';
    expected = next;
    offset = afterBlanks(text, offset + token.length);
  }
  if (expected === 'nothing') return twice;
  const brackets = open.length === 1 ? 'a bracket is not closed' : `${open.length} brackets are not closed`;
  const hint = open.length > 0 ? brackets : '';
  return { offset, found: 'the end of the file', allowed: WORDS[expected], hint, twice: false };
}

/** What is expected behind a token, or null where it must not stand; keeps the stack of open brackets. */
function follow(token: string, expected: Expected, open: (Set<string> | null)[]): Expected | null {
  const afterValue = (): Expected => (open.length === 0 ? 'nothing' : 'comma or end');
  const inGroup = open.at(-1) instanceof Set;
  switch (token) {
    case '{': case '[':
      if (expected !== 'value' && expected !== 'first item') return null;
      open.push(token === '{' ? new Set() : null);
      return token === '{' ? 'first name' : 'first item';
    case '}': case ']': {
      const first = token === '}' ? 'first name' : 'first item';
      if (expected !== first && !(expected === 'comma or end' && inGroup === (token === '}'))) return null;
      open.pop();
      return afterValue();
    }
    case ',':
      if (expected !== 'comma or end') return null;
      return inGroup ? 'name' : 'value';
    case ':':
      return expected === 'colon' ? 'value' : null;
    default:
      if (expected === 'name' || expected === 'first name') return token.startsWith('"') ? 'colon' : null;
      return expected === 'value' || expected === 'first item' ? afterValue() : null;
  }
}

function repeatedName(offset: number, token: string): JsonFault {
  const found = `the field ${token} a second time`;
  return { offset, found, allowed: 'each field once in a group', hint: '', twice: true };
}

function faultAt(text: string, offset: number, token: string, expected: Expected, commaBefore: boolean): JsonFault {
  const rest = text.slice(offset, offset + 20);
  const brokenText = token === '' && rest.startsWith('"');
  const word = /^[\w.+-]+/.exec(rest)?.[0] ?? String.fromCodePoint(text.codePointAt(offset)!);
  const shown = token === '' ? word : token.slice(0, 40);
  const found = brokenText ? 'a text that is broken' : `"${shown.replaceAll('"', '')}"`;
  const hint = brokenText ? 'it is not closed on its line, or has a \\ that means nothing'
    : hintFor(rest, expected, commaBefore);
  return { offset, found, allowed: WORDS[expected], hint, twice: false };
}

function hintFor(rest: string, expected: Expected, commaBefore: boolean): string {
  const wantsName = expected === 'name' || expected === 'first name';
  const wantsValue = expected === 'value' || expected === 'first item';
  if (/^(\/[/*]|#)/.test(rest)) return 'JSON has no comments; a probe file in JavaScript (.mjs) may have them';
  if (/^['‘’“”„`]/.test(rest)) return 'texts and names stand in straight double quotes';
  if (/^[}\]]/.test(rest) && commaBefore) return 'remove the comma before it';
  if (wantsName && commaBefore && /^\d/.test(rest)) return 'decimals take a point, not a comma';
  if (wantsName && /^[A-Za-z_$]/.test(rest)) return 'names of fields stand in double quotes';
  if (wantsValue && /^[+.]/.test(rest)) return 'a number starts with a digit, or with - and a digit';
  if (wantsValue && /^-?(NaN|Infinity)/.test(rest)) return 'JSON knows finite numbers only';
  if (wantsValue && /^[A-Za-z_]/.test(rest)) return 'texts stand in double quotes; only true, false and null do not';
  if (expected === 'comma or end' && /^[".\w{[-]/.test(rest)) return 'a comma may be missing before it';
  return '';
}

function afterBlanks(text: string, offset: number): number {
  while (offset < text.length && ' \t\n\r'.includes(text[offset])) offset++;
  return offset;
}

/** Line and column, both from 1, of an offset in a text with any kind of line ends. */
export function placeOf(text: string, offset: number): { line: number; column: number } {
  const lines = text.slice(0, offset).split(/\r\n|\n|\r/);
  return { line: lines.length, column: lines[lines.length - 1].length + 1 };
}
