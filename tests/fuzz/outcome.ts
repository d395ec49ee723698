/** What became of a file: its scans and warnings, or the typed error. */
import { nodeReading } from '../../src/lib/node/reading';
import { CoreError } from '../../src/lib/core/errors';
import { readMzml, type MzmlEvent, type ReadOptions } from '../../src/lib/core/mzml';

export interface Outcome {
  events: MzmlEvent[];
  error: Pick<CoreError, 'code' | 'message' | 'place' | 'cure'> | null;
}

async function* inPieces(bytes: Uint8Array, size: number): AsyncGenerator<Uint8Array> {
  for (let at = 0; at < bytes.length; at += size) yield bytes.subarray(at, at + size);
}

/**
 * Reads bytes to the end.
 * @throws everything that is no CoreError: the reader may throw nothing else
 */
export async function outcomeOf(bytes: Uint8Array, options: ReadOptions = {}, size = 1 << 16): Promise<Outcome> {
  const outcome: Outcome = { events: [], error: null };
  try {
    for await (const event of readMzml(inPieces(bytes, size), { ...nodeReading, ...options }))
      outcome.events.push(event);
  } catch (error) {
    if (!(error instanceof CoreError)) throw error;
    const { code, message, place, cure } = error;
    outcome.error = { code, message, place, cure };
  }
  return outcome;
}
