import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, posix, relative, sep } from 'node:path';
import { fileURLToPath } from 'node:url';
import ts from 'typescript';

/** Top folder of the project. */
export const root = join(dirname(fileURLToPath(import.meta.url)), '..', '..', '..');

export interface SourceText {
  /** path from the top folder, with forward slashes */
  path: string;
  text: string;
}

/** Files below a folder of the project whose path fits, in order of their paths. */
export function sourcesBelow(folder: string, fits: RegExp): SourceText[] {
  return readdirSync(join(root, folder), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => relative(root, join(entry.parentPath, entry.name)).split(sep).join('/'))
    .filter((path) => fits.test(path))
    .sort()
    .map((path) => ({ path, text: readFileSync(join(root, path), 'utf8') }));
}

/** The script of a Svelte component (both blocks), or the whole text of any other file. */
function scriptOf({ path, text }: SourceText): string {
  if (!path.endsWith('.svelte')) return text;
  return [...text.matchAll(/<script[^>]*>([^]*?)<\/script>/g)].map((match) => match[1]).join('\n');
}

export const parseSource = (source: SourceText): ts.SourceFile =>
  ts.createSourceFile(source.path, scriptOf(source), ts.ScriptTarget.Latest, true);

export interface ImportFact {
  /** as written */
  specifier: string;
  /** path from the top folder for the project's own files, else the specifier */
  target: string;
  /** leaves no trace in the compiled code */
  typeOnly: boolean;
}

/** `$lib/…` and relative specifiers as paths from the top folder. */
function resolveSpecifier(from: string, specifier: string): string {
  if (specifier.startsWith('$lib/')) return `src/lib/${specifier.slice(5)}`;
  return specifier.startsWith('.') ? posix.join(posix.dirname(from), specifier) : specifier;
}

function onlyTypes(clause: ts.ImportClause | undefined): boolean {
  if (!clause) return false;
  if (clause.phaseModifier === ts.SyntaxKind.TypeKeyword) return true;
  const named = clause.namedBindings;
  return !clause.name && !!named && ts.isNamedImports(named) && named.elements.length > 0
    ? named.elements.every((element) => element.isTypeOnly)
    : false;
}

/** Every import, re-export, dynamic import and `import('…')` type of a file. */
export function importsOf(source: SourceText): ImportFact[] {
  const found: ImportFact[] = [];
  const note = (literal: ts.Node | undefined, typeOnly: boolean) => {
    if (!literal || !ts.isStringLiteralLike(literal)) return;
    found.push({ specifier: literal.text, target: resolveSpecifier(source.path, literal.text), typeOnly });
  };
  const visit = (node: ts.Node): void => {
    if (ts.isImportDeclaration(node)) note(node.moduleSpecifier, onlyTypes(node.importClause));
    else if (ts.isExportDeclaration(node)) note(node.moduleSpecifier, node.isTypeOnly);
    else if (ts.isCallExpression(node) && node.expression.kind === ts.SyntaxKind.ImportKeyword)
      note(node.arguments[0], false);
    else if (ts.isImportTypeNode(node) && ts.isLiteralTypeNode(node.argument)) note(node.argument.literal, true);
    ts.forEachChild(node, visit);
  };
  visit(parseSource(source));
  return found;
}
