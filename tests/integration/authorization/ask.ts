import type { ActorName, World } from './world';

/** How a request ended, as the person who sent it would put it. */
export type Outcome = 'in' | 'sign in' | 'forbidden' | 'hidden';

export interface Ask {
  method: 'GET' | 'POST' | 'PATCH' | 'DELETE' | 'HEAD';
  path: string;
  /** JSON body of an API call */
  json?: unknown;
  /** fields of a form action; they are sent as the page's own script sends them */
  form?: Record<string, string | string[]>;
  headers?: Record<string, string>;
}

export interface Answer {
  outcome: Outcome;
  status: number;
  body: string;
}

function formBody(fields: Record<string, string | string[]>): URLSearchParams {
  const body = new URLSearchParams();
  for (const [name, value] of Object.entries(fields))
    for (const text of Array.isArray(value) ? value : [value]) body.append(name, text);
  return body;
}

/** A form action answers 200 and tells the real status in its JSON. */
function actionStatus(body: string): { status: number; location: string } {
  const { type, status, location, error } = JSON.parse(body) as {
    type: string;
    status?: number;
    location?: string;
    error?: { status?: number };
  };
  return { status: type === 'error' ? (error?.status ?? status ?? 500) : (status ?? 200), location: location ?? '' };
}

function outcomeOf(status: number, location: string): Outcome {
  if (status === 401 || (status >= 300 && status < 400 && location.startsWith('/sign-in'))) return 'sign in';
  if (status === 403) return 'forbidden';
  if (status === 404 || status === 410) return 'hidden';
  if (status >= 500) throw new Error(`the server failed with ${status}`);
  return 'in';
}

/** Sends one request as somebody. @throws Error when the server itself fails */
export async function ask(world: World, actor: ActorName, request: Ask): Promise<Answer> {
  const { origin } = world.product;
  const headers: Record<string, string> = { ...request.headers };
  const session = world.sessions[actor];
  if (session) headers.cookie = `rivenmark_session=${session}`;
  if (request.method !== 'GET' && request.method !== 'HEAD') headers.origin ??= origin;
  let body: string | URLSearchParams | undefined;
  if (request.json !== undefined) {
    headers['content-type'] = 'application/json';
    body = JSON.stringify(request.json);
  }
  if (request.form) {
    Object.assign(headers, { accept: 'application/json', 'x-sveltekit-action': 'true' });
    body = formBody(request.form);
  }
  const response = await fetch(origin + request.path, { method: request.method, headers, body, redirect: 'manual' });
  const text = await response.text();
  const plain = { status: response.status, location: response.headers.get('location') ?? '' };
  const { status, location } = request.form && response.ok ? actionStatus(text) : plain;
  try {
    return { outcome: outcomeOf(status, location), status, body: text };
  } catch (error) {
    throw new Error(`${request.method} ${request.path} as ${actor}: ${(error as Error).message}\n${text}`, {
      cause: error
    });
  }
}
