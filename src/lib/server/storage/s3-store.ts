import { DeleteObjectCommand, GetObjectCommand, HeadObjectCommand, S3Client } from '@aws-sdk/client-s3';
import { Upload } from '@aws-sdk/lib-storage';
import { createReadStream } from 'node:fs';
import { rm, stat } from 'node:fs/promises';
import { Readable, Transform } from 'node:stream';
import { checkKey, MissingFile, type ByteRange, type FileStore } from './file-store';

export interface S3Settings {
  bucket: string;
  region: string;
  endpoint?: string;
  keyId?: string;
  secret?: string;
}

const PART = 16 << 20;

const absent = (error: unknown): boolean => error instanceof Error && ['NotFound', 'NoSuchKey'].includes(error.name);

/** Files in a bucket that speaks the S3 protocol. */
export class S3Store implements FileStore {
  private readonly client: S3Client;

  constructor(private readonly settings: S3Settings) {
    const { keyId, secret } = settings;
    this.client = new S3Client({
      region: settings.region,
      endpoint: settings.endpoint,
      forcePathStyle: true,
      // Trailing checksums are stored as part of the object by servers that do not know them.
      requestChecksumCalculation: 'WHEN_REQUIRED',
      responseChecksumValidation: 'WHEN_REQUIRED',
      ...(keyId && secret ? { credentials: { accessKeyId: keyId, secretAccessKey: secret } } : {})
    });
  }

  private object(key: string) {
    return { Bucket: this.settings.bucket, Key: checkKey(key) };
  }

  async put(key: string, source: Readable, bytes: number): Promise<void> {
    const object = this.object(key);
    let seen = 0;
    const counted = new Transform({
      transform(chunk: Buffer, _encoding, next) {
        seen += chunk.length;
        next(seen > bytes ? new RangeError(`The stream goes on after ${bytes} bytes.`) : null, chunk);
      },
      flush: (next) => next(seen < bytes ? new RangeError(`The stream ended after ${seen} of ${bytes} bytes.`) : null)
    });
    source.once('error', (error) => counted.destroy(error));
    const body = source.pipe(counted);
    // Parts are only joined to an object when all of them arrived; a failure aborts the whole.
    const upload = new Upload({ client: this.client, params: { ...object, Body: body }, partSize: PART, queueSize: 2 });
    await upload.done();
  }

  async adopt(key: string, path: string): Promise<void> {
    const { size } = await stat(path);
    await this.put(key, createReadStream(path, { highWaterMark: 1 << 20 }), size);
    await rm(path, { force: true });
  }

  async open(key: string, range?: ByteRange): Promise<Readable> {
    const Range = range ? `bytes=${range.start}-${range.end ?? ''}` : undefined;
    try {
      const { Body } = await this.client.send(new GetObjectCommand({ ...this.object(key), Range }));
      if (Body instanceof Readable) return Body;
    } catch (error) {
      if (!absent(error)) throw error;
    }
    throw new MissingFile(key);
  }

  async size(key: string): Promise<number | null> {
    try {
      const head = await this.client.send(new HeadObjectCommand(this.object(key)));
      return head.ContentLength ?? null;
    } catch (error) {
      if (absent(error)) return null;
      throw error;
    }
  }

  async delete(key: string): Promise<void> {
    await this.client.send(new DeleteObjectCommand(this.object(key)));
  }
}
