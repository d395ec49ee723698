import type { Actor } from '../auth/authorize';
import { config } from '../config';
import { ServiceError } from '../errors';
import { handleTransfer, RUN_HEADER } from '../services/upload-protocol';

const base64 = (text: string) => Buffer.from(text).toString('base64');

async function answered(actor: Actor, id: string | null, request: Request): Promise<Response> {
  const response = await handleTransfer(actor, request, id);
  if (response.ok) return response;
  throw new ServiceError('unavailable', `A file of the demo was refused: ${await response.text()}`);
}

/**
 * Sends a file the way a browser does: a transfer is opened, then its bytes follow.
 * @returns id of the run
 * @throws ServiceError as the transfer service
 */
export async function sendFile(actor: Actor, studyId: string, fileName: string, bytes: Uint8Array): Promise<string> {
  const address = `${new URL(config().ORIGIN).origin}/api/uploads`;
  const opened = await answered(
    actor,
    null,
    new Request(address, {
      method: 'POST',
      headers: {
        'Tus-Resumable': '1.0.0',
        'Upload-Length': String(bytes.length),
        'Upload-Metadata': `filename ${base64(fileName)},studyId ${base64(studyId)}`
      }
    })
  );
  const id = opened.headers.get('location')?.split('/').at(-1) ?? '';
  const sent = await answered(
    actor,
    id,
    new Request(`${address}/${id}`, {
      method: 'PATCH',
      headers: {
        'Tus-Resumable': '1.0.0',
        'Upload-Offset': '0',
        'Content-Type': 'application/offset+octet-stream'
      },
      body: new Uint8Array(bytes)
    })
  );
  const runId = sent.headers.get(RUN_HEADER);
  if (!runId) throw new ServiceError('unavailable', 'The transfer of a demo file ended without a run.');
  return runId;
}
