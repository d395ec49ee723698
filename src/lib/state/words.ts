import { z } from 'zod';
import type { ClaimConflict } from '$lib/schema/workbench';

const NUMBERS = 'no one two three four five six seven eight nine ten eleven twelve'.split(' ');
const count = (n: number, unit: string) => `${NUMBERS[n] ?? n} ${unit}${n === 1 ? '' : 's'}`;

/** "two minutes ago"; below a minute "just now". */
export function agoText(at: string | Date, now: Date): string {
  const minutes = Math.floor((now.getTime() - new Date(at).getTime()) / 60_000);
  if (minutes < 1) return 'just now';
  if (minutes < 60) return `${count(minutes, 'minute')} ago`;
  if (minutes < 24 * 60) return `${count(Math.floor(minutes / 60), 'hour')} ago`;
  return `${count(Math.floor(minutes / (24 * 60)), 'day')} ago`;
}

const DONE = {
  confirmed: (formula: string | null) => `confirmed ${formula ?? 'a formula'} on this ion`,
  rejected: (formula: string | null) => `rejected ${formula ?? 'every formula'} on this ion`,
  opened: () => 'left this ion open',
  undone: () => 'took a decision on this ion back',
  proposed: (formula: string | null) => `proposed ${formula ?? 'nothing'} for this ion`
};

/** A conflict in one sentence: who changed what and when. */
export function conflictText(conflict: ClaimConflict, now: Date): string {
  const { action, who, at, formula, mz } = conflict;
  const what = action ? DONE[action](formula) : 'changed the ion it hangs on';
  const when = at && action ? ` ${agoText(at, now)}` : '';
  return `${who ?? (action === 'proposed' ? 'The program' : 'Somebody')} ${what}${when} (m/z ${mz.toFixed(4)}) – look again.`;
}

const conflictsSchema = z.object({
  conflicts: z.array(
    z.object({
      ionId: z.number(),
      mz: z.number(),
      version: z.number(),
      state: z.enum(['open', 'proposed', 'confirmed', 'rejected']),
      formula: z.string().nullable(),
      action: z.enum(['proposed', 'confirmed', 'rejected', 'opened', 'undone']).nullable(),
      who: z.string().nullable(),
      at: z.string().nullable()
    })
  )
});

/** The conflicts in the details of a 409, empty when there are none. */
export function readConflicts(details: unknown): ClaimConflict[] {
  const read = conflictsSchema.safeParse(details);
  return read.success ? read.data.conflicts : [];
}
