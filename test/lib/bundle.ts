/**
 * The portable chain as one ES5 function: walks the imports from lib/index.ts, strips import and export words, gives a
 * private name that several files use its file's name behind it, refuses two exports of one name, wraps all in one
 * function and down-levels it. A variant can stand in for arithmetic.ts, and edits (each must match exactly once in its
 * file) can change the source on the way, so several versions of the library can live in one process.
 */
import { readFileSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import ts from 'typescript';

export interface Edit {
  /** File of lib/, such as `zero.ts`. */
  file: string;
  find: string;
  replace: string;
}

export interface BundleOptions {
  /** Stands in for arithmetic.ts: 'checked' or 'counted', of lib/variants/. */
  arithmetic?: 'checked' | 'counted';
  edits?: Edit[];
}

interface SourceFile {
  path: string;
  tree: ts.SourceFile;
}

const LIB = resolve(import.meta.dirname, '../../lib');

/** The ES5 text: an expression whose value is an object with every export. */
export function bundleText(options: BundleOptions = {}): string {
  const files = walk(options);
  const exported = exportedNames(files);
  const shared = sharedPrivateNames(files, exported);
  const body = files.map((file) => stripped(file, shared)).join('\n');
  const names = [...exported.keys()].map((name) => `${name}: ${name}`).join(', ');
  const source = `(function () {\n${body}\nreturn { ${names} };\n})()`;
  const result = ts.transpileModule(source, {
    compilerOptions: { target: ts.ScriptTarget.ES5, module: ts.ModuleKind.ESNext },
    reportDiagnostics: true,
  });
  const faults = (result.diagnostics ?? []).map((d) => ts.flattenDiagnosticMessageText(d.messageText, '\n'));
  if (faults.length > 0) throw new SyntaxError(`bundle: ${faults.join(' | ')}`);
  return result.outputText;
}

/** The library from its ES5 text, with the types of lib/index.ts. */
export function bundle(options: BundleOptions = {}): typeof import('../../lib/index.ts') & Record<string, unknown> {
  const text = bundleText(options).trim().replace(/^"use strict";/, '').trim();
  return new Function(`"use strict"; return ${text}`)();
}

/** Every file that lib/index.ts needs at run time, each behind what it imports. */
function walk(options: BundleOptions): SourceFile[] {
  const edits = [...(options.edits ?? [])];
  const seen = new Set<string>();
  const files: SourceFile[] = [];
  const visit = (path: string): void => {
    if (seen.has(path)) return;
    seen.add(path);
    const variant = basename(path) === 'arithmetic.ts' ? options.arithmetic : undefined;
    const origin = variant === undefined ? path : join(LIB, 'variants', `${variant}.ts`);
    const text = edits.filter((edit) => join(LIB, edit.file) === path).reduce(edited, readFileSync(origin, 'utf8'));
    const tree = ts.createSourceFile(path, text, ts.ScriptTarget.ES2022, true);
    for (const target of imports(tree)) visit(resolve(dirname(path), target));
    files.push({ path, tree });
  };
  visit(join(LIB, 'index.ts'));
  const missed = edits.find((edit) => !seen.has(join(LIB, edit.file)));
  if (missed !== undefined) throw new RangeError(`edit of ${missed.file}: no such file in lib/`);
  return files;
}

function edited(text: string, edit: Edit): string {
  const matches = text.split(edit.find).length - 1;
  if (matches !== 1) {
    throw new RangeError(`edit of ${edit.file}: "${edit.find}" matches ${matches} times, allowed: once`);
  }
  return text.replace(edit.find, () => edit.replace);
}

function imports(tree: ts.SourceFile): string[] {
  const targets: string[] = [];
  for (const statement of tree.statements) {
    if (ts.isImportDeclaration(statement) && !statement.importClause?.isTypeOnly) {
      targets.push((statement.moduleSpecifier as ts.StringLiteral).text);
    }
    if (ts.isExportDeclaration(statement) && statement.moduleSpecifier !== undefined) {
      targets.push((statement.moduleSpecifier as ts.StringLiteral).text);
    }
  }
  return targets;
}

interface TopLevelName {
  name: string;
  isExported: boolean;
}

/** Names of the values (not the types) that a file declares. */
function topLevelNames(tree: ts.SourceFile): TopLevelName[] {
  const names: TopLevelName[] = [];
  for (const statement of tree.statements) {
    const isExported = ts.canHaveModifiers(statement) &&
      (ts.getModifiers(statement) ?? []).some((word) => word.kind === ts.SyntaxKind.ExportKeyword);
    if (ts.isFunctionDeclaration(statement) || ts.isClassDeclaration(statement)) {
      names.push({ name: statement.name!.text, isExported });
    } else if (ts.isVariableStatement(statement)) {
      for (const item of statement.declarationList.declarations) {
        names.push({ name: (item.name as ts.Identifier).text, isExported });
      }
    }
  }
  return names;
}

function exportedNames(files: SourceFile[]): Map<string, string> {
  const owner = new Map<string, string>();
  for (const { path, tree } of files) {
    for (const { name, isExported } of topLevelNames(tree)) {
      if (!isExported) continue;
      const other = owner.get(name);
      if (other !== undefined) {
        throw new RangeError(`${name} is exported by ${basename(other)} and by ${basename(path)}`);
      }
      owner.set(name, path);
    }
  }
  return owner;
}

function sharedPrivateNames(files: SourceFile[], exported: Map<string, string>): Set<string> {
  const seen = new Set(exported.keys());
  const shared = new Set<string>();
  for (const { tree } of files) {
    for (const { name, isExported } of topLevelNames(tree)) {
      if (isExported) continue;
      if (seen.has(name)) shared.add(name);
      seen.add(name);
    }
  }
  return shared;
}

/** The file's text without its import and export words, shared private names renamed. */
function stripped({ path, tree }: SourceFile, shared: Set<string>): string {
  const cuts: { from: number; to: number; text: string }[] = [];
  const mine = new Set(topLevelNames(tree).filter((n) => !n.isExported && shared.has(n.name)).map((n) => n.name));
  const suffix = `_${basename(path, '.ts')}`;
  for (const statement of tree.statements) {
    if (ts.isImportDeclaration(statement) || ts.isExportDeclaration(statement)) {
      cuts.push({ from: statement.getStart(tree), to: statement.end, text: '' });
      continue;
    }
    const words = ts.canHaveModifiers(statement) ? ts.getModifiers(statement) ?? [] : [];
    for (const word of words) {
      if (word.kind === ts.SyntaxKind.ExportKeyword) cuts.push({ from: word.getStart(tree), to: word.end, text: '' });
    }
  }
  const rename = (node: ts.Node): void => {
    if (ts.isIdentifier(node) && mine.has(node.text) && isReference(node, path)) {
      cuts.push({ from: node.getStart(tree), to: node.end, text: node.text + suffix });
    }
    ts.forEachChild(node, rename);
  };
  rename(tree);
  cuts.sort((a, b) => b.from - a.from);
  return cuts.reduce((text, cut) => text.slice(0, cut.from) + cut.text + text.slice(cut.to), tree.text);
}

/** false for a property of that name; refuses a local of that name, which a plain rename would confuse. */
function isReference(node: ts.Identifier, path: string): boolean {
  const parent = node.parent;
  if (ts.isPropertyAccessExpression(parent) && parent.name === node) return false;
  if ((ts.isPropertyAssignment(parent) || ts.isClassElement(parent) || ts.isTypeElement(parent)) &&
    parent.name === node) {
    return false;
  }
  const isLocal = ts.isParameter(parent) ||
    (ts.isVariableDeclaration(parent) && parent.name === node && !ts.isSourceFile(parent.parent.parent.parent));
  if (isLocal || ts.isShorthandPropertyAssignment(parent)) {
    throw new RangeError(`${basename(path)}: a local or shorthand called ${node.text}, which is also a top-level name`);
  }
  return true;
}
