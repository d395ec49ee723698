import { eq, sql } from 'drizzle-orm';
import type { Executor } from '../db/connection';
import { trees } from '../db/schema';

/**
 * Records that the content of a tree changed: its version rises, and an approved tree becomes a draft again
 * (the approved revision stays readable). Call inside the transaction that makes the change.
 */
export async function touchTree(tx: Executor, treeId: string): Promise<void> {
  await tx
    .update(trees)
    .set({
      version: sql`${trees.version} + 1`,
      status: sql`IF(${trees.status} = 'approved', 'draft', ${trees.status})`,
      updatedAt: new Date()
    })
    .where(eq(trees.id, treeId));
}
