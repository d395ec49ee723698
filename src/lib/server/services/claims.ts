import { and, asc, desc, eq, inArray } from 'drizzle-orm';
import type { ClaimDecision } from '$lib/schema/tree';
import type { ClaimConflict, ClaimsResult } from '$lib/schema/workbench';
import { requireTree, type Actor } from '../auth/authorize';
import { database } from '../db';
import type { Executor } from '../db/connection';
import { claimHistory, ions, trees, users } from '../db/schema';
import type { ClaimState } from '../db/schema/trees';
import { ServiceError } from '../errors';
import { audit } from './audit';
import { claimContext, spectraOf, type SpectrumRow } from './claim-context';
import { rehang } from './claim-dependants';
import { claimForFormula } from './claim-formula';
import { claimStateOf, ionAfter, openClaim, undoTarget, type IonRow } from './claim-state';
import { updateExplained } from './explained';
import { touchTree } from './tree-touch';

const PAST = { confirm: 'confirmed', reject: 'rejected', open: 'opened', undo: 'undone' } as const;

interface Work {
  tx: Executor;
  actor: Actor;
  tree: typeof trees.$inferSelect;
  groupId: string;
  spectra: SpectrumRow[];
}
interface Outcome {
  after: ClaimState;
  decidedBy: string | null;
  decidedAt: Date | null;
}

const invalid = (message: string, cure: string) => new ServiceError('invalid', message, cure);

/** Locks the ions in order of their ids. @throws ServiceError not-found when one is not of this tree */
async function lockIons(
  tx: Executor,
  treeId: string,
  decisions: readonly ClaimDecision[]
): Promise<Map<number, IonRow>> {
  const ids = decisions.map((d) => d.ionId);
  if (new Set(ids).size < ids.length)
    throw invalid('The same ion is decided twice in one request.', 'Send one decision for each ion.');
  const rows = await tx
    .select()
    .from(ions)
    .where(and(eq(ions.treeId, treeId), inArray(ions.id, ids)))
    .orderBy(asc(ions.id))
    .for('update');
  if (rows.length < ids.length)
    throw new ServiceError('not-found', 'One of the ions is not part of this tree.', 'Reload the tree.');
  return new Map(rows.map((row) => [row.id, row]));
}

/** What became of ions that changed under the person's hands, for the message. */
async function conflictsOf(tx: Executor, stale: readonly IonRow[]): Promise<ClaimConflict[]> {
  const past = await tx
    .select({ ionId: claimHistory.ionId, action: claimHistory.action, at: claimHistory.createdAt, who: users.name })
    .from(claimHistory)
    .leftJoin(users, eq(users.id, claimHistory.actorId))
    .where(
      inArray(
        claimHistory.ionId,
        stale.map((ion) => ion.id)
      )
    )
    .orderBy(desc(claimHistory.id));
  return stale.map((ion) => {
    const last = past.find((entry) => entry.ionId === ion.id);
    return {
      ionId: ion.id,
      mz: ion.mz,
      version: ion.version,
      state: ion.state,
      formula: ion.formula,
      action: last?.action ?? null,
      who: last?.who ?? null,
      at: last?.at.toISOString() ?? null
    };
  });
}

async function refuseStale(
  tx: Executor,
  found: Map<number, IonRow>,
  decisions: readonly ClaimDecision[]
): Promise<void> {
  const stale = decisions.filter((d) => found.get(d.ionId)?.version !== d.version).map((d) => found.get(d.ionId)!);
  if (!stale.length) return;
  const conflicts = await conflictsOf(tx, stale);
  const { who, mz } = conflicts[0];
  throw new ServiceError(
    'conflict',
    `${who ?? 'Somebody'} changed the claim on m/z ${mz.toFixed(4)}${stale.length > 1 ? ` and ${stale.length - 1} more` : ''} first. Nothing was saved.`,
    'Look at the ion again, then decide.',
    { conflicts }
  );
}

async function confirmed(work: Work, ion: IonRow, decision: ClaimDecision): Promise<ClaimState> {
  const reason = decision.reason || null;
  const wanted = decision.formula ?? ion.formula;
  if (!wanted)
    throw invalid(`The ion at m/z ${ion.mz.toFixed(4)} has no proposed formula to confirm.`, 'Name a formula for it.');
  const current = claimStateOf(ion);
  if (wanted === ion.formula) return { ...current, state: 'confirmed', reason };
  const spectrum = work.spectra.find((s) => s.index === ion.spectrum);
  if (!spectrum) throw new ServiceError('not-found', 'The spectrum of this ion is gone.', 'Reload the tree.');
  const context = await claimContext(work.tx, work.tree, spectrum, ion, reason);
  return { ...current, ...claimForFormula(context, wanted), state: 'confirmed', reason };
}

