import type { Actor } from '../../domain/actor.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import type { Tx } from '../db/index.ts';
import { auditEvent } from '../db/schema/platform.ts';

/** Who did it: a person, or the system by itself (deadlines, webhooks, recovery). */
export type By = Actor | 'system';

export interface AuditEntry {
  action: string;
  subjectType: string;
  subjectId: string;
  companyId?: string | null;
  detail?: Record<string, unknown>;
}

/** Writes an audit row in the transaction of what it tells about. */
export async function audit(tx: Tx, by: By, entry: AuditEntry): Promise<void> {
  const at = await businessNow(tx);
  await tx.insert(auditEvent).values({
    id: newId(),
    at,
    actorKind: by === 'system' ? 'system' : by.isAdmin ? 'admin' : 'user',
    actorUserId: by === 'system' ? null : by.userId,
    companyId: entry.companyId ?? null,
    action: entry.action,
    subjectType: entry.subjectType,
    subjectId: entry.subjectId,
    detail: entry.detail ?? {},
    requestId: by === 'system' ? null : by.requestId,
  });
}
