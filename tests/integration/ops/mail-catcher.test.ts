import { mkdtempSync, readdirSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createTransport } from 'nodemailer';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { startMailCatcher, type MailCatcher } from '../../../src/ops/mail-catcher';

const folder = mkdtempSync(join(tmpdir(), 'rivenmark-mail-'));
let catcher: MailCatcher;
beforeAll(async () => {
  catcher = await startMailCatcher(folder);
});
afterAll(async () => {
  await catcher.stop();
  rmSync(folder, { recursive: true, force: true });
});

describe('startMailCatcher', () => {
  it('keeps each mail as one file, in the order of their coming', async () => {
    const transport = createTransport({ url: catcher.url });
    for (const subject of ['Einladung – erste', 'second'])
      await transport.sendMail({
        from: 'a@x.invalid',
        to: 'b@x.invalid',
        subject,
        text: 'See\n.\nthere',
        html: '<p>See</p>'
      });
    transport.close();
    const names = readdirSync(folder).sort((a, b) => a.localeCompare(b, 'en', { numeric: true }));
    expect(names.every((name) => /^\d+-\d+\.json$/.test(name))).toBe(true);
    const mails = names.map((name) => JSON.parse(readFileSync(join(folder, name), 'utf8')) as Record<string, string>);
    expect(mails.map(({ subject }) => subject)).toEqual(['Einladung – erste', 'second']);
    expect(mails[0]).toMatchObject({ from: 'a@x.invalid', to: 'b@x.invalid', html: '<p>See</p>' });
    expect(mails[0].text.trim().split(/\r?\n/)).toEqual(['See', '.', 'there']);
  });
});
