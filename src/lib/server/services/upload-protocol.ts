import { FileStore } from '@tus/file-store';
import { Metadata, Server } from '@tus/server';
import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import { newUploadSchema } from '$lib/schema/upload';
import type { Actor } from '../auth/authorize';
import { config } from '../config';
import { parse } from '../edge';
import { ServiceError, statusOf } from '../errors';
import { isTransferId, transferFolder } from '../storage/transfers';
import {
  admitUpload,
  completeUpload,
  dropUpload,
  hasArrived,
  openUpload,
  requireUpload,
  TRANSFER_HOURS
} from './uploads';

/** Header that names the run once the last piece has arrived. */
export const RUN_HEADER = 'Rivenmark-Run';
const PATH = '/api/uploads';

/** Who sent a request; the protocol's own hooks only see the request. */
const senders = new WeakMap<Request, Actor>();

function makeServer(): Server {
  const datastore = new FileStore({
    directory: transferFolder(),
    expirationPeriodInMilliseconds: TRANSFER_HOURS * 3_600_000
  });
  return new Server({
    path: PATH,
    datastore,
    relativeLocation: true,
    maxSize: config().RIVENMARK_MAX_UPLOAD,
    namingFunction: () => randomUUID(),
    exposedHeaders: [RUN_HEADER],
    // Hidden folders and names never reach the disk: only the id does.
    onUploadCreate: async (request, upload) => {
      const { filename = '', studyId = '' } = upload.metadata ?? {};
      const input = parse(newUploadSchema, { filename, studyId, bytes: upload.size });
      await openUpload(senders.get(request) ?? null, upload.id, input);
      return { metadata: { filename: input.filename, studyId: input.studyId } };
    },
    onUploadFinish: async (request, upload) => {
      const actor = senders.get(request) ?? null;
      const row = await requireUpload(actor, upload.id);
      const runId = await completeUpload(row, actor!);
      return { headers: { [RUN_HEADER]: runId } };
    },
    onResponseError: (_request, error) =>
      error instanceof ServiceError ? { status_code: statusOf(error), body: bodyOf(error) } : undefined
  });
}

const bodyOf = (error: ServiceError): string =>
  JSON.stringify({ error: error.message, code: error.code, cure: error.cure, details: error.details });

let server: Server | null = null;

/** What a creation says of its file. @throws ServiceError invalid */
function announced(request: Request): z.output<typeof newUploadSchema> {
  const length = request.headers.get('upload-length');
  if (!length || !/^\d{1,15}$/.test(length))
    throw new ServiceError('invalid', 'The size of the file is missing.', 'Send it as Upload-Length.');
  let metadata: Record<string, string | null>;
  try {
    metadata = Metadata.parse(request.headers.get('upload-metadata') ?? undefined) ?? {};
  } catch {
    throw new ServiceError('invalid', 'The name of the file cannot be read.', 'Send it as Upload-Metadata.');
  }
  const { filename = '', studyId = '' } = metadata;
  return parse(newUploadSchema, { filename, studyId, bytes: Number(length) });
}

/**
 * Answers one request of the open tus protocol (creation, HEAD, PATCH, termination).
 * Every request is authorised: a transfer belongs to the person who began it, and only while they may upload to its study.
 * @param id of the transfer; null for a creation
 * @throws ServiceError
 */
export async function handleTransfer(actor: Actor | null, request: Request, id: string | null): Promise<Response> {
  if (!actor) throw new ServiceError('unauthenticated', 'You are not signed in.', 'Sign in and go on.');
  senders.set(request, actor);
  server ??= makeServer();
  if (id === null) {
    // Before the protocol's own server sees it: a refusal then costs no byte of the file.
    await admitUpload(actor, announced(request));
    return server.handleWeb(request);
  }
  if (!isTransferId(id)) throw new ServiceError('not-found', 'There is no such transfer.', 'Choose the file again.');
  const upload = await requireUpload(actor, id);
  if (request.method === 'HEAD' && (upload.state === 'complete' || (await hasArrived(upload))))
    return finished(upload.bytes, await completeUpload(upload, actor));
  if (request.method === 'DELETE') {
    if (upload.state === 'complete')
      throw new ServiceError('conflict', 'The file has arrived already.', 'Delete the run instead.');
    const response = await server.handleWeb(request);
    await dropUpload(id);
    return response;
  }
  return server.handleWeb(request);
}

/** A transfer whose bytes have become a run: the client learns that there is nothing left to send. */
const finished = (bytes: number, runId: string): Response =>
  new Response(null, {
    status: 200,
    headers: {
      'Tus-Resumable': '1.0.0',
      'Cache-Control': 'no-store',
      'Upload-Offset': String(bytes),
      'Upload-Length': String(bytes),
      [RUN_HEADER]: runId
    }
  });
