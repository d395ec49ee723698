import { join } from 'node:path';
import { config } from '../config';

/** Folder of the transfers under way. */
export const transferFolder = (): string => join(config().RIVENMARK_FILES, 'transfers');

const ID = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/;

/** Whether an id is one that we gave out: a lower-case UUID. */
export const isTransferId = (id: string): boolean => ID.test(id);

/** File that collects the bytes of a transfer. @throws RangeError for an id that we did not give out */
export function transferPath(id: string): string {
  if (!isTransferId(id)) throw new RangeError('This is no id of a transfer.');
  return join(transferFolder(), id);
}
