import { describe, expect, it } from 'vitest';
import { importsOf, sourcesBelow, type ImportFact, type SourceText } from './support/sources';

/** What one part of the sources may import: other parts and packages, at run time or as types only. */
interface Rule {
  uses: readonly string[];
  types?: readonly string[];
  /** packages by the start of their name; 'any' for no limit */
  packages: readonly string[] | 'any';
}

const SERVER_BASE = ['server/config', 'server/errors', 'server/log'];
const ALL_LOWER = ['core', 'review', 'schema', 'server/db', 'server/auth', 'server/storage', 'server/mail'];

/**
 * The layers, from the inside out. Core and review know nothing of their surroundings; the server is a wall that the
 * browser's code may only look over by type; routes call services and never touch tables.
 */
const RULES: Readonly<Record<string, Rule>> = {
  core: { uses: [], packages: ['fast-xml-parser', 'openchemlib', 'pako'] },
  node: { uses: ['core'], packages: ['node:'] },
  review: { uses: ['core'], types: ['schema'], packages: ['zod'] },
  schema: { uses: ['core', 'review'], packages: ['zod'] },
  workers: { uses: ['core'], packages: [] },
  state: { uses: ['core', 'review', 'schema', 'workers'], types: ['components'], packages: ['zod', '@tanstack/'] },
  components: {
    uses: ['core', 'review', 'schema', 'workers', 'state'],
    types: ['server/services'],
    packages: ['svelte', '$app/', '@tanstack/', '@fontsource/', 'cytoscape', 'tus-js-client', '@sveltejs/kit']
  },
  'server/config': { uses: [], packages: ['zod'] },
  'server/errors': { uses: [], packages: [] },
  'server/log': { uses: SERVER_BASE, packages: ['pino'] },
  'server/edge': { uses: ['server/errors'], packages: ['@sveltejs/kit', 'zod'] },
  'server/form': { uses: ['server/errors'], packages: ['@sveltejs/kit', 'zod'] },
  'server/db': { uses: ['server/config', 'schema'], types: ['core'], packages: ['drizzle-orm', 'mysql2', 'node:'] },
  'server/storage': { uses: SERVER_BASE, packages: ['@aws-sdk/', 'node:'] },
  'server/mail': { uses: [...SERVER_BASE, 'schema', 'server/db', 'server/jobs'], packages: 'any' },
  'server/auth': {
    uses: [...SERVER_BASE, 'schema', 'review', 'server/db'],
    packages: ['lucia', '@lucia-auth/', 'drizzle-orm', '@sveltejs/kit', 'node:']
  },
  'server/report': { uses: [...SERVER_BASE, 'core', 'review', 'schema'], packages: ['pdfmake', '@ibm/', 'node:'] },
  'server/services': { uses: [...SERVER_BASE, ...ALL_LOWER, 'node', 'server/jobs', 'server/report'], packages: 'any' },
  'server/jobs': { uses: [...SERVER_BASE, ...ALL_LOWER, 'server/services'], packages: 'any' },
  'server/demo': { uses: [...SERVER_BASE, ...ALL_LOWER, 'server/services', 'server/jobs'], packages: 'any' },
  cli: { uses: ['core', 'node', 'schema'], packages: ['node:', 'tsx'] },
  ops: {
    uses: ['schema', 'server/db', 'server/demo', 'server/services', 'server/config', 'server/storage'],
    packages: 'any'
  },
  routes: {
    uses: [
      ...['core', 'review', 'schema', 'state', 'components', 'workers'],
      ...['server/services', 'server/auth', 'server/edge', 'server/form', 'server/config', 'server/errors'],
      ...['server/mail', 'server/storage', 'server/db']
    ],
    packages: ['svelte', '@sveltejs/kit', '$app/', '@tanstack/', 'zod', 'tus-js-client', 'node:']
  },
  hooks: {
    uses: ['server/auth', 'server/config', 'server/db', 'server/jobs', 'server/log', 'server/errors'],
    packages: ['@sveltejs/kit', '$app/', 'node:']
  },
  app: { uses: [], types: ['server/auth'], packages: [] }
};

/** Doors through a wall, each with its reason. */
const EXCEPTIONS: Readonly<Record<string, string>> = {
  'src/lib/server/services/upload-protocol.ts -> src/lib/server/edge':
    'speaks the transfer protocol itself, so it parses like a route'
};

/** Which part a path belongs to; null for files that belong to none, such as app.css. */
function partOf(path: string): string | null {
  const server = /^src\/lib\/server\/([\w-]+)/.exec(path);
  if (server) return `server/${server[1]}`;
  return /^src\/(?:lib\/)?([a-z]+)/.exec(path)?.[1] ?? null;
}

