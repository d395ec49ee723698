/** From the paths of the call to the files to read. */
import { readdirSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { CallError } from './arguments';

export interface Inputs {
  files: string[];
  /** several files or a folder: one object a line, and a file that fails does not end the call. */
  lines: boolean;
}

const MZML = /\.mzml(\.gz)?$/i;

function isFolder(path: string): boolean {
  return statSync(path, { throwIfNoEntry: false })?.isDirectory() ?? false;
}

function filesIn(folder: string): string[] {
  const names = readdirSync(folder, { withFileTypes: true })
    .filter((entry) => MZML.test(entry.name) && !entry.isDirectory())
    .map((entry) => entry.name)
    .sort();
  if (names.length === 0) throw new CallError(`The folder ${folder} holds no .mzML or .mzML.gz file`);
  return names.map((name) => join(folder, name));
}

/**
 * Lists the files to read, folders opened in place with their files sorted by name.
 * @throws CallError when a single file does not exist or a folder holds no mzML
 */
export function listInputs(paths: readonly string[]): Inputs {
  const folders = paths.map(isFolder);
  const lines = paths.length > 1 || folders[0];
  if (!lines && statSync(paths[0], { throwIfNoEntry: false }) === undefined) {
    throw new CallError(`There is no file ${paths[0]}`);
  }
  return { files: paths.flatMap((path, i) => (folders[i] ? filesIn(path) : [path])), lines };
}
