import { createHash } from 'node:crypto';
import { asc, count, desc, eq, inArray, isNotNull, isNull, notInArray, sql, and } from 'drizzle-orm';
import { realNow } from '../adapters/clock.ts';
import { transact, type Database, type Reader } from '../db/index.ts';
import { auditEvent } from '../db/schema/platform.ts';
import { auditSeal } from '../db/schema/verification.ts';
import { log } from '../log/index.ts';

/** Rows of one seal at most; also what one write transaction holds the database for. */
const batchRows = 500;
const firstSeal = '0'.repeat(64);

const rowColumns = {
  id: auditEvent.id,
  at: auditEvent.at,
  actorKind: auditEvent.actorKind,
  actorUserId: auditEvent.actorUserId,
  companyId: auditEvent.companyId,
  action: auditEvent.action,
  subjectType: auditEvent.subjectType,
  subjectId: auditEvent.subjectId,
  // The stored text, not what a parser makes of it: the seal is over exact bytes.
  detail: sql<string>`${auditEvent.detail}`,
  requestId: auditEvent.requestId,
};

type SealedRow = { [K in keyof typeof rowColumns]: unknown };

/**
 * SHA-256 (FIPS 180-4) over the seal before, the number of this one and the rows in the order of their
 * ids, each as a JSON array of its columns. A row that is changed, removed, added or moved to another
 * batch, and a batch that is removed, give another hash here and in every seal after it.
 */
export function sealOf(previous: string, number: number, rows: readonly SealedRow[]): string {
  const hash = createHash('sha256');
  hash.update(`${previous}\n${number}\n${rows.length}\n`);
  for (const row of rows) hash.update(`${JSON.stringify(Object.values(row))}\n`);
  return hash.digest('hex');
}

async function sealBatch(db: Database): Promise<{ number: number; seal: string; rows: number } | null> {
  return transact(db, async (tx) => {
    const rows = await tx
      .select(rowColumns)
      .from(auditEvent)
      .where(isNull(auditEvent.seal))
      .orderBy(asc(auditEvent.id))
      .limit(batchRows);
    if (rows.length === 0) return null;
    const [last] = await tx.select().from(auditSeal).orderBy(desc(auditSeal.number)).limit(1);
    const previous = last?.seal ?? firstSeal;
    const number = (last?.number ?? 0) + 1;
    const seal = sealOf(previous, number, rows);
    await tx.insert(auditSeal).values({ number, at: realNow(), rowCount: rows.length, previous, seal });
    await tx
      .update(auditEvent)
      .set({ seal })
      .where(
        inArray(
          auditEvent.id,
          rows.map((row) => row.id),
        ),
      );
    return { number, seal, rows: rows.length };
  });
}

/**
 * Seals every audit row that is not sealed yet. The newest seal goes to the log too: kept outside the
 * database, it tells whether the whole chain was written anew.
 */
export async function sealAudit(db: Database, signal?: AbortSignal): Promise<number> {
  let sealed = 0;
  while (!signal?.aborted) {
    const batch = await sealBatch(db);
    if (!batch) break;
    sealed += batch.rows;
    log().info({ seal: batch.seal, number: batch.number, rows: batch.rows }, 'audit trail sealed');
    if (batch.rows < batchRows) break;
  }
  return sealed;
}

export interface SealProblem {
  /** Number of the seal; null for rows whose seal is none that was ever given. */
  number: number | null;
  what: 'rows-differ' | 'chain-broken' | 'unknown-seal';
}

export interface AuditVerdict {
  seals: number;
  sealedRows: number;
  unsealedRows: number;
  newestSeal: string | null;
  problems: SealProblem[];
}

/** Computes every seal again from the rows and tells where it differs. Reads only. */
export async function verifyAudit(reader: Reader): Promise<AuditVerdict> {
  const seals = await reader.select().from(auditSeal).orderBy(asc(auditSeal.number));
  const problems: SealProblem[] = [];
  let previous = firstSeal;
  let sealedRows = 0;
  for (const [index, seal] of seals.entries()) {
    if (seal.number !== index + 1 || seal.previous !== previous) {
      problems.push({ number: seal.number, what: 'chain-broken' });
    }
    const rows = await reader
      .select(rowColumns)
      .from(auditEvent)
      .where(eq(auditEvent.seal, seal.seal))
      .orderBy(asc(auditEvent.id));
    sealedRows += rows.length;
    if (rows.length !== seal.rowCount || sealOf(seal.previous, seal.number, rows) !== seal.seal) {
      problems.push({ number: seal.number, what: 'rows-differ' });
    }
    previous = seal.seal;
  }
  const known = reader.select({ seal: auditSeal.seal }).from(auditSeal);
  const [foreign] = await reader
    .select({ n: count() })
    .from(auditEvent)
    .where(and(isNotNull(auditEvent.seal), notInArray(auditEvent.seal, known)));
  if ((foreign?.n ?? 0) > 0) problems.push({ number: null, what: 'unknown-seal' });
  const [open] = await reader.select({ n: count() }).from(auditEvent).where(isNull(auditEvent.seal));
  return {
    seals: seals.length,
    sealedRows,
    unsealedRows: open?.n ?? 0,
    newestSeal: seals.at(-1)?.seal ?? null,
    problems,
  };
}
