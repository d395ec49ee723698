import type { AuditAction } from '$lib/schema/audit';
import type { Actor } from '../auth/authorize';
import type { Executor } from '../db/connection';
import { auditLog } from '../db/schema';

export interface AuditEntry {
  groupId: string | null;
  action: AuditAction;
  subjectKind: 'group' | 'study' | 'run' | 'tree' | 'ion' | 'remark' | 'revision' | 'user' | 'share-link';
  subjectId: string;
  details?: Record<string, unknown>;
}

/** Appends one act. Call it with the transaction that performs the act, so that neither stands without the other. */
export async function audit(tx: Executor, actor: Actor | null, entry: AuditEntry): Promise<void> {
  await tx.insert(auditLog).values({
    groupId: entry.groupId,
    actorId: actor?.id ?? null,
    actorName: actor?.name ?? 'Rivenmark',
    action: entry.action,
    subjectKind: entry.subjectKind,
    subjectId: entry.subjectId,
    details: entry.details ?? {}
  });
}
