import { eq, sql } from 'drizzle-orm';
import type { Executor } from '../db/connection';
import { ions, trees } from '../db/schema';

/**
 * Recomputes the share (0..1) of the product ion current that confirmed and proposed claims explain, and stores it.
 * Intact precursor ions and isotope satellites count on neither side, as in the suggestion of the core.
 * Call inside the transaction that changed the claims. @returns the share
 */
export async function updateExplained(tx: Executor, treeId: string): Promise<number> {
  const product = sql`not ${ions.isPrecursor} and coalesce(${ions.flag}, '') <> 'isotope'`;
  const [row] = await tx
    .select({
      all: sql<number>`coalesce(sum(if(${product}, ${ions.intensity}, 0)), 0)`.mapWith(Number),
      explained:
        sql<number>`coalesce(sum(if(${product} and ${ions.state} in ('confirmed', 'proposed') and ${ions.formula} is not null, ${ions.intensity}, 0)), 0)`.mapWith(
          Number
        )
    })
    .from(ions)
    .where(eq(ions.treeId, treeId));
  const share = row.all > 0 ? row.explained / row.all : 0;
  await tx.update(trees).set({ explained: share }).where(eq(trees.id, treeId));
  return share;
}
