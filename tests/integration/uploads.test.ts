import { eq } from 'drizzle-orm';
import { readdir, stat, truncate, writeFile } from 'node:fs/promises';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Actor } from '$lib/server/auth/authorize';
import { database } from '$lib/server/db';
import { auditLog, jobs, memberships, runs, uploads } from '$lib/server/db/schema';
import { ServiceError } from '$lib/server/errors';
import { handleTransfer, RUN_HEADER } from '$lib/server/services/upload-protocol';
import { tidyUploads } from '$lib/server/services/uploads';
import { fileStore } from '$lib/server/storage';
import { addPerson, addStudy, openStage, smallRun, type Stage } from './support/stage';

const LIMIT = 300_000;
const BASE = 'http://127.0.0.1:4173/api/uploads';
let stage: Stage;
let annotator: Actor;
let colleague: Actor;
let reviewer: Actor;
let stranger: Actor;
let place: { groupId: string; studyId: string };

beforeAll(async () => {
  stage = await openStage({ RIVENMARK_MAX_UPLOAD: String(LIMIT) });
  const db = database();
  annotator = await addPerson(db, 'annotator');
  colleague = await addPerson(db, 'colleague');
  reviewer = await addPerson(db, 'reviewer');
  stranger = await addPerson(db, 'stranger');
  place = await addStudy(db, [
    [annotator, 'annotator'],
    [colleague, 'annotator'],
    [reviewer, 'reviewer']
  ]);
  await addStudy(db, [[stranger, 'lead']]);
});
afterAll(() => stage.close());

const base64 = (text: string) => Buffer.from(text).toString('base64');

interface Answer {
  status: number;
  headers: Headers;
  text: string;
}

async function send(
  actor: Actor | null,
  method: string,
  id: string | null,
  headers: Record<string, string> = {},
  body?: Buffer
) {
  const init: RequestInit = { method, headers: { 'Tus-Resumable': '1.0.0', ...headers } };
  if (body) init.body = new Uint8Array(body);
  const request = new Request(id ? `${BASE}/${id}` : BASE, init);
  const response = await handleTransfer(actor, request, id);
  return { status: response.status, headers: response.headers, text: await response.text() } satisfies Answer;
}

interface Begin {
  name?: string;
  bytes: number;
  studyId?: string;
  actor?: Actor | null;
}

async function begin({ name = 'run.mzML', bytes, studyId = place.studyId, actor = annotator }: Begin): Promise<string> {
  const answer = await send(actor, 'POST', null, {
    'Upload-Length': String(bytes),
    'Upload-Metadata': `filename ${base64(name)},studyId ${base64(studyId)}`
  });
  expect(answer.status).toBe(201);
  return answer.headers.get('location')!.split('/').at(-1)!;
}

const piece = (id: string, offset: number, body: Buffer, actor: Actor = annotator) =>
  send(
    actor,
    'PATCH',
    id,
    { 'Upload-Offset': String(offset), 'Content-Type': 'application/offset+octet-stream' },
    body
  );

const sendAll = async (bytes: Buffer, name?: string, studyId?: string) => {
  const id = await begin({ name, bytes: bytes.length, studyId });
  return { id, answer: await piece(id, 0, bytes) };
};

const refusal = (work: Promise<unknown>): Promise<ServiceError> =>
  work.then(
    () => {
      throw new Error('it was not refused');
    },
    (error: unknown) => {
      expect(error).toBeInstanceOf(ServiceError);
      return error as ServiceError;
    }
  );

let made = 1;
/** A valid file that no other test has sent. */
const fresh = (): Buffer => Buffer.from(smallRun(++made));
const transfers = async () =>
  (await readdir(join(stage.folder, 'transfers'))).filter((name) => !name.endsWith('.json'));
const uploadOf = async (id: string) => (await database().select().from(uploads).where(eq(uploads.id, id)))[0];

