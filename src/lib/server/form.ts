import { fail } from '@sveltejs/kit';
import type { z } from 'zod';
import { ServiceError, statusOf } from './errors';

/** What was typed, by field name; fields whose name ends in [] are lists. Passwords never come back. */
export type FormValues = Record<string, string | string[]>;

const SECRET = new Set(['password', 'again', 'current', 'token']);

/** Form fields as an object: `studyIds[]` becomes the list `studyIds`, anything else a text. */
export function readFields(form: FormData): FormValues {
  const values: FormValues = {};
  for (const name of new Set(form.keys())) {
    const texts = form.getAll(name).filter((value) => typeof value === 'string');
    if (name.endsWith('[]')) values[name.slice(0, -2)] = texts;
    else values[name] = texts[0] ?? '';
  }
  return values;
}

function fieldErrors(error: z.ZodError): Record<string, string> {
  const errors: Record<string, string> = {};
  for (const { path, message } of error.issues) {
    const field = path.length > 0 ? String(path[0]) : 'form';
    errors[field] ??= message;
  }
  return errors;
}

interface Failure {
  /** which form of the page this answers */
  form: string;
  /** what was typed, without secrets */
  values: FormValues;
  /** what is wrong with single fields */
  errors: Record<string, string>;
  /** what is wrong as a whole */
  error: string | null;
  cure: string | null;
  details: unknown;
}

const failure = (status: number, answer: Failure) => fail(status, answer);

function refusal(form: string, values: FormValues, e: ServiceError) {
  const { details } = e;
  const field =
    typeof details === 'object' && details !== null && 'field' in details ? String(details.field) : undefined;
  const errors: Record<string, string> = field ? { [field]: [e.message, e.cure].filter(Boolean).join(' ') } : {};
  return failure(statusOf(e), {
    form,
    values,
    errors,
    error: field ? null : e.message,
    cure: field ? null : e.cure,
    details
  });
}

/**
 * Runs one form action: reads the fields, checks them, does the work. A wrong field or a ServiceError becomes a
 * failure that names the form, the fields and keeps what was typed; a redirect or anything unexpected passes through.
 * @param name which form of the page it is
 * @param work does the act; what it returns is merged into the answer `{form, done: true}`
 */
export async function submit<T extends z.ZodType, R extends Record<string, unknown> | void>(
  event: { request: Request },
  name: string,
  schema: T,
  work: (input: z.output<T>) => Promise<R>
) {
  const fields = readFields(await event.request.formData());
  const values = Object.fromEntries(Object.entries(fields).filter(([field]) => !SECRET.has(field)));
  const parsed = schema.safeParse(fields);
  if (!parsed.success) {
    const errors = fieldErrors(parsed.error);
    return failure(400, { form: name, values, errors, error: errors.form ?? null, cure: null, details: null });
  }
  try {
    return { form: name, done: true as const, ...(await work(parsed.data)) };
  } catch (e) {
    if (e instanceof ServiceError) return refusal(name, values, e);
    throw e;
  }
}
