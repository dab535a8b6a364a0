import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { readRequest } from '../../schemas/forms/requirement-form.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { transact, type Database } from '../db/index.ts';
import { request, type DraftForm } from '../db/schema/requests.ts';
import { machineById } from '../machines/index.ts';
import { requestForUpdate } from './queries.ts';

export interface SaveDraftInput {
  requestId: string;
  /** The version that was seen; another one is a conflict that carries the newer state. */
  version: number;
  form: DraftForm;
  machineId: string | null;
  machineVersion: number | null;
}

export interface SavedDraft {
  version: number;
  savedAt: number;
  /** Whether the technical side reads as a whole requirement, and the commercial side as terms. */
  requirementComplete: boolean;
  commercialComplete: boolean;
}

/** Saves a draft as typed; half-typed values are kept as text. Only drafts are edited this way. */
export async function saveDraft(db: Database, actor: Actor, input: SaveDraftInput): Promise<SavedDraft> {
  return transact(db, async (tx) => {
    const row = await requestForUpdate(tx, input.requestId);
    requireAccess(actor, 'request.edit', { companyId: row.companyId });
    if (row.state !== 'draft') {
      throw new AppError('state-conflict', { detail: 'This request is posted and can no longer be edited.' });
    }
    if (row.version !== input.version) {
      throw new AppError('version-conflict', {
        data: {
          version: row.version,
          form: row.form,
          machineId: row.machineId,
          machineVersion: row.machineVersion,
          savedAt: row.updatedAt,
        },
      });
    }
    if (input.machineId !== null) {
      const machine = await machineById(tx, input.machineId);
      if (machine.companyId !== row.companyId) throw new AppError('not-found');
    }
    const read = readRequest(input.form.values, input.form.unitSet);
    const savedAt = await businessNow(tx);
    const version = row.version + 1;
    await tx
      .update(request)
      .set({
        title: (input.form.values['title'] ?? '').trim().slice(0, 120),
        form: input.form,
        requirement: read.requirement,
        commercial: read.commercial,
        machineId: input.machineId,
        machineVersion: input.machineId === null ? null : input.machineVersion,
        updatedAt: savedAt,
        version,
      })
      .where(and(eq(request.id, row.id), eq(request.version, input.version)));
    return {
      version,
      savedAt,
      requirementComplete: read.requirement !== null,
      commercialComplete: read.commercial !== null,
    };
  });
}
