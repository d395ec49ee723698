import { randomUUID } from 'node:crypto';
import { createReadStream, createWriteStream } from 'node:fs';
import { copyFile, mkdir, open, rename, rm, stat } from 'node:fs/promises';
import { dirname, join } from 'node:path';
import type { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { checkKey, MissingFile, type ByteRange, type FileStore } from './file-store';

const PIECE = 1 << 20;

const hasCode = (error: unknown, code: string): boolean => (error as NodeJS.ErrnoException)?.code === code;

/** Files in a folder of this machine. Writes go to a hidden neighbour first and are renamed when complete. */
export class FolderStore implements FileStore {
  constructor(private readonly root: string) {}

  private path(key: string): string {
    return join(this.root, checkKey(key));
  }

  private async finish(part: string, path: string): Promise<void> {
    const file = await open(part, 'r+');
    try {
      await file.sync();
    } finally {
      await file.close();
    }
    await rename(part, path);
  }

  async put(key: string, source: Readable, bytes: number): Promise<void> {
    const path = this.path(key);
    const part = join(dirname(path), `.${randomUUID()}`);
    await mkdir(dirname(path), { recursive: true });
    try {
      await pipeline(source, createWriteStream(part, { mode: 0o600 }));
      const { size } = await stat(part);
      if (size !== bytes) throw new RangeError(`The stream ended after ${size} of ${bytes} bytes.`);
      await this.finish(part, path);
    } catch (error) {
      await rm(part, { force: true });
      throw error;
    }
  }

  async adopt(key: string, path: string): Promise<void> {
    const target = this.path(key);
    await mkdir(dirname(target), { recursive: true });
    try {
      await this.finish(path, target);
    } catch (error) {
      if (!hasCode(error, 'EXDEV')) throw error;
      // The transfers lie on another file system: copy beside the target, then rename.
      const part = join(dirname(target), `.${randomUUID()}`);
      await copyFile(path, part);
      await this.finish(part, target);
      await rm(path, { force: true });
    }
  }

  async open(key: string, range?: ByteRange): Promise<Readable> {
    const path = this.path(key);
    if ((await this.size(key)) === null) throw new MissingFile(key);
    return createReadStream(path, { ...range, highWaterMark: PIECE });
  }

  async size(key: string): Promise<number | null> {
    try {
      return (await stat(this.path(key))).size;
    } catch (error) {
      if (hasCode(error, 'ENOENT')) return null;
      throw error;
    }
  }

  async delete(key: string): Promise<void> {
    await rm(this.path(key), { force: true });
  }
}