async function undone(work: Work, ion: IonRow): Promise<Outcome> {
  const past = await work.tx
    .select()
    .from(claimHistory)
    .where(eq(claimHistory.ionId, ion.id))
    .orderBy(desc(claimHistory.id));
  const found = undoTarget(past);
  if (!found)
    throw invalid(`Nobody has decided on m/z ${ion.mz.toFixed(4)}: there is nothing to undo.`, 'Choose another ion.');
  const { target, prior } = found;
  const byPerson = prior !== null && prior.action !== 'proposed';
  return {
    after: target.before,
    decidedBy: byPerson ? prior.actorId : null,
    decidedAt: byPerson ? prior.createdAt : null
  };
}

async function outcomeOf(work: Work, ion: IonRow, decision: ClaimDecision): Promise<Outcome> {
  if (decision.action !== 'confirm' && decision.formula !== undefined)
    throw invalid('A formula goes with a confirmation only.', 'Leave the formula out.');
  if (decision.action === 'undo') return undone(work, ion);
  const mine = { decidedBy: work.actor.id, decidedAt: new Date() };
  if (decision.action === 'confirm') return { after: await confirmed(work, ion, decision), ...mine };
  if (decision.action === 'reject')
    return { after: { ...claimStateOf(ion), state: 'rejected', reason: decision.reason || null }, ...mine };
  if (!decision.reason)
    throw invalid('An ion left open on purpose needs a reason.', 'Say in a few words why it stays open.');
  return { after: openClaim(decision.reason), ...mine };
}

/** Writes one decision with its history row. @returns ids of ions whose loss followed */
async function carryOut(work: Work, ion: IonRow, decision: ClaimDecision): Promise<number[]> {
  const { tx, actor, tree } = work;
  const before = claimStateOf(ion);
  const { after, decidedBy, decidedAt } = await outcomeOf(work, ion, decision);
  const changed = { ...ion, ...after, decidedBy, decidedAt, version: ion.version + 1 };
  await tx
    .update(ions)
    .set({ ...after, decidedBy, decidedAt, version: changed.version })
    .where(eq(ions.id, ion.id));
  const action = PAST[decision.action];
  await tx
    .insert(claimHistory)
    .values({ ionId: ion.id, actorId: actor.id, action, before, after, reason: decision.reason || null });
  await audit(tx, actor, {
    groupId: work.groupId,
    action: `claim.${action}`,
    subjectKind: 'ion',
    subjectId: String(ion.id),
    details: {
      treeId: tree.id,
      mz: ion.mz,
      before: { state: before.state, formula: before.formula },
      after: { state: after.state, formula: after.formula },
      reason: decision.reason || null
    }
  });
  return before.formula ? rehang(tx, tree, work.spectra, changed, before.formula) : [];
}

/**
 * Confirms, rejects, opens or undoes the claims on some ions of a tree: all of them or none. Each decision names the
 * version that the person saw. Losses of ions hanging on a changed formula follow it.
 * @throws ServiceError unauthenticated, not-found, forbidden; invalid (a formula that does not fit, nothing to undo, a
 *   missing reason); conflict with `details.conflicts: ClaimConflict[]` when a claim changed in the meantime
 */
export async function decideClaims(
  actor: Actor | null,
  treeId: string,
  decisions: readonly ClaimDecision[]
): Promise<ClaimsResult> {
  const { group } = await requireTree(actor, treeId, 'claim.decide');
  return database().transaction(async (tx) => {
    // The tree's row comes first for everybody who changes its claims: one order of locks, no deadlock.
    const [tree] = await tx.select().from(trees).where(eq(trees.id, treeId)).for('update');
    const found = await lockIons(tx, treeId, decisions);
    await refuseStale(tx, found, decisions);
    const work: Work = { tx, actor: actor!, tree, groupId: group.id, spectra: await spectraOf(tx, treeId) };
    const touched = new Set<number>();
    for (const decision of decisions) {
      // A decision before it in the same request may have moved this ion's loss: read it as it is now.
      const followed = touched.has(decision.ionId);
      const [ion] = followed
        ? await tx.select().from(ions).where(eq(ions.id, decision.ionId))
        : [found.get(decision.ionId)!];
      touched.add(ion.id);
      for (const id of await carryOut(work, ion, decision)) touched.add(id);
    }
    const explained = await updateExplained(tx, treeId);
    await touchTree(tx, treeId);
    const rows = await tx
      .select()
      .from(ions)
      .where(inArray(ions.id, [...touched]));
    const [{ version, status }] = await tx
      .select({ version: trees.version, status: trees.status })
      .from(trees)
      .where(eq(trees.id, treeId));
    return { treeVersion: version, explained, status, ions: rows.map(ionAfter) };
  });
}
