import { and, asc, count, desc, eq } from 'drizzle-orm';
import type { AuditQuery } from '$lib/schema/member';
import { requireGroup, type Actor } from '../auth/authorize';
import { database } from '../db';
import { auditLog } from '../db/schema';

export const AUDIT_PAGE_SIZE = 50;

export interface AuditRow {
  id: number;
  at: Date;
  actor: string;
  action: string;
  subjectKind: string;
  details: Record<string, unknown>;
}

export interface AuditPage {
  rows: AuditRow[];
  /** acts that fit the filter */
  total: number;
  page: number;
  pages: number;
  /** kinds of acts that occur in the group, for the filter */
  actions: string[];
}

/** One page of the group's audit log, newest act first. A page past the end shows the last one. @throws ServiceError as requireGroup */
export async function auditPage(actor: Actor | null, groupId: string, query: AuditQuery): Promise<AuditPage> {
  await requireGroup(actor, groupId, 'audit.read');
  const db = database();
  const wanted = and(eq(auditLog.groupId, groupId), query.action ? eq(auditLog.action, query.action) : undefined);
  const [{ total }] = await db.select({ total: count() }).from(auditLog).where(wanted);
  const pages = Math.max(1, Math.ceil(total / AUDIT_PAGE_SIZE));
  const page = Math.min(query.page, pages);
  const rows = await db
    .select()
    .from(auditLog)
    .where(wanted)
    .orderBy(desc(auditLog.id))
    .limit(AUDIT_PAGE_SIZE)
    .offset((page - 1) * AUDIT_PAGE_SIZE);
  const actions = await db
    .selectDistinct({ action: auditLog.action })
    .from(auditLog)
    .where(eq(auditLog.groupId, groupId))
    .orderBy(asc(auditLog.action));
  return {
    rows: rows.map((row) => ({
      id: row.id,
      at: row.createdAt,
      actor: row.actorName,
      action: row.action,
      subjectKind: row.subjectKind,
      details: row.details as Record<string, unknown>
    })),
    total,
    page,
    pages,
    actions: actions.map(({ action }) => action)
  };
}
