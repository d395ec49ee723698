import { join } from 'node:path';
import { config, type Config } from '../config';
import type { FileStore } from './file-store';
import { FolderStore } from './folder-store';
import { S3Store } from './s3-store';

export { MissingFile, type FileStore } from './file-store';

/** The store that the settings name: a bucket where S3_BUCKET is set, else the folder RIVENMARK_FILES/store. */
export function storeFor(settings: Config): FileStore {
  if (!settings.S3_BUCKET) return new FolderStore(join(settings.RIVENMARK_FILES, 'store'));
  return new S3Store({
    bucket: settings.S3_BUCKET,
    region: settings.S3_REGION,
    endpoint: settings.S3_ENDPOINT,
    keyId: settings.S3_KEY_ID,
    secret: settings.S3_SECRET
  });
}

let store: FileStore | null = null;

/** The process's store. */
export const fileStore = (): FileStore => (store ??= storeFor(config()));
