import { config } from '../config';
import { connect, type Connection, type Database } from './connection';

let connection: Connection | null = null;

/** The process's pool, opened at the first use. */
export function database(): Database {
  connection ??= connect(config().DATABASE_URL);
  return connection.db;
}

/** Closes the pool; without it the process would not end. */
export async function closeDatabase(): Promise<void> {
  const open = connection;
  connection = null;
  await open?.pool.end();
}
