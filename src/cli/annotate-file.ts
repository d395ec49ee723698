/** One file: read, assemble, suggest. */
import { createHash } from 'node:crypto';
import { basename } from 'node:path';
import { CoreError } from '../lib/core/errors';
import type { AssembledTree, RunInfo, SuggestOptions } from '../lib/core/model';
import { readRun } from '../lib/core/mzml';
import { suggest } from '../lib/core/suggest';
import { assemble } from '../lib/core/tree';
import { fileJson, treeJson, warningText, type TreeJson } from './output';
import { nodeReading } from '../lib/node/reading';
import { hashedFile } from './platform';

export interface AnnotateOptions {
  /** m/z; null for all precursor ions. */
  precursorMz: number | null;
  /** one spectrum per isolation path whatever the collision energy. */
  mergeEnergies: boolean;
  suggest: SuggestOptions;
}

/** A file as far as its trees, before anything is suggested. */
export interface AssembledFile {
  file: string;
  sha1: string;
  info: RunInfo;
  trees: AssembledTree[];
  warnings: string[];
}

export interface AnnotatedTree {
  json: TreeJson;
  /** plain words about what could not be computed. */
  warnings: string[];
}

/** Reads a file and assembles its trees. Errors as for `readMzml`. */
export async function assembleFile(path: string, options: AnnotateOptions): Promise<AssembledFile> {
  const hash = createHash('sha1');
  const { scans, summary } = await readRun(hashedFile(path, hash), { ...nodeReading });
  const wanted = options.precursorMz;
  const assembly = assemble(scans, summary.info, {
    separateEnergies: !options.mergeEnergies,
    ...(wanted === null ? {} : { precursorMz: wanted })
  });
  const warnings = [...summary.warnings, ...assembly.warnings].map(warningText);
  if (assembly.orphans.length > 0) {
    const [first] = assembly.orphans;
    warnings.push(
      `${assembly.orphans.length} MSn scans belong to no tree, the first is ${first.scanId}: ${first.reason}.`
    );
  }
  if (assembly.trees.length === 0) {
    warnings.push(
      wanted === null
        ? 'The run holds no MSn scan that names its precursor ion, so there is no tree.'
        : `No precursor ion lies within the isolation window of m/z ${wanted}.`
    );
  }
  return { file: basename(path), sha1: hash.digest('hex'), info: summary.info, trees: assembly.trees, warnings };
}

/** Suggests formulas for one tree; what cannot be computed becomes a warning and the tree stays. */
export function annotateTree(tree: AssembledTree, info: RunInfo, options: AnnotateOptions): AnnotatedTree {
  const name = `Precursor ion m/z ${tree.precursorMz.toFixed(4)}`;
  try {
    const suggestion = suggest(tree, { ...options.suggest, ionSource: info.ionSource });
    return { json: treeJson(tree, suggestion), warnings: suggestion.notes.map((note) => `${name}: ${note}`) };
  } catch (error) {
    if (!(error instanceof CoreError)) throw error;
    return { json: treeJson(tree, null), warnings: [`${name}: ${error.message}`] };
  }
}

/** Puts the parts of a file together. */
export function finishFile(file: AssembledFile, trees: readonly AnnotatedTree[]): string {
  const warnings = [...file.warnings, ...trees.flatMap((tree) => tree.warnings)];
  return JSON.stringify(
    fileJson(
      file.file,
      file.sha1,
      file.info,
      trees.map((tree) => tree.json),
      warnings
    )
  );
}
