import { createConnection, type Connection, type ResultSetHeader, type RowDataPacket } from 'mysql2/promise';
import { z } from 'zod';

const DEMO = 'demo loaded';
const accountsSchema = z.array(z.object({ name: z.string(), email: z.string(), password: z.string() }));
/** One of the invented accounts that everybody may know the password of. */
export type DemoAccount = z.infer<typeof accountsSchema>[number];

async function on<T>(url: string, work: (connection: Connection) => Promise<T>): Promise<T> {
  const connection = await createConnection({ uri: url });
  try {
    await connection.query(
      'CREATE TABLE IF NOT EXISTS operations_done (name varchar(100) PRIMARY KEY, detail json NOT NULL, ' +
        'at datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3))'
    );
    return await work(connection);
  } finally {
    await connection.end();
  }
}

/** The demo's accounts where it was loaded completely, else null. @param url mysql://… */
export const loadedDemo = (url: string): Promise<DemoAccount[] | null> =>
  on(url, async (connection) => {
    const [rows] = await connection.query<RowDataPacket[]>('SELECT detail FROM operations_done WHERE name = ?', [DEMO]);
    return rows.length === 0 ? null : accountsSchema.parse(rows[0].detail);
  });

/** Notes that the demo is loaded, so that no later start loads it again. */
export const stampDemo = (url: string, accounts: readonly DemoAccount[]): Promise<ResultSetHeader> =>
  on(url, async (connection) => {
    const [result] = await connection.query<ResultSetHeader>(
      'INSERT INTO operations_done (name, detail) VALUES (?, ?) ON DUPLICATE KEY UPDATE detail = VALUES(detail)',
      [DEMO, JSON.stringify(accounts)]
    );
    return result;
  });
