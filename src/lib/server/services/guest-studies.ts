import { and, eq, inArray } from 'drizzle-orm';
import type { Executor } from '../db/connection';
import { studies, studyGuests } from '../db/schema';
import { ServiceError } from '../errors';

/** @throws ServiceError not-found when one of the studies is not the group's */
export async function requireStudiesOfGroup(tx: Executor, groupId: string, studyIds: string[]): Promise<void> {
  if (studyIds.length === 0) return;
  const own = await tx
    .select({ id: studies.id })
    .from(studies)
    .where(and(eq(studies.groupId, groupId), inArray(studies.id, studyIds)));
  if (own.length !== new Set(studyIds).size)
    throw new ServiceError(
      'not-found',
      'One of the studies is not in this group.',
      'Reload the page and choose again.',
      {
        field: 'studyIds'
      }
    );
}

/** Makes `studyIds` exactly the studies of the group that are opened to a guest. */
export async function setGuestStudies(
  tx: Executor,
  groupId: string,
  userId: string,
  studyIds: string[]
): Promise<void> {
  const ofGroup = tx.select({ id: studies.id }).from(studies).where(eq(studies.groupId, groupId));
  await tx.delete(studyGuests).where(and(eq(studyGuests.userId, userId), inArray(studyGuests.studyId, ofGroup)));
  const unique = [...new Set(studyIds)];
  if (unique.length > 0) await tx.insert(studyGuests).values(unique.map((studyId) => ({ studyId, userId })));
}
