import { accessSync, constants } from 'node:fs';
import { delimiter, join } from 'node:path';

/** Debian keeps servers in folders that are not on an ordinary user's PATH. */
const MORE = ['/usr/sbin', '/usr/local/sbin', '/sbin', '/usr/bin'];

/**
 * Full path of the first of some programs that is installed, or null.
 * @param {...string} names
 * @returns {string | null}
 */
export function findProgram(...names) {
  const folders = [...(process.env.PATH ?? '').split(delimiter).filter(Boolean), ...MORE];
  for (const name of names)
    for (const folder of folders) {
      const path = join(folder, name);
      try {
        accessSync(path, constants.X_OK);
        return path;
      } catch {
        continue;
      }
    }
  return null;
}
