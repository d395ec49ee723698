import { readdir, readFile } from 'node:fs/promises';
import { join } from 'node:path';
import { z } from 'zod';
import { config } from '../config';
import { ServiceError } from '../errors';

const MOST = 100;
const addresses = z.union([z.string(), z.array(z.string()).transform((list) => list.join(', '))]).default('');
const mailSchema = z.object({
  to: addresses,
  from: addresses,
  subject: z.string().default(''),
  text: z.string().default(''),
  html: z.string().default(''),
  date: z.string().default('')
});
export type CaughtMail = z.infer<typeof mailSchema> & { id: string };

/**
 * Mails that the local catcher wrote into RIVENMARK_MAIL_FOLDER, newest first, at most 100.
 * @throws ServiceError not-found where the server runs without a catcher, as in production
 */
export async function caughtMails(): Promise<CaughtMail[]> {
  const folder = config().RIVENMARK_MAIL_FOLDER;
  if (!folder) throw new ServiceError('not-found', 'There is nothing at this address.', null);
  const names = (await readdir(folder)).filter((name) => /^\d+-\d+\.json$/.test(name));
  const order = (name: string) => name.split(/\D/).slice(0, 2).map(Number);
  names.sort((a, b) => order(b)[0] - order(a)[0] || order(b)[1] - order(a)[1]);
  return Promise.all(
    names.slice(0, MOST).map(async (name) => ({
      id: name.replace('.json', ''),
      ...mailSchema.parse(JSON.parse(await readFile(join(folder, name), 'utf8')))
    }))
  );
}
