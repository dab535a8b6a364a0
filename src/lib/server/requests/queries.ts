import { and, asc, desc, eq } from 'drizzle-orm';
import { AppError } from '../../domain/errors.ts';
import { requestMachine, type RequestEvent } from '../../domain/request-states.ts';
import type { By } from '../audit/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader, Tx } from '../db/index.ts';
import { request, requestFile, specification } from '../db/schema/requests.ts';
import { transition } from '../db/transition.ts';
import { unsafeFileFacts } from '../files/index.ts';

export type RequestRow = typeof request.$inferSelect;
export type SpecificationRow = typeof specification.$inferSelect;

/** The row of a request, or not-found. Unscoped: callers authorise what they do with it. */
export async function requestForUpdate(reader: Reader, id: string): Promise<RequestRow> {
  const [row] = await reader.select().from(request).where(eq(request.id, id));
  if (!row) throw new AppError('not-found');
  return row;
}

/** Moves a request along its life, with audit; for this domain and the workflows above it. */
export async function setRequestState(
  tx: Tx,
  by: By,
  row: RequestRow,
  event: RequestEvent,
  options: {
    set?: Partial<typeof request.$inferInsert>;
    detail?: Record<string, unknown>;
    expectedVersion?: number;
  } = {},
): Promise<void> {
  await transition(tx, {
    machine: requestMachine,
    table: request,
    column: request.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event,
    by,
    companyId: row.companyId,
    set: { ...options.set, updatedAt: await businessNow(tx) },
    ...(options.detail ? { detail: options.detail } : {}),
    ...(options.expectedVersion === undefined ? {} : { expectedVersion: options.expectedVersion }),
  });
}

/** The specification that bids and orders of a request refer to now; undefined before posting. */
export async function specificationOf(
  reader: Reader,
  requestId: string,
): Promise<SpecificationRow | undefined> {
  const [row] = await reader
    .select()
    .from(specification)
    .where(eq(specification.requestId, requestId))
    .orderBy(desc(specification.number))
    .limit(1);
  return row;
}

export interface RequestFileView {
  id: string;
  kind: 'request-sketch' | 'part-drawing';
  name: string;
  contentType: string;
  size: number;
}

/** The clean files of a request, for callers who have authorised it. */
export async function unsafeRequestFiles(reader: Reader, requestId: string): Promise<RequestFileView[]> {
  const rows = await reader
    .select({ fileId: requestFile.fileId, kind: requestFile.kind })
    .from(requestFile)
    .where(and(eq(requestFile.requestId, requestId)))
    .orderBy(asc(requestFile.addedAt), asc(requestFile.fileId));
  const facts = await unsafeFileFacts(
    reader,
    rows.map((row) => row.fileId),
  );
  return rows.flatMap(({ fileId, kind }) => {
    const fact = facts.find((one) => one.id === fileId);
    return fact
      ? [{ id: fileId, kind, name: fact.name, contentType: fact.contentType, size: fact.size }]
      : [];
  });
}
