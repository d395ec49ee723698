import { describe, expect, it } from 'vitest';
import { entriesOf } from './support/guards';
import { sourcesBelow } from './support/sources';

/** What anybody may start without being signed in, each with its reason. */
const PUBLIC: Readonly<Record<string, string>> = {
  'src/routes/(app)/+layout.server.ts load': 'sends strangers to the sign-in page; pages authorise for themselves',
  'src/routes/(auth)/sign-in/+page.server.ts load': 'the way in',
  'src/routes/(auth)/sign-in/+page.server.ts actions.default': 'the way in, with a rate limit',
  'src/routes/(auth)/sign-out/+page.server.ts load': 'only leads back to the desk',
  'src/routes/(auth)/sign-out/+page.server.ts actions.default': 'ends the own session',
  'src/routes/(auth)/forgot/+page.server.ts actions.default': 'asks for a reset, with a rate limit',
  'src/routes/(auth)/reset/+page.server.ts load': 'whoever holds the secret of the mail may use it',
  'src/routes/(auth)/reset/+page.server.ts actions.default': 'whoever holds the secret of the mail may use it',
  'src/routes/(auth)/invitation/+page.server.ts load': 'whoever holds the secret of the mail may use it',
  'src/routes/(auth)/invitation/+page.server.ts actions.join': 'whoever holds the secret of the mail may use it',
  'src/routes/shared/[token]/+page.server.ts load': 'whoever holds the secret of a share link may read what it opens',
  'src/routes/dev/mail/+page.server.ts load': 'exists only beside the local mail catcher, 404 elsewhere'
};

const modules = sourcesBelow('src/routes', /\/\+(page|layout)\.server\.ts$|\/\+server\.ts$/);
const entries = modules.flatMap(entriesOf);
const planted = (text: string) => entriesOf({ path: 'src/routes/x/+page.server.ts', text }).map(({ flaw }) => flaw);

describe('guards of routes', () => {
  it('finds loads, actions and API methods', () => {
    const count = (pattern: RegExp) => entries.filter(({ name }) => pattern.test(name)).length;
    expect(count(/ load$/)).toBeGreaterThan(12);
    expect(count(/ actions\./)).toBeGreaterThan(15);
    expect(count(/ (GET|POST|PATCH|DELETE)$/)).toBeGreaterThan(8);
  });

  it('stand first in everything that a request can start', () => {
    const open = entries.filter(({ name, flaw }) => flaw !== null && !(name in PUBLIC));
    expect(open.map(({ name, flaw }) => `${name}: ${flaw}`)).toEqual([]);
  });

  it('are missing only where the list of public routes says so', () => {
    const unguarded = new Set(entries.filter(({ flaw }) => flaw !== null).map(({ name }) => name));
    expect(Object.keys(PUBLIC).filter((name) => !unguarded.has(name))).toEqual([]);
  });

  it('catch a load that reads before it asks', () => {
    const text = `
      import { database } from '$lib/server/db';
      import { requireStudy } from '$lib/server/auth/authorize';
      export const load = async ({ locals }) => {
        const db = database();
        await requireStudy(locals.user, 'x', 'study.read');
      };`;
    expect(planted(text)).toEqual([expect.stringContaining('database')]);
  });

  it('catch a service that is called for nobody', () => {
    const text = `
      import { listRuns } from '$lib/server/services/runs';
      export const GET = ({ params }) => listRuns(null, params.study);`;
    expect(planted(text)).toEqual([expect.stringContaining('signed-in person')]);
  });

  it('catch one bare action among guarded ones', () => {
    const text = `
      import { renameSelf } from '$lib/server/services/accounts';
      export const actions = {
        good: async ({ locals }) => renameSelf(locals.user, 'x'),
        bad: async ({ request }) => ({ done: true })
      };`;
    expect(planted(text)).toEqual([null, 'calls no service and no require… function']);
  });

  it('follow a handler that is exported under other names', () => {
    const text = `
      import { handle } from '$lib/server/services/things';
      const work = ({ locals }) => handle(locals.user);
      const bare = () => new Response('x');
      export { work as POST, bare as DELETE };`;
    expect(planted(text)).toEqual([null, 'calls no service and no require… function']);
  });

  it('look into functions of the file itself', () => {
    const text = `
      import { database } from '$lib/server/db';
      import { handle } from '$lib/server/services/things';
      async function early() { return database().select(); }
      export const GET = async ({ locals }) => { await early(); return handle(locals.user); };`;
    expect(planted(text)).toEqual([expect.stringContaining('database')]);
  });
});
