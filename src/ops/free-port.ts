import { createServer } from 'node:net';

const HOST = '127.0.0.1';

/** Whether a TCP port of the loopback address can be listened on at this moment. */
export function portIsFree(port: number): Promise<boolean> {
  return new Promise((done) => {
    const probe = createServer();
    probe.once('error', () => done(false));
    probe.listen({ host: HOST, port, exclusive: true }, () => probe.close(() => done(true)));
  });
}

/** A TCP port of the loopback address that the system calls free. Another process may still take it first. */
export function freePort(): Promise<number> {
  return new Promise((done, fail) => {
    const probe = createServer();
    probe.once('error', fail);
    probe.listen({ host: HOST, port: 0, exclusive: true }, () => {
      const address = probe.address();
      probe.close(() =>
        address && typeof address === 'object' ? done(address.port) : fail(new Error('The system gave no free port.'))
      );
    });
  });
}

/**
 * The wanted port, or the next free one above it.
 * @param tries how many ports are looked at
 * @throws Error when none of them is free
 */
export async function nextFreePort(wanted: number, tries = 50): Promise<number> {
  for (let port = wanted; port < wanted + tries && port < 65536; port++) if (await portIsFree(port)) return port;
  throw new Error(
    `No port from ${wanted} to ${wanted + tries - 1} is free on ${HOST}. Set RIVENMARK_PORT to a free one and start again.`
  );
}
