import { createRequire } from 'node:module';
import { createHash } from 'node:crypto';
import { mkdtemp, readdir, rm, stat, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { Readable } from 'node:stream';
import { buffer } from 'node:stream/consumers';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { MissingFile, type FileStore } from '$lib/server/storage/file-store';
import { FolderStore } from '$lib/server/storage/folder-store';
import { S3Store } from '$lib/server/storage/s3-store';

interface FakeS3 {
  run(): Promise<{ port: number }>;
  close(): Promise<void>;
}
type FakeS3Class = new (options: Record<string, unknown>) => FakeS3;

const LARGE = 20 * 2 ** 20 + 7;
let folder: string;
let fake: FakeS3;
const stores: Record<string, FileStore> = {};

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'rivenmark-store-'));
  stores.folder = new FolderStore(join(folder, 'own'));
  const Fake = createRequire(import.meta.url)('s3rver') as FakeS3Class;
  const options = { address: '127.0.0.1', port: 0, silent: true, directory: join(folder, 's3') };
  fake = new Fake({ ...options, configureBuckets: [{ name: 'runs-bucket', configs: [] }] });
  const { port } = await fake.run();
  stores.S3 = new S3Store({
    bucket: 'runs-bucket',
    region: 'us-east-1',
    endpoint: `http://127.0.0.1:${port}`,
    keyId: 'S3RVER',
    secret: 'S3RVER'
  });
});
afterAll(async () => {
  await fake.close();
  await rm(folder, { recursive: true, force: true });
});

const pseudo = (bytes: number): Buffer => {
  const out = Buffer.alloc(bytes);
  for (let i = 0, x = 1; i < bytes; i++) out[i] = (x = (x * 1103515245 + 12345) & 0x7fffffff) >> 16;
  return out;
};
const sha = (bytes: Buffer) => createHash('sha256').update(bytes).digest('hex');

describe.each(['folder', 'S3'])('the %s store', (kind) => {
  it('gives back exactly the bytes of a large stream', async () => {
    const bytes = pseudo(LARGE);
    const pieces = Readable.from([bytes.subarray(0, 9_000_001), bytes.subarray(9_000_001)]);
    await stores[kind].put('runs/large', pieces, LARGE);
    expect(await stores[kind].size('runs/large')).toBe(LARGE);
    expect(sha(await buffer(await stores[kind].open('runs/large')))).toBe(sha(bytes));
  });

  it('opens a range, both ends included, or from a byte on', async () => {
    await stores[kind].put('runs/small', Readable.from([Buffer.from('0123456789')]), 10);
    expect((await buffer(await stores[kind].open('runs/small', { start: 2, end: 4 }))).toString()).toBe('234');
    expect((await buffer(await stores[kind].open('runs/small', { start: 7 }))).toString()).toBe('789');
  });

  it.each([
    ['shorter', 11],
    ['longer', 9]
  ])('keeps nothing of a stream that is %s than announced the other way', async (_name, announced) => {
    const put = stores[kind].put('runs/wrong', Readable.from([Buffer.from('0123456789')]), announced);
    await expect(put).rejects.toThrow(/bytes/);
    expect(await stores[kind].size('runs/wrong')).toBeNull();
  });

  it('keeps nothing of a stream that breaks', async () => {
    const broken = Readable.from(
      (async function* () {
        yield Buffer.alloc(1000);
        throw new Error('cut off');
      })()
    );
    await expect(stores[kind].put('runs/broken', broken, 5000)).rejects.toThrow('cut off');
    expect(await stores[kind].size('runs/broken')).toBeNull();
  });

  it('takes over a local file', async () => {
    const path = join(folder, `local-${kind}`);
    await writeFile(path, 'content');
    await stores[kind].adopt('runs/adopted', path);
    await expect(stat(path)).rejects.toThrow('ENOENT');
    expect((await buffer(await stores[kind].open('runs/adopted'))).toString()).toBe('content');
  });

  it('deletes, and says that a file is missing', async () => {
    await stores[kind].put('runs/gone', Readable.from([Buffer.from('x')]), 1);
    await stores[kind].delete('runs/gone');
    await stores[kind].delete('runs/gone');
    expect(await stores[kind].size('runs/gone')).toBeNull();
    await expect(stores[kind].open('runs/gone')).rejects.toBeInstanceOf(MissingFile);
  });

  it.each([
    '../outside',
    'runs/../../x',
    '/etc/passwd',
    'runs//x',
    'runs/.hidden',
    'Runs/x',
    'runs/a b',
    'runs/x\0',
    ''
  ])('refuses the key %j', async (key) => {
    await expect((async () => stores[kind].size(key))()).rejects.toBeInstanceOf(RangeError);
    await expect((async () => stores[kind].put(key, Readable.from(['x']), 1))()).rejects.toBeInstanceOf(RangeError);
  });
});

describe('the folder store', () => {
  it('leaves no unfinished file behind', async () => {
    const names = await readdir(join(folder, 'own', 'runs'));
    expect(names.filter((name) => name.startsWith('.'))).toEqual([]);
  });
});