/** Browser code may hold no server code, whatever a component of a route lies beside. */
const inBrowser = (path: string) =>
  path.endsWith('.svelte') ||
  (path.startsWith('src/routes/') && !/\+server\.ts$|\.server\.ts$/.test(path)) ||
  /^src\/lib\/(core|review|schema|state|components|workers)\//.test(path);

function whyNot(path: string, part: string, target: string, typeOnly: boolean): string | null {
  const rule = RULES[part];
  if (!rule) return `the part "${part}" has no rule`;
  const own = target.startsWith('src/');
  if (target.startsWith('./$types') || target.endsWith('/$types')) return null;
  if (!own) {
    if (typeOnly || rule.packages === 'any') return null;
    return rule.packages.some((start) => target.startsWith(start)) ? null : `${part} may not use this package`;
  }
  const other = partOf(target);
  if (other === part || other === null || target.endsWith('.css')) return null;
  if (inBrowser(path) && other.startsWith('server') && !typeOnly) return 'code of the browser may not hold server code';
  if (part === 'routes' && target.startsWith('src/lib/server/db/')) return 'routes never touch tables';
  if (rule.uses.includes(other)) return null;
  if (typeOnly && (rule.types?.includes(other) || (inBrowser(path) && part === 'routes'))) return null;
  return `${part} may not use ${other}`;
}

/** What one file imports against the rules, one line each. */
function violations(source: SourceText, imports: ImportFact[] = importsOf(source)): string[] {
  const part = partOf(source.path);
  if (part === null) return [];
  return imports
    .filter(({ target }) => !EXCEPTIONS[`${source.path} -> ${target}`])
    .flatMap(({ specifier, target, typeOnly }) => {
      const why = whyNot(source.path, part, target, typeOnly);
      return why ? [`${source.path}: ${specifier} (${why})`] : [];
    });
}

const files = sourcesBelow('src', /\.(ts|svelte|mjs)$/).filter(({ path }) => !/\.test\.ts$/.test(path));
const imports = new Map(files.map((source) => [source, importsOf(source)]));

describe('layers', () => {
  it('finds the sources', () => {
    expect(files.length).toBeGreaterThan(200);
  });

  it('hold in every file', () => {
    expect(files.flatMap((source) => violations(source, imports.get(source)))).toEqual([]);
  });

  it('keep core free of its surroundings, in types too', () => {
    const outside = /^(node:|svelte|\$app|\$env|\$lib|@sveltejs|drizzle|mysql)/;
    const core = files.filter(({ path }) => path.startsWith('src/lib/core/'));
    const bad = core.flatMap((source) =>
      (imports.get(source) ?? [])
        .filter(({ specifier }) => outside.test(specifier))
        .map(({ specifier }) => `${source.path}: ${specifier}`)
    );
    const impure = core.flatMap(({ path, text }) =>
      [...text.matchAll(/\b(Date\.now|new Date\(\)|Math\.random|performance\.now|localStorage|process\.)/g)].map(
        ([what]) => `${path}: ${what}`
      )
    );
    expect([...bad, ...impure]).toEqual([]);
  });

  it('have an exception for nothing that does not exist', () => {
    const used = [...imports].flatMap(([{ path }, facts]) => facts.map(({ target }) => `${path} -> ${target}`));
    expect(Object.keys(EXCEPTIONS).filter((door) => !used.includes(door))).toEqual([]);
  });

  it.each([
    ['src/lib/core/chem/x.ts', `import { readFile } from 'node:fs/promises';`],
    ['src/lib/core/chem/x.ts', `const fs = await import('node:fs');`],
    ['src/lib/review/x.ts', `import { database } from '$lib/server/db';`],
    ['src/lib/schema/x.ts', `export { database } from '../server/db';`],
    ['src/lib/components/ui/X.svelte', `<script lang="ts">\nimport { database } from '$lib/server/db';\n</script>`],
    ['src/routes/(app)/x/X.svelte', `<script>import { signIn } from '$lib/server/services/accounts';</script>`],
    ['src/routes/(app)/x/+page.server.ts', `import { users } from '$lib/server/db/schema';`],
    ['src/routes/(app)/x/+page.server.ts', `import { eq } from 'drizzle-orm';`],
    ['src/lib/server/services/x.ts', `import { error } from '../edge';`],
    ['src/lib/server/db/x.ts', `import { signIn } from '../services/accounts';`],
    ['src/cli/x.ts', `import { config } from '../lib/server/config';`],
    ['src/lib/newcomer/x.ts', `import { parseFormula } from '$lib/core/chem';`]
  ])('catch a planted violation in %s: %s', (path, text) => {
    expect(violations({ path, text })).toHaveLength(1);
  });
});
