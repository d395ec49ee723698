import { randomUUID } from 'node:crypto';
import { and, eq } from 'drizzle-orm';
import { z } from 'zod';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { jobs } from '../db/schema';
import { ServiceError } from '../errors';
import { enqueue } from '../jobs/queue';
import type { MailMessage } from './message';
import { sendMail } from './transport';

export interface OutgoingMail {
  /** address of the one receiver */
  to: string;
  message: MailMessage;
  groupId?: string | null;
  createdBy?: string | null;
  /** after this time the mail is dropped instead of sent: its link would no longer work. */
  notAfter?: Date;
}

const inputSchema = z.object({
  mailId: z.uuid(),
  to: z.string(),
  subject: z.string(),
  text: z.string(),
  html: z.string(),
  notAfter: z.string().nullable()
});

/**
 * Queues a mail inside the caller's transaction: it goes out exactly when the act that caused it stands.
 * The job's input holds the rendered text, links included, until the mail is sent or too old; then the input is
 * blanked. Whoever shows jobs must never show `input`.
 */
export async function queueMail(tx: Executor, mail: OutgoingMail): Promise<void> {
  const mailId = randomUUID();
  await enqueue(tx, {
    kind: 'mail',
    groupId: mail.groupId ?? null,
    studyId: null,
    subjectId: mailId,
    input: { mailId, to: mail.to, ...mail.message, notAfter: mail.notAfter?.toISOString() ?? null },
    createdBy: mail.createdBy ?? null,
    what: 'Sending a mail'
  });
}

/** Leaves nothing of a mail that has gone out but the fact. */
const blank = (mailId: string) =>
  database()
    .update(jobs)
    .set({ input: {} })
    .where(and(eq(jobs.kind, 'mail'), eq(jobs.subjectId, mailId)));

/**
 * Work of a job of kind 'mail'. Safe to repeat: after success the input is blank and a repetition does nothing.
 * @param input the job's `input`
 * @throws ServiceError unavailable without a mail server; the transport's error otherwise (the runner tries again)
 */
export async function sendMailJob(input: unknown): Promise<void> {
  if (typeof input === 'object' && input !== null && Object.keys(input).length === 0) return;
  const parsed = inputSchema.safeParse(input);
  if (!parsed.success) throw new ServiceError('invalid', 'The job holds no mail.', 'Cause the mail again.');
  const { mailId, to, notAfter, ...message } = parsed.data;
  if (notAfter === null || new Date(notAfter) > new Date()) await sendMail(to, message);
  await blank(mailId);
}