describe('a transfer', () => {
  it('becomes a run with its hashes, a job and a line in the audit log, and leaves no other copy', async () => {
    const bytes = fresh();
    const { id, answer } = await sendAll(bytes);
    expect(answer.status).toBe(204);
    const runId = answer.headers.get(RUN_HEADER)!;
    const [run] = await database().select().from(runs).where(eq(runs.id, runId));
    expect(run).toMatchObject({ state: 'waiting', fileName: 'run.mzML', bytes: bytes.length });
    expect(run.sha256).toMatch(/^[0-9a-f]{64}$/);
    expect(await fileStore().size(run.storageKey)).toBe(bytes.length);
    const [job] = await database().select().from(jobs).where(eq(jobs.subjectId, runId));
    expect(job).toMatchObject({ kind: 'read-run', state: 'queued', studyId: place.studyId });
    const [line] = await database().select().from(auditLog).where(eq(auditLog.subjectId, runId));
    expect(line).toMatchObject({ action: 'run.uploaded', actorName: 'annotator' });
    expect(await transfers()).not.toContain(id);
  });

  it('goes on where it was interrupted', async () => {
    const bytes = fresh();
    const id = await begin({ bytes: bytes.length });
    await piece(id, 0, bytes.subarray(0, 1000));
    const head = await send(annotator, 'HEAD', id);
    expect(head.headers.get('upload-offset')).toBe('1000');
    expect((await piece(id, 500, bytes.subarray(500))).status).toBe(409);
    const last = await piece(id, 1000, bytes.subarray(1000));
    const [run] = await database()
      .select()
      .from(runs)
      .where(eq(runs.id, last.headers.get(RUN_HEADER)!));
    expect(await fileStore().size(run.storageKey)).toBe(bytes.length);
  });

  it('goes on from a piece that was cut by the end of the process', async () => {
    const bytes = fresh();
    const id = await begin({ bytes: bytes.length });
    await piece(id, 0, bytes.subarray(0, 2000));
    await truncate(join(stage.folder, 'transfers', id), 1234);
    const head = await send(annotator, 'HEAD', id);
    expect(head.headers.get('upload-offset')).toBe('1234');
    expect((await piece(id, 1234, bytes.subarray(1234))).headers.get(RUN_HEADER)).toBeTruthy();
  });

  it('that is complete answers again with the same run', async () => {
    const { id, answer } = await sendAll(fresh());
    const head = await send(annotator, 'HEAD', id);
    expect(head.headers.get(RUN_HEADER)).toBe(answer.headers.get(RUN_HEADER));
    expect(head.headers.get('upload-offset')).toBe(head.headers.get('upload-length'));
  });

  it.each(['transfers', 'store'])(
    'whose end was lost with the bytes in the %s is finished by the program itself',
    async (at) => {
      const bytes = fresh();
      const id = await begin({ bytes: bytes.length });
      await piece(id, 0, bytes.subarray(0, 100));
      const path = join(stage.folder, 'transfers', id);
      await writeFile(path, bytes);
      if (at === 'store') await fileStore().adopt(`runs/${id}`, path);
      await database()
        .update(uploads)
        .set({ createdAt: new Date(Date.now() - 120_000) })
        .where(eq(uploads.id, id));
      await tidyUploads();
      expect(await uploadOf(id)).toMatchObject({ state: 'complete' });
    }
  );

  it('that was given up long ago is removed', async () => {
    const bytes = fresh();
    const id = await begin({ bytes: bytes.length });
    await piece(id, 0, bytes.subarray(0, 100));
    await database()
      .update(uploads)
      .set({ createdAt: new Date(Date.now() - 50 * 3_600_000) })
      .where(eq(uploads.id, id));
    await tidyUploads();
    expect(await uploadOf(id)).toMatchObject({ state: 'cancelled' });
    expect(await transfers()).not.toContain(id);
  });

  it('that is cancelled is removed and cannot go on', async () => {
    const bytes = fresh();
    const id = await begin({ bytes: bytes.length });
    await piece(id, 0, bytes.subarray(0, 100));
    expect((await send(annotator, 'DELETE', id)).status).toBe(204);
    expect(await transfers()).not.toContain(id);
    expect((await refusal(piece(id, 100, bytes.subarray(100)))).code).toBe('gone');
  });
});

