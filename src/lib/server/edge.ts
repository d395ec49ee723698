import { error, fail, json, type RequestEvent } from '@sveltejs/kit';
import type { z } from 'zod';
import { ServiceError, statusOf } from './errors';

/** First problem of a failed schema check, in words: "field: what is wrong". */
const inWords = (failure: z.ZodError): string =>
  failure.issues.map((issue) => `${issue.path.join('.') || 'input'}: ${issue.message}`).join('; ');

/** Parses client input. @throws ServiceError invalid, naming each field */
export function parse<T extends z.ZodType>(schema: T, value: unknown): z.output<T> {
  const result = schema.safeParse(value);
  if (!result.success) throw new ServiceError('invalid', inWords(result.error), 'Correct the input and send it again.');
  return result.data;
}

/** JSON body of an API request. @throws ServiceError invalid when it is no JSON or does not fit the schema */
export async function parseJson<T extends z.ZodType>(
  event: Pick<RequestEvent, 'request'>,
  schema: T
): Promise<z.output<T>> {
  let body: unknown;
  try {
    body = await event.request.json();
  } catch {
    throw new ServiceError('invalid', 'The request body is not JSON.', 'Send application/json.');
  }
  return parse(schema, body);
}

/** Runs an API handler; a ServiceError becomes its status with {error, cure, details}. Anything else is left to handleError. */
export async function api(work: () => Promise<unknown>): Promise<Response> {
  try {
    const result = await work();
    return result instanceof Response ? result : json(result ?? { ok: true });
  } catch (e) {
    if (e instanceof ServiceError)
      return json({ error: e.message, code: e.code, cure: e.cure, details: e.details }, { status: statusOf(e) });
    throw e;
  }
}

/** Runs a page load; a ServiceError becomes the error page with its cure. */
export async function page<T>(work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (e) {
    if (e instanceof ServiceError) error(statusOf(e), { message: e.message, cure: e.cure ?? undefined });
    throw e;
  }
}

/** Runs a form action; a ServiceError becomes a failure that keeps the typed values (never passwords). */
export async function action<T>(values: Record<string, unknown>, work: () => Promise<T>) {
  try {
    return await work();
  } catch (e) {
    if (e instanceof ServiceError) return fail(statusOf(e), { values, error: e.message, cure: e.cure });
    throw e;
  }
}
