import ts from 'typescript';
import { importsOf, parseSource, type SourceText } from './sources';

/** One thing that a request can start: a load, a form action or an API method. */
export interface Entry {
  /** e.g. "src/routes/x/+page.server.ts load" or "… actions.save" or "… POST" */
  name: string;
  /** null when it is guarded, else why it is not */
  flaw: string | null;
}

const METHODS = /^(GET|POST|PUT|PATCH|DELETE|HEAD|OPTIONS|fallback)$/;
const HTTP_SHAPE = /^src\/lib\/server\/(edge|form|config)$/;

type Body = ts.Expression | ts.FunctionDeclaration;

interface Module {
  /** where each imported name comes from */
  imported: Map<string, string>;
  /** functions and constants of the file itself */
  local: Map<string, Body>;
  exported: Map<string, Body>;
}

function importedNames(file: ts.SourceFile, source: SourceText): Map<string, string> {
  const targets = new Map(importsOf(source).map(({ specifier, target }) => [specifier, target]));
  const names = new Map<string, string>();
  for (const node of file.statements) {
    if (!ts.isImportDeclaration(node) || !ts.isStringLiteral(node.moduleSpecifier)) continue;
    const bindings = node.importClause?.namedBindings;
    const target = targets.get(node.moduleSpecifier.text) ?? '';
    if (bindings && ts.isNamedImports(bindings)) for (const { name } of bindings.elements) names.set(name.text, target);
    if (bindings && ts.isNamespaceImport(bindings)) names.set(bindings.name.text, target);
  }
  return names;
}

const isExported = (node: ts.Node): boolean =>
  ts.canHaveModifiers(node) &&
  (ts.getModifiers(node) ?? []).some((modifier) => modifier.kind === ts.SyntaxKind.ExportKeyword);

function readModule(source: SourceText): Module {
  const file = parseSource(source);
  const module: Module = { imported: importedNames(file, source), local: new Map(), exported: new Map() };
  const keep = (name: string, body: Body, exported: boolean) => {
    module.local.set(name, body);
    if (exported) module.exported.set(name, body);
  };
  for (const node of file.statements) {
    if (ts.isFunctionDeclaration(node) && node.name) keep(node.name.text, node, isExported(node));
    if (ts.isVariableStatement(node))
      for (const { name, initializer } of node.declarationList.declarations)
        if (ts.isIdentifier(name) && initializer) keep(name.text, initializer, isExported(node));
  }
  for (const node of file.statements)
    if (ts.isExportDeclaration(node) && node.exportClause && ts.isNamedExports(node.exportClause))
      for (const { name, propertyName } of node.exportClause.elements) {
        const body = module.local.get((propertyName ?? name).text);
        if (body) module.exported.set(name.text, body);
      }
  return module;
}

function unwrap(node: ts.Expression): ts.Expression {
  if (ts.isSatisfiesExpression(node) || ts.isAsExpression(node) || ts.isParenthesizedExpression(node))
    return unwrap(node.expression);
  return node;
}

/** Name of what is called, from the left: `a.b.c()` is a. */
function calledName(call: ts.CallExpression): string | null {
  let node: ts.Expression = call.expression;
  while (ts.isPropertyAccessExpression(node) || ts.isNonNullExpression(node)) node = node.expression;
  return ts.isIdentifier(node) ? node.text : null;
}

/** Calls into the server's code in the order in which a reader meets them; local functions are looked into. */
function serverCalls(
  body: Body,
  module: Module,
  seen = new Set<string>()
): { call: ts.CallExpression; from: string }[] {
  const found: { call: ts.CallExpression; from: string }[] = [];
  const visit = (node: ts.Node): void => {
    if (ts.isCallExpression(node)) {
      const name = calledName(node);
      const from = name === null ? undefined : module.imported.get(name);
      const wrapper = from && HTTP_SHAPE.test(from);
      // Arguments are evaluated before the call, except the callbacks that a wrapper runs.
      if (from?.startsWith('src/lib/server/') && !wrapper) found.push({ call: node, from });
      const local = name !== null && !seen.has(name) ? module.local.get(name) : undefined;
      if (local && name !== null && ts.isIdentifier(node.expression))
        found.push(...serverCalls(local, module, seen.add(name)));
    }
    ts.forEachChild(node, visit);
  };
  ts.forEachChild(body, visit);
  return found;
}

/** The person comes from the session: `locals.user`, or what require… made of it. */
function namesActor(argument: ts.Expression | undefined, body: Body): boolean {
  if (!argument) return false;
  if (/\blocals\.user\b/.test(argument.getText())) return true;
  if (!ts.isIdentifier(argument)) return false;
  const binding = `\\b(?:const|let)\\s+(?:${argument.text}|\\{[^}]*\\b${argument.text}\\b[^}]*\\})\\s*=\\s*`;
  const made = new RegExp(`${binding}(?:(?:await\\s+)?require\\w+\\(|[\\w.]*locals\\.user\\b)`);
  return made.test(body.getText());
}

function flawOf(body: Body, module: Module): string | null {
  const [first] = serverCalls(body, module);
  if (!first) return 'calls no service and no require… function';
  const { call, from } = first;
  const what = call.expression.getText();
  const guard = from.startsWith('src/lib/server/services/') || /^require[A-Z]/.test(what);
  if (!guard) return `its first call is ${what} of ${from}`;
  return namesActor(call.arguments[0], body) ? null : `${what} is not given the signed-in person first`;
}

/** Everything of one route module that a request can start, with what is wrong about its guard. */
export function entriesOf(source: SourceText): Entry[] {
  const module = readModule(source);
  const entries: Entry[] = [];
  for (const [name, body] of module.exported) {
    if (name === 'load' || METHODS.test(name))
      entries.push({ name: `${source.path} ${name}`, flaw: flawOf(body, module) });
    if (name !== 'actions' || ts.isFunctionDeclaration(body)) continue;
    const table = unwrap(body);
    if (!ts.isObjectLiteralExpression(table)) {
      entries.push({ name: `${source.path} actions`, flaw: 'the actions are not written as an object literal' });
      continue;
    }
    for (const property of table.properties) {
      const key = property.name?.getText() ?? '…';
      const action = ts.isPropertyAssignment(property) ? property.initializer : null;
      const flaw = action ? flawOf(action, module) : 'is not written as name: function';
      entries.push({ name: `${source.path} actions.${key}`, flaw });
    }
  }
  return entries;
}
