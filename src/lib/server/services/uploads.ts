import { and, eq, lt, sql } from 'drizzle-orm';
import { randomUUID } from 'node:crypto';
import { createReadStream } from 'node:fs';
import { rm, stat } from 'node:fs/promises';
import type { z } from 'zod';
import { tooLarge, type newUploadSchema } from '$lib/schema/upload';
import { requireStudy, type Actor } from '../auth/authorize';
import { config } from '../config';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { runs, studies, uploads, users } from '../db/schema';
import { ServiceError } from '../errors';
import { persist } from '../jobs/database-away';
import { enqueue } from '../jobs/queue';
import { log } from '../log';
import { fileStore } from '../storage';
import { transferPath } from '../storage/transfers';
import { audit } from './audit';
import { inspect } from './upload-checks';

type UploadRow = typeof uploads.$inferSelect;

/** Hours after which an unfinished transfer is given up. */
export const TRANSFER_HOURS = 48;

/** Where the file of a transfer is stored; known before it is, so that an interrupted completion can be taken up. */
const storageKeyOf = (uploadId: string) => `runs/${uploadId}`;

/** Whether the person may begin such a transfer. @throws ServiceError too-large, invalid, forbidden, not-found, unauthenticated */
export async function admitUpload(actor: Actor | null, input: z.output<typeof newUploadSchema>): Promise<void> {
  await requireStudy(actor, input.studyId, 'run.upload');
  const { RIVENMARK_MAX_UPLOAD: limit } = config();
  if (input.bytes > limit) throw new ServiceError('too-large', tooLarge(input.bytes, limit));
  if (input.bytes === 0) throw new ServiceError('invalid', 'The file is empty.', 'Export or copy it again.');
}

/** Notes a new transfer. @throws ServiceError as {@link admitUpload} */
export async function openUpload(
  actor: Actor | null,
  uploadId: string,
  input: z.output<typeof newUploadSchema>
): Promise<void> {
  await admitUpload(actor, input);
  await database()
    .insert(uploads)
    .values({ id: uploadId, studyId: input.studyId, userId: actor!.id, fileName: input.filename, bytes: input.bytes });
}

const gone = () =>
  new ServiceError('gone', 'This transfer was cancelled, has ended or is too old.', 'Choose the file again.');

/** The transfer, if it is the person's own, still going on, and they may still upload into its study. @throws ServiceError */
export async function requireUpload(actor: Actor | null, uploadId: string): Promise<UploadRow> {
  if (!actor) throw new ServiceError('unauthenticated', 'You are not signed in.', 'Sign in and go on.');
  const [row] = await database()
    .select()
    .from(uploads)
    .where(and(eq(uploads.id, uploadId), eq(uploads.userId, actor.id)));
  if (!row) throw new ServiceError('not-found', 'There is no such transfer of yours.', 'Choose the file again.');
  await requireStudy(actor, row.studyId, 'run.upload');
  if (row.state === 'cancelled') throw gone();
  return row;
}

async function removeTransfer(uploadId: string): Promise<void> {
  await rm(transferPath(uploadId), { force: true });
  await rm(`${transferPath(uploadId)}.json`, { force: true });
}

/** Gives a transfer up and removes its bytes. */
export async function dropUpload(uploadId: string): Promise<void> {
  const [done] = await database()
    .update(uploads)
    .set({ state: 'cancelled' })
    .where(and(eq(uploads.id, uploadId), eq(uploads.state, 'receiving')));
  await removeTransfer(uploadId);
  if (done.affectedRows) await fileStore().delete(storageKeyOf(uploadId));
}

async function refuseDuplicate(tx: Executor, studyId: string, sha256: string): Promise<void> {
  const [same] = await tx
    .select({ id: runs.id, fileName: runs.fileName })
    .from(runs)
    .where(and(eq(runs.studyId, studyId), eq(runs.sha256, sha256)));
  if (same)
    throw new ServiceError(
      'duplicate',
      `The same file is in this study already, as ${same.fileName}.`,
      'Open that run, or delete it first if you want to read the file anew.',
      { runId: same.id }
    );
}

interface Received {
  upload: UploadRow;
  actor: Actor;
  hashes: { sha1: string; sha256: string };
}

