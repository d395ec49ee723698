import { mkdirSync, renameSync, writeFileSync } from 'node:fs';
import type { AddressInfo } from 'node:net';
import { join } from 'node:path';
import type { Readable } from 'node:stream';
import { SMTPServer } from 'smtp-server';
import { readMail } from './mime';

export interface MailCatcher {
  /** smtp://127.0.0.1:port */
  url: string;
  folder: string;
  stop(): Promise<void>;
}

async function bytesOf(stream: Readable): Promise<Buffer> {
  const chunks: Buffer[] = [];
  for await (const chunk of stream) chunks.push(chunk as Buffer);
  return Buffer.concat(chunks);
}

/**
 * A fake mail server on a free loopback port: it delivers nothing, and keeps every mail as `<ms>-<n>.json` with
 * from, to, subject, date, text and html.
 */
export async function startMailCatcher(folder: string): Promise<MailCatcher> {
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  let count = 0;
  const keep = async (stream: Readable) => {
    const mail = readMail(await bytesOf(stream));
    const name = join(folder, `${Date.now()}-${++count}.json`);
    // Readers list the folder at any time: a mail appears whole or not at all.
    writeFileSync(`${name}.part`, JSON.stringify(mail, null, 1), { mode: 0o600 });
    renameSync(`${name}.part`, name);
  };
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS', 'AUTH'],
    disableReverseLookup: true,
    logger: false,
    onData: (stream, _session, callback) => void keep(stream).then(() => callback(), callback)
  });
  // A client that hangs up in mid-mail is that client's trouble.
  server.on('error', () => {});
  await new Promise<void>((done, fail) => {
    server.server.once('error', fail);
    server.listen(0, '127.0.0.1', () => done());
  });
  const { port } = server.server.address() as AddressInfo;
  const stop = () => new Promise<void>((done) => server.close(() => done()));
  return { url: `smtp://127.0.0.1:${port}`, folder, stop };
}
