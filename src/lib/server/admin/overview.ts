import { and, asc, count, eq, gt, inArray, isNull } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { openDisputeStates } from '../../domain/dispute-states.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow, realNow } from '../adapters/clock.ts';
import type { Database } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { dispute } from '../db/schema/disputes.ts';
import { auditEvent, serviceProbe } from '../db/schema/platform.ts';
import { verificationCase } from '../db/schema/verification.ts';
import { jobCounts } from './jobs.ts';
import { mailCounts, oldestDueMail } from './mails.ts';

/** A probe older than this says nothing any more: the worker may be down. */
const staleMs = 120_000;

/** Where the platform stands: what waits for an admin, queues, services. */
export async function adminOverview(db: Database, actor: Actor) {
  requireAccess(actor, 'admin.view');
  const now = realNow();
  const [waiting] = await db
    .select({ n: count() })
    .from(verificationCase)
    .where(eq(verificationCase.state, 'asked'));
  const [verified] = await db
    .select({ n: count() })
    .from(company)
    .where(and(eq(company.kind, 'fabricator'), gt(company.verifiedUntil, await businessNow(db))));
  const [disputes] = await db
    .select({ n: count() })
    .from(dispute)
    .where(inArray(dispute.state, [...openDisputeStates]));
  const [unsealed] = await db.select({ n: count() }).from(auditEvent).where(isNull(auditEvent.seal));
  const probes = await db.select().from(serviceProbe).orderBy(asc(serviceProbe.name));
  return {
    waitingVerifications: waiting?.n ?? 0,
    openDisputes: disputes?.n ?? 0,
    verifiedFabricators: verified?.n ?? 0,
    mails: await mailCounts(db, actor),
    oldestDueMailAt: await oldestDueMail(db),
    jobs: await jobCounts(db, actor),
    unsealedAuditRows: unsealed?.n ?? 0,
    probes: probes.map((probe) => ({ ...probe, stale: now - probe.at > staleMs })),
  };
}
