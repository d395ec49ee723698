import { redirect, type Handle, type HandleServerError, type ServerInit } from '@sveltejs/kit';
import { building } from '$app/environment';
import { randomUUID } from 'node:crypto';
import { lucia } from '$lib/server/auth/session';
import { config } from '$lib/server/config';
import { closeDatabase } from '$lib/server/db';
import { startJobs, stopJobs } from '$lib/server/jobs/runner';
import { log } from '$lib/server/log';

export const init: ServerInit = async () => {
  if (building) return;
  config();
  startJobs();
  // adapter-node waits for open handles: without this the process would hang on SIGTERM.
  process.on('sveltekit:shutdown', async () => {
    await stopJobs();
    await closeDatabase();
  });
};

/** SvelteKit checks the Origin of form posts only; JSON and tus requests are checked here. */
function foreignOrigin(request: Request): boolean {
  if (['GET', 'HEAD', 'OPTIONS'].includes(request.method)) return false;
  const origin = request.headers.get('origin');
  return origin !== null && origin !== new URL(config().ORIGIN).origin;
}

export const handle: Handle = async ({ event, resolve }) => {
  if (foreignOrigin(event.request)) return new Response('Requests from another site are refused.', { status: 403 });
  const site = new URL(config().ORIGIN);
  const host = event.request.headers.get('host');
  if (event.request.method === 'GET' && host && /^localhost(:|$)/.test(host) && site.hostname === '127.0.0.1')
    redirect(307, site.origin + event.url.pathname + event.url.search);

  event.locals.user = null;
  event.locals.sessionId = null;
  const auth = lucia();
  const id = event.cookies.get(auth.sessionCookieName);
  if (id) {
    const { session, user } = await auth.validateSession(id);
    if (session?.fresh || !session) {
      const cookie = session ? auth.createSessionCookie(session.id) : auth.createBlankSessionCookie();
      event.cookies.set(cookie.name, cookie.value, { path: '/', ...cookie.attributes });
    }
    event.locals.user = user && { id: user.id, email: user.email, name: user.name };
    event.locals.sessionId = session?.id ?? null;
  }
  const response = await resolve(event);
  response.headers.set('x-content-type-options', 'nosniff');
  response.headers.set('referrer-policy', 'same-origin');
  response.headers.set('x-frame-options', 'DENY');
  return response;
};

const LOST_DATABASE = new Set([
  'ECONNREFUSED',
  'PROTOCOL_CONNECTION_LOST',
  'ECONNRESET',
  'ETIMEDOUT',
  'ER_SERVER_SHUTDOWN'
]);

function databaseAway(error: unknown): boolean {
  for (let e: unknown = error, depth = 0; e && depth < 5; depth++) {
    const { code, cause } = e as { code?: unknown; cause?: unknown };
    if (typeof code === 'string' && LOST_DATABASE.has(code)) return true;
    e = cause;
  }
  return false;
}

export const handleError: HandleServerError = ({ error, event, status, message }) => {
  if (status === 404)
    return { message: 'There is nothing at this address.', cure: 'Check the address, or go back to the desk.' };
  const reference = randomUUID().slice(0, 8);
  log.error({ reference, err: error, path: event.url.pathname }, message);
  if (databaseAway(error))
    return {
      message: 'The database does not answer at the moment. Nothing you sent was half-written.',
      cure: 'Wait a few seconds and try again.',
      reference
    };
  return {
    message: 'Something went wrong on our side.',
    cure: `Try again; if it stays, tell your operator the reference ${reference}.`,
    reference
  };
};
