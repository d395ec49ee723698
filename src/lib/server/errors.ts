export type ServiceErrorCode =
  | 'unauthenticated'
  | 'not-found'
  | 'forbidden'
  | 'invalid'
  | 'conflict'
  | 'duplicate'
  | 'gone'
  | 'too-large'
  | 'rate-limited'
  | 'unavailable';

/** Expected failure of a service: `message` is for the person, `cure` says what to do, `details` is for the client program. */
export class ServiceError extends Error {
  constructor(
    readonly code: ServiceErrorCode,
    message: string,
    readonly cure: string | null = null,
    readonly details: unknown = null
  ) {
    super(message);
    this.name = 'ServiceError';
  }
}

const STATUS: Record<ServiceErrorCode, number> = {
  unauthenticated: 401,
  'not-found': 404,
  forbidden: 403,
  invalid: 400,
  conflict: 409,
  duplicate: 409,
  gone: 410,
  'too-large': 413,
  'rate-limited': 429,
  unavailable: 503
};

/** HTTP status of a service error; the only place that knows. */
export const statusOf = (error: ServiceError): number => STATUS[error.code];
