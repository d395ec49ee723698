import { z } from 'zod';

export const ION_CHOICES = ['confirmed', 'explained', 'all'] as const;
export const FIGURES = ['cascade', 'graph'] as const;
export const COLUMN_KEYS = [
  'stage',
  'isolated',
  'found',
  'formula',
  'calculated',
  'error',
  'dbe',
  'loss',
  'link',
  'intensity',
  'scans',
  'state',
  'by'
] as const;
export type ColumnKey = (typeof COLUMN_KEYS)[number];
export const DEFAULT_COLUMNS: readonly ColumnKey[] = [
  'stage',
  'found',
  'formula',
  'calculated',
  'error',
  'loss',
  'link',
  'intensity',
  'by'
];

const columns = z
  .array(z.enum(COLUMN_KEYS))
  .min(1)
  .transform((list) => COLUMN_KEYS.filter((key) => list.includes(key)));

/** Choices of a report; they live in the URL. Wrong values fall back, so that an old link still works. */
export const reportOptionsSchema = z.object({
  ions: z.enum(ION_CHOICES).catch('explained'),
  figure: z.enum(FIGURES).catch('cascade'),
  columns: columns.catch([...DEFAULT_COLUMNS]),
  /** 'draft' is the tree as it stands; absent: the approved revision if it is the latest word, else the draft. */
  revision: z
    .union([z.literal('draft'), z.coerce.number().int().positive()])
    .optional()
    .catch(undefined)
});
export type ReportOptions = z.infer<typeof reportOptionsSchema>;

/** Reads the choices from a query; `columns` may be repeated. */
export const reportOptions = (query: URLSearchParams): ReportOptions =>
  reportOptionsSchema.parse({
    ions: query.get('ions'),
    figure: query.get('figure'),
    columns: query.getAll('columns'),
    revision: query.get('revision') ?? undefined
  });

/** The query that gives the same choices; defaults are left out. */
export function reportQuery(options: ReportOptions): string {
  const query = new URLSearchParams();
  if (options.ions !== 'explained') query.set('ions', options.ions);
  if (options.figure !== 'cascade') query.set('figure', options.figure);
  if (options.columns.join() !== DEFAULT_COLUMNS.join())
    for (const key of options.columns) query.append('columns', key);
  if (options.revision !== undefined) query.set('revision', String(options.revision));
  return query.size ? `?${query}` : '';
}
