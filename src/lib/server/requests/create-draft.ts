import { eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { addDays, dateIn } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import type { Requirement } from '../../induction/check/types.ts';
import { machineValues } from '../../schemas/forms/machine-texts.ts';
import { readRequest } from '../../schemas/forms/requirement-form.ts';
import { newRequestValues, requirementValues } from '../../schemas/forms/requirement-texts.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { nextNumber } from '../db/counters.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { company } from '../db/schema/companies.ts';
import { request, type DraftForm } from '../db/schema/requests.ts';
import { machineById } from '../machines/index.ts';
import { requestForUpdate } from './queries.ts';

export type DraftSource =
  | { kind: 'empty' }
  | { kind: 'machine'; machineId: string }
  | { kind: 'request'; requestId: string }
  /** A requirement as JSON, e.g. taken from the bench or the API. */
  | { kind: 'requirement'; requirement: Requirement; title?: string };

export interface CreateDraftInput {
  companyId: string;
  /** Random, made with the form: pressing twice makes one draft. */
  commandId: string;
  from: DraftSource;
}

/** Days from today that a new draft proposes for the closing of bids. */
const daysToClosing = 14;

interface Start {
  form: DraftForm;
  machineId: string | null;
  machineVersion: number | null;
}

async function startFrom(tx: Tx, actor: Actor, input: CreateDraftInput): Promise<Start> {
  const { from, companyId } = input;
  const unitSet = actor.unitSet;
  switch (from.kind) {
    case 'empty':
      return { form: { unitSet, values: newRequestValues() }, machineId: null, machineVersion: null };
    case 'machine': {
      const row = await machineById(tx, from.machineId);
      if (row.companyId !== companyId) throw new AppError('not-found');
      return {
        form: { unitSet, values: { ...newRequestValues(), ...machineValues(row.body, unitSet) } },
        machineId: row.id,
        machineVersion: row.version,
      };
    }
    case 'request': {
      const earlier = await requestForUpdate(tx, from.requestId);
      if (earlier.companyId !== companyId) throw new AppError('not-found');
      const values = { ...earlier.form.values };
      values['title'] = `${earlier.title} (again)`.slice(0, 120);
      delete values['commercial.needBy'];
      return {
        form: { unitSet: earlier.form.unitSet, values },
        machineId: earlier.machineId,
        machineVersion: earlier.machineVersion,
      };
    }
    case 'requirement':
      return {
        form: {
          unitSet,
          values: {
            ...newRequestValues(),
            ...requirementValues(from.requirement, unitSet),
            title: from.title ?? '',
          },
        },
        machineId: null,
        machineVersion: null,
      };
  }
}

/** Begins a request: empty, for a machine, like an earlier request, or from a requirement. */
export async function createDraft(
  db: Database,
  actor: Actor,
  input: CreateDraftInput,
): Promise<{ id: string; number: number; version: number }> {
  requireAccess(actor, 'request.edit', { companyId: input.companyId });
  return transact(db, async (tx) => {
    const [existing] = await tx.select().from(request).where(eq(request.commandId, input.commandId));
    if (existing) {
      if (existing.companyId !== input.companyId) throw new AppError('already-exists');
      return { id: existing.id, number: existing.number, version: existing.version };
    }
    const [buyer] = await tx
      .select({ currency: company.currency, timeZone: company.timeZone })
      .from(company)
      .where(eq(company.id, input.companyId));
    if (!buyer) throw new AppError('not-found');
    const start = await startFrom(tx, actor, input);
    const now = await businessNow(tx);
    start.form.values['commercial.closesOn'] = addDays(dateIn(buyer.timeZone, now), daysToClosing);
    if (input.from.kind !== 'request') start.form.values['commercial.currency'] = buyer.currency;
    const read = readRequest(start.form.values, start.form.unitSet);
    const id = newId();
    const number = await nextNumber(tx, input.companyId, 'request');
    await tx.insert(request).values({
      id,
      companyId: input.companyId,
      number,
      title: start.form.values['title']?.trim() ?? '',
      ...start,
      requirement: read.requirement,
      commercial: read.commercial,
      createdAt: now,
      updatedAt: now,
      createdBy: actor.userId,
      commandId: input.commandId,
    });
    await audit(tx, actor, {
      action: 'request.create',
      subjectType: 'request',
      subjectId: id,
      companyId: input.companyId,
      detail: { from: input.from.kind },
    });
    return { id, number, version: 1 };
  });
}