/** Run, job and end of the transfer in one transaction; the study's row makes two equal files wait for each other. */
function registerRun({ upload, actor, hashes }: Received): Promise<string> {
  const { id, studyId, fileName, bytes } = upload;
  return database().transaction(async (tx) => {
    const [known] = await tx.select({ runId: uploads.runId }).from(uploads).where(eq(uploads.id, id)).for('update');
    if (known?.runId) return known.runId;
    const [study] = await tx
      .select({ groupId: studies.groupId })
      .from(studies)
      .where(eq(studies.id, studyId))
      .for('update');
    if (!study) throw new ServiceError('gone', 'The study was deleted during the transfer.', null);
    await refuseDuplicate(tx, studyId, hashes.sha256);
    const runId = randomUUID();
    const storageKey = storageKeyOf(id);
    await tx.insert(runs).values({ id: runId, studyId, fileName, bytes, storageKey, ...hashes, uploadedBy: actor.id });
    await enqueue(tx, {
      kind: 'read-run',
      groupId: study.groupId,
      studyId,
      subjectId: runId,
      input: {},
      createdBy: actor.id,
      what: 'Waiting to be read'
    });
    await tx.update(uploads).set({ state: 'complete', runId }).where(eq(uploads.id, id));
    await tx.update(studies).set({ updatedAt: new Date() }).where(eq(studies.id, studyId));
    await audit(tx, actor, {
      groupId: study.groupId,
      action: 'run.uploaded',
      subjectKind: 'run',
      subjectId: runId,
      details: { fileName, bytes, sha256: hashes.sha256 }
    });
    return runId;
  });
}

/** Whether all bytes of a transfer are here: still among the transfers, or in the store already. */
async function whereabouts(upload: UploadRow): Promise<'transfer' | 'store' | null> {
  const size = await stat(transferPath(upload.id)).then(
    (found) => found.size,
    () => null
  );
  if (size === upload.bytes) return 'transfer';
  if (size !== null) return null;
  return (await fileStore().size(storageKeyOf(upload.id))) === upload.bytes ? 'store' : null;
}

/** Whether nothing is left to send. */
export const hasArrived = async (upload: UploadRow): Promise<boolean> => (await whereabouts(upload)) !== null;

async function accept(upload: UploadRow, actor: Actor): Promise<string> {
  const key = storageKeyOf(upload.id);
  const path = transferPath(upload.id);
  const place = await whereabouts(upload);
  if (!place) throw gone();
  const source = place === 'store' ? await fileStore().open(key) : createReadStream(path, { highWaterMark: 1 << 20 });
  const hashes = await inspect(source);
  await refuseDuplicate(database(), upload.studyId, hashes.sha256);
  if (place === 'transfer') await fileStore().adopt(key, path);
  return persist(() => registerRun({ upload, actor, hashes }), { patience: 30_000 });
}

const underWay = new Map<string, Promise<string>>();

/**
 * Turns a received file into a run: checks its head, hashes it, stores it, and queues the reading.
 * A file that is refused is removed. @returns the run's id
 * @throws ServiceError invalid (not mzML), duplicate (names the run that holds the same bytes), gone
 */
export function completeUpload(upload: UploadRow, actor: Actor): Promise<string> {
  if (upload.state === 'complete' && upload.runId) return Promise.resolve(upload.runId);
  const going = underWay.get(upload.id);
  if (going) return going;
  const work = accept(upload, actor)
    .then(async (runId) => {
      await removeTransfer(upload.id);
      return runId;
    })
    .catch(async (error: unknown) => {
      // Any other failure (a database that is away) loses nothing: the bytes stay until the end is tried again.
      if (error instanceof ServiceError) await dropUpload(upload.id);
      throw error;
    })
    .finally(() => underWay.delete(upload.id));
  underWay.set(upload.id, work);
  return work;
}

/** Brings a transfer that the end of the process left behind to its end. */
async function tidyOne(upload: UploadRow): Promise<void> {
  if (underWay.has(upload.id)) return;
  if (await hasArrived(upload)) {
    const [person] = await database()
      .select({ id: users.id, name: users.name })
      .from(users)
      .where(eq(users.id, upload.userId));
    if (person) await completeUpload(upload, person);
  } else if (upload.createdAt.getTime() < Date.now() - TRANSFER_HOURS * 3_600_000) {
    await dropUpload(upload.id);
  }
}

/**
 * Completes transfers whose bytes are all here but whose end was interrupted, and gives up old ones.
 * A minute of age keeps it from meeting a request that is completing the same transfer.
 */
export async function tidyUploads(): Promise<void> {
  const open = await database()
    .select()
    .from(uploads)
    .where(and(eq(uploads.state, 'receiving'), lt(uploads.createdAt, sql`UTC_TIMESTAMP(3) - INTERVAL 1 MINUTE`)));
  for (const upload of open) {
    try {
      await tidyOne(upload);
    } catch (error) {
      if (!(error instanceof ServiceError)) throw error;
      log.info({ upload: upload.id, reason: error.code }, 'a received file was refused');
    }
  }
}
