import { createTransport } from 'nodemailer';
import { describe, expect, it } from 'vitest';
import { readMail } from './mime';

const composer = createTransport({ streamTransport: true, buffer: true });

async function composed(mail: { subject: string; text: string; html: string }): Promise<Buffer> {
  const sent = await composer.sendMail({ from: 'Desk <desk@rivenmark.invalid>', to: 'lead@demo.invalid', ...mail });
  if (!Buffer.isBuffer(sent.message)) throw new Error('The composer gave no buffer.');
  return sent.message;
}

describe('readMail', () => {
  const link = `http://127.0.0.1:4173/reset/${'a1'.repeat(40)}?x=1&y==2`;
  const mail = {
    subject: 'Angefragt: Bäume · [M+H]⁺ in a subject long enough to be folded over more than one line of the header',
    text: `Grüße – m/z 304,1543 ± 0,5 ppm\n\n${link}\n\n=41 stays as it is\n.\n..\n`,
    html: `<p>Grüße – <a href="${link}">öffnen</a></p>`
  };

  it('gives back what was composed', async () => {
    const read = readMail(await composed(mail));
    expect(read).toMatchObject({ subject: mail.subject, to: 'lead@demo.invalid', html: mail.html });
    expect(read.from).toBe('Desk <desk@rivenmark.invalid>');
    expect(read.text.replaceAll('\r\n', '\n').trimEnd()).toBe(mail.text.trimEnd());
    expect(Number.isNaN(Date.parse(read.date))).toBe(false);
  });

  it('reads plain ASCII without any coding', async () => {
    const read = readMail(await composed({ subject: 'Plain', text: 'One line', html: '<p>One line</p>' }));
    expect([read.subject, read.text.trim(), read.html.trim()]).toEqual(['Plain', 'One line', '<p>One line</p>']);
  });

  it('reads base64 parts', () => {
    const body = Buffer.from('Δm = 18,0106', 'utf8').toString('base64');
    const raw = `Subject: x\r\nContent-Type: text/plain; charset=utf-8\r\nContent-Transfer-Encoding: base64\r\n\r\n${body}\r\n`;
    expect(readMail(Buffer.from(raw)).text).toBe('Δm = 18,0106');
  });
});
