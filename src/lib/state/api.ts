import { z } from 'zod';

const failureSchema = z.object({
  error: z.string(),
  code: z.string().optional(),
  cure: z.string().nullable().optional(),
  details: z.unknown().optional()
});

/** What the server says of a failure of its own (`handleError` in hooks.server.ts). */
const accidentSchema = z.object({ message: z.string(), cure: z.string().optional() });

/** A refused request in the server's own words. `status` 0: the server could not be reached. */
export class ApiError extends Error {
  constructor(
    readonly status: number,
    message: string,
    readonly code: string | null = null,
    readonly cure: string | null = null,
    readonly details: unknown = null
  ) {
    super(message);
    this.name = 'ApiError';
  }
}

async function failureOf(response: Response): Promise<ApiError> {
  const body: unknown = await response.json().catch(() => null);
  const read = failureSchema.safeParse(body);
  if (read.success) {
    const { error, code, cure, details } = read.data;
    return new ApiError(response.status, error, code ?? null, cure ?? null, details ?? null);
  }
  const accident = accidentSchema.safeParse(body);
  if (accident.success)
    return new ApiError(response.status, accident.data.message, null, accident.data.cure ?? 'Try again.');
  return new ApiError(response.status, `The server answered with status ${response.status}.`, null, 'Try again.');
}

/**
 * Sends a JSON request to our own API. @returns the parsed body
 * @throws ApiError with the server's message and cure, or with status 0 when the network fails
 */
export async function request<T>(path: string, method = 'GET', body?: unknown, signal?: AbortSignal): Promise<T> {
  let response: Response;
  try {
    response = await fetch(path, {
      method,
      signal,
      headers: {
        accept: 'application/json',
        ...(body === undefined ? {} : { 'content-type': 'application/json' })
      },
      body: body === undefined ? undefined : JSON.stringify(body)
    });
  } catch (e) {
    if (signal?.aborted) throw e;
    throw new ApiError(0, 'The server could not be reached.', null, 'Check the connection and try again.');
  }
  if (!response.ok) throw await failureOf(response);
  return (await response.json()) as T;
}