describe('a file that cannot be used', () => {
  it('twice in one study is refused by its hash, the first run is named, the bytes are removed', async () => {
    const bytes = fresh();
    const first = await sendAll(bytes, 'first name.mzML');
    const { id, answer } = await sendAll(bytes, 'other name.mzML');
    expect(answer.status).toBe(409);
    const told = JSON.parse(answer.text) as { error: string; code: string; details: { runId: string } };
    expect(told).toMatchObject({ code: 'duplicate', details: { runId: first.answer.headers.get(RUN_HEADER) } });
    expect(told.error).toContain('first name.mzML');
    expect(await transfers()).not.toContain(id);
    expect(await fileStore().size(`runs/${id}`)).toBeNull();
    expect(await uploadOf(id)).toMatchObject({ state: 'cancelled' });
  });

  it('twice at the same moment makes one run', async () => {
    const bytes = fresh();
    const ids = [await begin({ bytes: bytes.length }), await begin({ bytes: bytes.length })];
    const answers = await Promise.all(ids.map((id) => piece(id, 0, bytes)));
    expect(answers.map((answer) => answer.status).sort()).toEqual([204, 409]);
  });

  it('the same file in another study is another run', async () => {
    const bytes = fresh();
    await sendAll(bytes);
    const other = await addStudy(database(), [[annotator, 'annotator']]);
    expect((await sendAll(bytes, 'run.mzML', other.studyId)).answer.status).toBe(204);
  });

  it.each([
    ['text', Buffer.from('m/z;intensity\n100;5\n'), /does not begin with XML/],
    ['other XML', Buffer.from('<?xml version="1.0"?><mzXML><msRun/></mzXML>'), /XML, but not mzML/],
    ['other XML in gzip', gzipSync(Buffer.from('<html></html>')), /XML, but not mzML/],
    ['damaged gzip', Buffer.concat([Buffer.from([0x1f, 0x8b, 8, 0]), Buffer.alloc(50, 0xff)]), /cannot be inflated/],
    ['zeros', Buffer.alloc(5000), /does not begin with XML/]
  ])('%s under an mzML name is refused with words, and nothing is kept', async (_name, bytes, words) => {
    const { id, answer } = await sendAll(bytes);
    expect(answer.status).toBe(400);
    expect((JSON.parse(answer.text) as { error: string }).error).toMatch(words);
    expect(await transfers()).not.toContain(id);
    expect(await fileStore().size(`runs/${id}`)).toBeNull();
  });

  it('is accepted in gzip and after a comment', async () => {
    const commented = Buffer.from(fresh().toString().replace('?>', '?>\n<!-- made by hand -->'));
    expect((await sendAll(gzipSync(commented), 'run.MZML.GZ')).answer.status).toBe(204);
  });

  it('too large is refused before its first byte, with the limit and a cure', async () => {
    const error = await refusal(begin({ bytes: LIMIT + 1 }));
    expect(error.code).toBe('too-large');
    expect(error.message).toMatch(/at most .*gzip/);
  });

  it('that brings more bytes than announced is refused', async () => {
    const bytes = fresh();
    const id = await begin({ bytes: 1000 });
    expect((await piece(id, 0, bytes)).status).toBe(413);
  });

  it.each([
    ['empty', { bytes: 0 }],
    ['without a study', { bytes: 10, studyId: 'x' }],
    ['of another kind', { bytes: 10, name: 'notes.txt' }],
    ['whose name is only an ending', { bytes: 10, name: '.mzML' }],
    ['with a name that hides its ending', { bytes: 10, name: 'run.mzML/../evil.exe' }]
  ])('%s is refused before its first byte', async (_name, what) => {
    expect((await refusal(begin(what))).code).toBe('invalid');
  });

  it.each([
    ['../../etc/run.mzML', 'run.mzML'],
    ['C:\\data\\run.mzML', 'run.mzML'],
    ['/tmp/x/../a b.mzML.gz', 'a b.mzML.gz'],
    ['a\u0000b\u202Ec\n.mzML', 'abc.mzML']
  ])('keeps of the name %j only %j', async (name, kept) => {
    const id = await begin({ name, bytes: 10 });
    expect((await uploadOf(id)).fileName).toBe(kept);
    expect(await transfers()).toContain(id);
  });
});

describe('authorisation', () => {
  it.each([
    ['a person who is not signed in', (): Actor | null => null, 'unauthenticated'],
    ['a member of another group', (): Actor | null => stranger, 'not-found'],
    ['a reviewer', (): Actor | null => reviewer, 'forbidden']
  ] as const)('%s begins no transfer', async (_name, who, code) => {
    const { length } = await database().select().from(uploads);
    expect((await refusal(begin({ bytes: 10, actor: who() }))).code).toBe(code);
    expect(await database().select().from(uploads)).toHaveLength(length);
  });

  it.each(['HEAD', 'PATCH', 'DELETE'])('nobody but its owner may %s a transfer', async (method) => {
    const bytes = fresh();
    const id = await begin({ bytes: bytes.length });
    const headers = { 'Upload-Offset': '0', 'Content-Type': 'application/offset+octet-stream' };
    const body = method === 'PATCH' ? bytes : undefined;
    for (const other of [colleague, reviewer, stranger])
      expect((await refusal(send(other, method, id, headers, body))).code).toBe('not-found');
    expect((await refusal(send(null, method, id, headers, body))).code).toBe('unauthenticated');
    expect((await stat(join(stage.folder, 'transfers', id))).size).toBe(0);
  });

  it('a person who lost the role cannot finish', async () => {
    const bytes = fresh();
    const person = await addPerson(database(), 'leaver');
    const own = await addStudy(database(), [[person, 'annotator']]);
    const id = await begin({ bytes: bytes.length, actor: person, studyId: own.studyId });
    await database().update(memberships).set({ role: 'guest' }).where(eq(memberships.userId, person.id));
    expect((await refusal(piece(id, 0, bytes, person))).code).toBe('not-found');
  });

  it.each(['..%2f..%2fetc', '../x', 'x'.repeat(36), '.json'])('no other file is reached by the id %j', async (id) => {
    expect((await refusal(send(annotator, 'HEAD', id))).code).toBe('not-found');
  });
});
