import { eq } from 'drizzle-orm';
import { type AddressInfo } from 'node:net';
import { SMTPServer } from 'smtp-server';
import { afterAll, beforeAll, beforeEach, expect, it } from 'vitest';
import { closeDatabase, database } from '$lib/server/db';
import { jobs } from '$lib/server/db/schema';
import { queueMail, resetMail, sendMailJob } from '$lib/server/mail';
import { openTestDatabase, type TestDatabase } from '../helpers/database';
import { codeOf } from '../helpers/people';

let test: TestDatabase;
const received: { to: string[]; raw: string }[] = [];
const server = new SMTPServer({
  authOptional: true,
  disabledCommands: ['STARTTLS'],
  onData(stream, session, done) {
    const chunks: Buffer[] = [];
    stream.on('data', (chunk: Buffer) => chunks.push(chunk));
    stream.on('end', () => {
      received.push({
        to: session.envelope.rcptTo.map(({ address }) => address),
        raw: Buffer.concat(chunks).toString('utf8')
      });
      done();
    });
  }
});

beforeAll(async () => {
  test = await openTestDatabase();
  await new Promise<void>((done) => server.listen(0, '127.0.0.1', done));
  process.env.SMTP_URL = `smtp://127.0.0.1:${(server.server.address() as AddressInfo).port}`;
});
afterAll(async () => {
  await new Promise<void>((done) => server.close(done));
  await closeDatabase();
  await test.close();
});
beforeEach(async () => {
  received.length = 0;
  await database().delete(jobs);
});

const mail = (notAfter: Date) => ({
  to: 'reader@rivenmark.test',
  message: resetMail({ name: 'reader', link: 'http://127.0.0.1:4173/reset?token=secret', expiresAt: notAfter }),
  notAfter
});
const soon = () => new Date(Date.now() + 60_000);
const onlyJob = async () => (await database().select().from(jobs))[0];

it('goes out once its job runs, and the job forgets the text', async () => {
  await queueMail(database(), mail(soon()));
  const job = await onlyJob();
  await sendMailJob(job.input);
  expect(received.map(({ to }) => to)).toEqual([['reader@rivenmark.test']]);
  expect(received[0].raw).toContain('reset?token=3Dsecret');
  expect((await onlyJob()).input).toEqual({});
  await sendMailJob((await onlyJob()).input);
  expect(received).toHaveLength(1);
});

it('is not queued when the act that causes it is rolled back', async () => {
  const act = database().transaction(async (tx) => {
    await queueMail(tx, mail(soon()));
    throw new Error('the act failed');
  });
  await expect(act).rejects.toThrow('the act failed');
  expect(await database().$count(jobs)).toBe(0);
});

it('is dropped, and forgotten, once its link is too old', async () => {
  await queueMail(database(), mail(new Date(Date.now() - 1)));
  await sendMailJob((await onlyJob()).input);
  expect(received).toEqual([]);
  expect((await onlyJob()).input).toEqual({});
});

it('reaches one receiver, whatever the address looks like', async () => {
  await queueMail(database(), { ...mail(soon()), to: 'a@rivenmark.test, b@rivenmark.test' });
  const outcome = await codeOf(sendMailJob((await onlyJob()).input));
  expect(received.flatMap(({ to }) => to)).not.toContain('b@rivenmark.test');
  expect(outcome === 'no error' || received.length === 0).toBe(true);
});

it('stays queued with its text when the server refuses, so that it can be tried again', async () => {
  await queueMail(database(), { ...mail(soon()), to: 'not an address' });
  const job = await onlyJob();
  expect(await codeOf(sendMailJob(job.input))).not.toBe('no error');
  const [after] = await database().select().from(jobs).where(eq(jobs.id, job.id));
  expect(after.input).toEqual(job.input);
});
