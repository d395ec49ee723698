/** What a worker thread does for the command, and the messages between them. */
import { basename } from 'node:path';
import { CoreError } from '../lib/core/errors';
import type { AssembledTree, RunInfo } from '../lib/core/model';
import { annotateTree, assembleFile, finishFile, type AnnotatedTree, type AnnotateOptions } from './annotate-file';
import { errorJson } from './output';

export type Task =
  | { kind: 'file'; path: string; options: AnnotateOptions }
  | { kind: 'tree'; tree: AssembledTree; info: RunInfo; options: AnnotateOptions };

export type Result = { kind: 'file'; line: string; failed: string | null } | { kind: 'tree'; tree: AnnotatedTree };

/** One line that says what is wrong with the input, or null when the error is not the input's. */
export function inputError(error: unknown): string | null {
  if (error instanceof CoreError) {
    const places = [
      error.place.byte === null ? '' : `byte ${error.place.byte}`,
      error.place.scan === null ? '' : `scan ${error.place.scan}`
    ].filter(Boolean);
    const where = places.length > 0 ? ` (${places.join(', ')})` : '';
    return `${error.message}${where}.${error.cure ? ` ${error.cure}` : ''}`;
  }
  const code = error instanceof Error && 'code' in error ? String(error.code) : '';
  if (code === 'ENOENT') return 'There is no such file.';
  if (code === 'EACCES' || code === 'EPERM') return 'The file may not be read.';
  if (code === 'EISDIR') return 'It is a folder.';
  return code === 'EIO' ? 'The file cannot be read from its disk.' : null;
}

/** Does one task. Errors of the input are results; others are thrown. */
export async function perform(task: Task): Promise<Result> {
  if (task.kind === 'tree') return { kind: 'tree', tree: annotateTree(task.tree, task.info, task.options) };
  try {
    const file = await assembleFile(task.path, task.options);
    const trees = file.trees.map((tree) => annotateTree(tree, file.info, task.options));
    return { kind: 'file', line: finishFile(file, trees), failed: null };
  } catch (error) {
    const message = inputError(error);
    if (message === null) throw error;
    return { kind: 'file', line: JSON.stringify(errorJson(basename(task.path), message)), failed: message };
  }
}
