import { and, desc, eq, isNull } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { moneyAlarm } from '../db/schema/money.ts';
import { log } from '../log/index.ts';

export interface Alarm {
  /** The same key raises one alarm. */
  key: string;
  kind: string;
  orderId?: string | null;
  milestoneId?: string | null;
  objectId?: string | null;
  detail: string;
}

/** Puts something on the list that a person of the platform must look at. */
export async function raiseAlarm(tx: Tx | Database, alarm: Alarm): Promise<void> {
  const [made] = await tx
    .insert(moneyAlarm)
    .values({
      id: newId(),
      key: alarm.key,
      kind: alarm.kind,
      orderId: alarm.orderId ?? null,
      milestoneId: alarm.milestoneId ?? null,
      objectId: alarm.objectId ?? null,
      detail: alarm.detail.slice(0, 1000),
      at: await businessNow(tx),
    })
    .onConflictDoNothing()
    .returning({ id: moneyAlarm.id });
  if (made) log().warn({ alarm: made.id, kind: alarm.kind, order: alarm.orderId }, 'money alarm');
}

export async function openAlarms(reader: Reader, actor: Actor | null) {
  requireAccess(actor, 'admin.view');
  return reader
    .select()
    .from(moneyAlarm)
    .where(isNull(moneyAlarm.resolvedAt))
    .orderBy(desc(moneyAlarm.at))
    .limit(200);
}

/** An admin closes an alarm and says what was done. */
export async function resolveAlarm(
  db: Database,
  actor: Actor | null,
  input: { alarmId: string; resolution: string },
): Promise<void> {
  requireAccess(actor, 'admin.operate');
  const resolution = input.resolution.trim();
  if (!resolution) throw new AppError('invalid-input', { fields: { resolution: 'Say what was done.' } });
  await transact(db, async (tx) => {
    const result = await tx
      .update(moneyAlarm)
      .set({ resolvedAt: await businessNow(tx), resolvedBy: actor.userId, resolution })
      .where(and(eq(moneyAlarm.id, input.alarmId), isNull(moneyAlarm.resolvedAt)));
    if (result.rowsAffected !== 1) throw new AppError('state-conflict');
    await audit(tx, actor, {
      action: 'money-alarm.resolve',
      subjectType: 'money-alarm',
      subjectId: input.alarmId,
    });
  });
}
