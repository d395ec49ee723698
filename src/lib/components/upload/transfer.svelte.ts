import { defaultOptions, DetailedError, Upload, type HttpResponse } from 'tus-js-client';
import { UPLOAD_CHUNK, uploadProblem } from '$lib/schema/upload';

export type TransferState = 'queued' | 'sending' | 'checking' | 'paused' | 'done' | 'failed' | 'refused' | 'cancelled';

interface Refusal {
  error: string;
  cure?: string | null;
  details?: { runId?: string } | null;
}

/** Pauses before a piece is sent again, ms; the connection may be away for about a minute. */
const RETRIES = [500, 1000, 2000, 4000, 8000, 15_000, 30_000];

/** The same file of the same study is recognised after a reload, so that its transfer goes on where it stopped. */
const fingerprint = (file: File, studyId: string): string =>
  ['rivenmark', studyId, file.name, file.size, file.lastModified].join('|');

function refusalOf(error: Error): Refusal | null {
  const response = error instanceof DetailedError ? error.originalResponse : null;
  if (!response) return null;
  try {
    const body = JSON.parse(response.getBody()) as Partial<Refusal>;
    return typeof body.error === 'string' ? { ...body, error: body.error } : null;
  } catch {
    return null;
  }
}

/** One file on its way to the server. */
export class Transfer {
  state = $state<TransferState>('queued');
  sent = $state(0);
  message = $state<string | null>(null);
  cure = $state<string | null>(null);
  /** the run that it became, or the one that holds the same file already. */
  runId = $state<string | null>(null);
  readonly name: string;
  readonly size: number;
  private upload: Upload | null = null;
  private found: string | null = null;

  constructor(
    private readonly file: File,
    private readonly studyId: string,
    maxBytes: number,
    private readonly changed: (transfer: Transfer) => void
  ) {
    this.name = file.name;
    this.size = file.size;
    const problem = uploadProblem(file, maxBytes);
    if (problem) this.set('refused', problem);
  }

  private set(state: TransferState, message: string | null = null, cure: string | null = null): void {
    this.state = state;
    this.message = message;
    this.cure = cure;
    this.changed(this);
  }

  private make(): Upload {
    return new Upload(this.file, {
      endpoint: '/api/uploads',
      chunkSize: UPLOAD_CHUNK,
      retryDelays: RETRIES,
      metadata: { filename: this.name, studyId: this.studyId },
      fingerprint: async (file) => fingerprint(file, this.studyId),
      removeFingerprintOnSuccess: true,
      onProgress: (sent) => {
        this.sent = sent;
        if (sent === this.size && this.state === 'sending') this.state = 'checking';
      },
      // A refusal with words is final, even where its status (409) usually means: ask again.
      onShouldRetry: (error) => {
        const status = error.originalResponse?.getStatus() ?? 0;
        return refusalOf(error) === null && (status < 400 || status >= 500 || status === 409 || status === 423);
      },
      onAfterResponse: (_request, response) => this.note(response),
      onSuccess: () => {
        this.runId = this.found;
        this.set('done');
      },
      onError: (error) => this.failed(error)
    });
  }

  private note(response: HttpResponse): void {
    this.found = response.getHeader('Rivenmark-Run') || this.found;
  }

  private failed(error: Error): void {
    const refusal = refusalOf(error);
    if (!refusal) {
      this.set(
        'failed',
        'The connection was lost for too long.',
        'Go on when it is back; nothing that arrived is lost.'
      );
      return;
    }
    this.runId = refusal.details?.runId ?? null;
    this.set('refused', refusal.error, refusal.cure ?? null);
    void this.forget();
  }

  /** Removes the browser's note of a transfer that cannot go on. */
  private async forget(): Promise<void> {
    const { urlStorage } = defaultOptions;
    const notes = await urlStorage.findUploadsByFingerprint(fingerprint(this.file, this.studyId));
    for (const { urlStorageKey } of notes) await urlStorage.removeUpload(urlStorageKey);
  }

  /** Starts, or goes on where an earlier attempt of this file stopped. */
  async start(): Promise<void> {
    this.set('sending');
    if (!this.upload) {
      this.upload = this.make();
      const [earlier] = await this.upload.findPreviousUploads();
      if (earlier) this.upload.resumeFromPreviousUpload(earlier);
    }
    if (this.state === 'sending') this.upload.start();
  }

  async pause(): Promise<void> {
    this.set('paused');
    await this.upload?.abort();
  }

  /** Gives the transfer up; the server removes what arrived. */
  async cancel(): Promise<void> {
    const begun = this.upload;
    this.set('cancelled');
    // Where the server cannot be reached it removes the remains itself after two days.
    await begun?.abort(true).catch(() => undefined);
    await this.forget();
  }

  get active(): boolean {
    return this.state === 'sending' || this.state === 'checking';
  }
}

/** Hours that the server keeps an unfinished transfer. */
const KEPT = 48;

/** Names of the files of a study whose transfer was interrupted and can go on; older notes are removed. */
export async function interruptedNames(studyId: string): Promise<string[]> {
  const names: string[] = [];
  for (const { metadata, creationTime, urlStorageKey } of await defaultOptions.urlStorage.findAllUploads()) {
    const age = Date.now() - Date.parse(creationTime);
    if (age > KEPT * 3_600_000) await defaultOptions.urlStorage.removeUpload(urlStorageKey);
    else if (metadata.studyId === studyId) names.push(metadata.filename);
  }
  return names;
}
