import { join, resolve } from 'node:path';
import { root } from './root.mjs';
import { Advice } from './run-quietly.mjs';

/** Settings of the operating scripts; README lists them together with those of the server. */
export interface Settings {
  /** folder of database, run files, caught mails, logs */
  data: string;
  /** port wished for; the next free one is taken where it was not set by name */
  port: number;
  portIsFixed: boolean;
  host: string;
  /** mysql://… of a database kept by somebody else, or null: our own MariaDB */
  databaseUrl: string | null;
  demo: boolean;
  dev: boolean;
}

const PORT = 4173;

function portOf(text: string | undefined): number {
  if (text === undefined || text === '') return PORT;
  const port = Number(text);
  if (Number.isInteger(port) && port > 0 && port < 65536) return port;
  throw new Advice(`RIVENMARK_PORT is "${text}", but a port is a number from 1 to 65535. Correct it and start again.`);
}

/** @throws Advice when a setting or an argument is not understood */
export function readSettings(env: NodeJS.ProcessEnv, args: readonly string[]): Settings {
  const unknown = args.filter((arg) => arg !== '--dev');
  if (unknown.length > 0)
    throw new Advice(
      `Not understood: ${unknown.join(' ')}. The only option is --dev; settings are environment variables.`
    );
  return {
    data: resolve(root, env.RIVENMARK_DATA || '.rivenmark'),
    port: portOf(env.RIVENMARK_PORT),
    portIsFixed: Boolean(env.RIVENMARK_PORT),
    host: env.RIVENMARK_HOST || '127.0.0.1',
    databaseUrl: env.DATABASE_URL || null,
    demo: env.RIVENMARK_DEMO !== '0',
    dev: args.includes('--dev')
  };
}

/** Folder of the run files and of transfers under way. */
export const filesFolder = (settings: Settings, env: NodeJS.ProcessEnv) =>
  resolve(root, env.RIVENMARK_FILES || join(settings.data, 'files'));
