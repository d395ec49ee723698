/** What a Web Worker does in the test of the core: the whole way from the bytes of a file to proposed formulas. */
import { readRun } from '../../../src/lib/core/mzml';
import { defaultSuggestOptions, suggest } from '../../../src/lib/core/suggest';
import { assemble } from '../../../src/lib/core/tree';

async function* pieces(bytes: Uint8Array): AsyncGenerator<Uint8Array> {
  // An odd size, so that cuts fall anywhere.
  for (let at = 0; at < bytes.length; at += 4099) yield bytes.subarray(at, at + 4099);
}

/** Typed arrays as plain ones, so that both sides can be compared as text. */
const plain = (_key: string, value: unknown): unknown =>
  ArrayBuffer.isView(value) ? Array.from(value as Float64Array) : value;

/** Reads a file, assembles its trees and proposes their formulas. @returns all of it as JSON */
export async function answerFor(bytes: Uint8Array): Promise<string> {
  const { scans, summary } = await readRun(pieces(bytes));
  const assembly = assemble(scans, summary.info);
  const suggestions = assembly.trees.map((tree) =>
    suggest(tree, { ...defaultSuggestOptions(), ionSource: summary.info.ionSource })
  );
  return JSON.stringify({ summary, assembly, suggestions }, plain);
}
