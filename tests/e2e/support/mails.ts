import { readdir, readFile } from 'node:fs/promises';
import { join } from 'node:path';
import { z } from 'zod';
import { eventually } from './eventually';

const mailSchema = z.object({ to: z.string(), subject: z.string(), text: z.string() });
export type CaughtMail = z.infer<typeof mailSchema>;

async function mailsTo(folder: string, to: string): Promise<CaughtMail[]> {
  const names = (await readdir(folder)).filter((name) => name.endsWith('.json')).sort();
  const mails = await Promise.all(
    names.map(async (name) => mailSchema.parse(JSON.parse(await readFile(join(folder, name), 'utf8'))))
  );
  return mails.filter((mail) => mail.to.includes(to));
}

/** Waits until the mail catcher holds so many mails to an address. @returns the newest */
export async function mailTo(folder: string, to: string, count = 1): Promise<CaughtMail> {
  const mails = await eventually(`mail ${count} to ${to}`, async () => {
    const found = await mailsTo(folder, to);
    return found.length >= count ? found : null;
  });
  return mails[mails.length - 1];
}
