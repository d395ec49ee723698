const AWAY = new Set([
  'ECONNREFUSED',
  'ECONNRESET',
  'EPIPE',
  'ETIMEDOUT',
  'PROTOCOL_CONNECTION_LOST',
  'PROTOCOL_SEQUENCE_TIMEOUT',
  'ER_SERVER_SHUTDOWN',
  'ER_NORMAL_SHUTDOWN',
  'ER_CON_COUNT_ERROR',
  'ER_CONNECTION_KILLED',
  // The transaction was rolled back as a whole; doing it again is the remedy that the server names.
  'ER_LOCK_DEADLOCK',
  'ER_LOCK_WAIT_TIMEOUT'
]);

/** Whether an error (or what caused it) says that the database did not answer, so that the same work may succeed later. */
export function isDatabaseAway(error: unknown): boolean {
  for (let e: unknown = error, depth = 0; e instanceof Error && depth < 6; e = e.cause, depth++) {
    const { code, fatal } = e as Error & { code?: unknown; fatal?: unknown };
    if (typeof code === 'string' && AWAY.has(code)) return true;
    // The driver marks an error that ended its connection, and names a connection that ended before.
    if (fatal === true || /connection is in closed state|Connection lost/.test(e.message)) return true;
  }
  return false;
}

export interface RetryOptions {
  /** how long to go on trying, in ms. */
  patience: number;
  /** true ends the waiting; the last error is thrown. */
  stopped?: () => boolean;
}

/**
 * Does database work and, while the database is away, does it again: after 100 ms, then ever later up to 1 s.
 * The work must be one transaction, or harmless when done twice.
 */
export async function persist<T>(work: () => Promise<T>, { patience, stopped }: RetryOptions): Promise<T> {
  const start = performance.now();
  for (let pause = 100; ; pause = Math.min(1000, pause * 2)) {
    try {
      return await work();
    } catch (error) {
      if (!isDatabaseAway(error) || stopped?.() || performance.now() - start > patience) throw error;
    }
    await new Promise((resolve) => setTimeout(resolve, pause));
  }
}
