import { z } from 'zod';
import { parseAdduct, parseElementRanges } from '$lib/core/chem';
import { CoreError } from '$lib/core/errors';
import { toleranceFor } from '$lib/core/formula';
import { groupDefaultsSchema, type GroupDefaults } from './group';

/** Analysers in the order in which the form lists them. */
export const ANALYSERS = ['orbitrap', 'ft-icr', 'tof', 'quadrupole', 'ion-trap', 'sector', 'unknown'] as const;
export type AnalyserKey = (typeof ANALYSERS)[number];

/** Reports a core error as a problem of the form field instead of throwing it. */
function readable<T>(context: z.RefinementCtx, read: () => T): T | undefined {
  try {
    return read();
  } catch (e) {
    if (!(e instanceof CoreError)) throw e;
    context.addIssue({ code: 'custom', message: [e.message, e.cure].filter(Boolean).join(' ') });
    return undefined;
  }
}

const elements = z
  .string()
  .trim()
  .max(200, 'Element ranges have at most 200 characters.')
  .transform((text, context) => {
    if (text !== '') readable(context, () => parseElementRanges(text));
    return text === '' ? null : text;
  });

const adducts = z
  .string()
  .max(3000)
  .transform((text, context) => {
    const names = text
      .split(/[\n;]+/)
      .map((name) => name.trim())
      .filter(Boolean);
    const known = names.map((name) => readable(context, () => parseAdduct(name).name));
    return [...new Set(known.filter((name) => name !== undefined))];
  })
  .pipe(z.array(z.string().max(60)).max(40, 'At most 40 ion types can be given.'));

const width = z
  .string()
  .trim()
  .optional()
  .transform((text, context) => {
    if (!text) return null;
    const value = Number(text.replace(',', '.'));
    if (Number.isFinite(value) && value >= 0 && value <= 1000) return value;
    context.addIssue({ code: 'custom', message: 'Write a number from 0 to 1000, or leave it empty.' });
    return z.NEVER;
  });

const widths = Object.fromEntries(
  ANALYSERS.flatMap((analyser) => [`ppm.${analyser}`, `mda.${analyser}`]).map((name) => [name, width])
);

function tolerancesOf(fields: Record<string, number | null>, context: z.RefinementCtx): GroupDefaults['tolerances'] {
  const tolerances: GroupDefaults['tolerances'] = {};
  for (const analyser of ANALYSERS) {
    const [ppm, mda] = [fields[`ppm.${analyser}`], fields[`mda.${analyser}`]];
    if (ppm === null && mda === null) continue;
    const own = toleranceFor(analyser);
    const window = { ppm: ppm ?? own.ppm, mda: mda ?? own.mda };
    if (window.ppm === 0 && window.mda === 0)
      context.addIssue({
        code: 'custom',
        path: [`ppm.${analyser}`],
        message: 'A window of zero finds nothing: at least one of ppm and mDa must be more.'
      });
    tolerances[analyser] = window;
  }
  return tolerances;
}

/**
 * The form of the group's defaults: text fields in, `{version, defaults}` out. An empty field means the program's own
 * default. Widths are in ppm and mDa; the larger of the two windows counts at each m/z.
 */
export const groupDefaultsFormSchema = z
  .object({
    version: z.coerce.number().int().positive(),
    elements,
    adducts,
    approvalsNeeded: z.coerce
      .number('Write how many reviewers must approve, from 1 to 5.')
      .int('Write a whole number.')
      .min(1, 'At least one reviewer must approve.')
      .max(5, 'At most five reviewers can be asked for.')
  })
  .and(z.object(widths))
  .transform((input, context) => ({
    version: input.version,
    defaults: {
      tolerances: tolerancesOf(input as unknown as Record<string, number | null>, context),
      elements: input.elements,
      adducts: input.adducts,
      approvalsNeeded: input.approvalsNeeded
    }
  }))
  .pipe(z.object({ version: z.number(), defaults: groupDefaultsSchema }));
export type GroupDefaultsInput = z.infer<typeof groupDefaultsFormSchema>;
