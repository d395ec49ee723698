import { connect as dial, createServer, type Server, type Socket } from 'node:net';
import { freePort } from '../../src/ops/free-port';

export interface Gate {
  /** as the database's own address, through the gate */
  url: string;
  open(): Promise<void>;
  shut(): Promise<void>;
}

/** A way to the database that can be cut: all connections break, new ones are refused, until it is opened again. */
export async function openGate(databaseUrl: string): Promise<Gate> {
  const target = new URL(databaseUrl);
  const port = await freePort();
  let server: Server | null = null;
  const sockets = new Set<Socket>();
  const open = () =>
    new Promise<void>((resolve) => {
      server = createServer((client) => {
        const upstream = dial(Number(target.port), target.hostname);
        for (const socket of [client, upstream]) {
          sockets.add(socket);
          socket.on('error', () => undefined).on('close', () => sockets.delete(socket));
        }
        // A process that was killed resets its connection: the database must learn of it, as it would without the gate.
        client.once('close', () => upstream.destroy());
        upstream.once('close', () => client.destroy());
        client.pipe(upstream).pipe(client);
      }).listen(port, '127.0.0.1', resolve);
    });
  const shut = () =>
    new Promise<void>((resolve) => {
      for (const socket of sockets) socket.destroy();
      if (server) server.close(() => resolve());
      else resolve();
      server = null;
    });
  await open();
  const url = new URL(target);
  url.port = String(port);
  return { url: url.href, open, shut };
}
