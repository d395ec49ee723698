import { z } from 'zod';

/** Which precursor ions of a run become trees. */
export const buildTreesSchema = z.object({
  precursorIds: z.union([z.literal('all'), z.array(z.uuid()).min(1, 'Choose at least one precursor ion.').max(5000)]),
  /** spectra of one path but different collision energy are kept apart. */
  separateEnergies: z.boolean().default(false)
});

/** Input of a 'build-trees' job. */
export const buildInputSchema = z.object({ precursorIds: z.array(z.uuid()), separateEnergies: z.boolean() });

/** Result of a 'build-trees' job, in the order of the run's list. */
export interface BuildResult {
  trees: { id: string; name: string; isNew: boolean }[];
}

export type RunState = 'waiting' | 'reading' | 'ready' | 'failed';

/** A job as pages see it. */
export interface JobView {
  id: string;
  kind: 'read-run' | 'build-trees' | 'suggest' | 'mail';
  state: 'queued' | 'running' | 'done' | 'failed' | 'cancelled';
  subjectId: string;
  studyId: string | null;
  progress: { done: number; total: number; what: string };
  error: { code: string; message: string; cure: string | null } | null;
  result: unknown;
  cancelAsked: boolean;
  createdAt: Date | string;
}

/** A run in the table of a study. */
export interface RunRow {
  id: string;
  fileName: string;
  bytes: number;
  state: RunState;
  /** scans by stage, null until it was read. */
  scans: Record<string, number> | null;
  precursors: number;
  trees: number;
  warnings: number;
  error: { code: string; message: string; cure: string | null } | null;
  uploadedBy: string | null;
  createdAt: Date | string;
  job: JobView | null;
}

/** Ion current over time of one stage: the strongest scan of each slice of time. */
export interface CurrentTrace {
  level: number;
  /** seconds (or scan numbers where the file states no times). */
  x: number[];
  /** total ion current, as measured. */
  y: number[];
}

/** A precursor ion of the run page. */
export interface PrecursorRow {
  id: string;
  mz: number;
  charge: number | null;
  isolation: { target: number; lower: number | null; upper: number | null } | null;
  levels: Record<string, number>;
  intensity: number | null;
  /** trees that were built from it. */
  trees: { id: string; name: string }[];
}
