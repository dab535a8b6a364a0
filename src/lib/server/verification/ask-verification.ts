import { and, eq, inArray, isNull } from 'drizzle-orm';
import type { z } from 'zod';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import { verificationMachine } from '../../domain/verification.ts';
import type { askingInput, FabricatorProfileInput } from '../../schemas/forms/verification.ts';
import { requireAccess, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { company } from '../db/schema/companies.ts';
import { companyDocument } from '../db/schema/files.ts';
import { fabricatorProfile, verificationCase, verificationDocument } from '../db/schema/verification.ts';
import { transition } from '../db/transition.ts';
import { notify } from '../outbox/index.ts';
import { caseRow } from './read.ts';

async function writeProfile(tx: Tx, actor: Actor, companyId: string, input: FabricatorProfileInput) {
  const updatedAt = await businessNow(tx);
  const [row] = await tx
    .select({ version: fabricatorProfile.version })
    .from(fabricatorProfile)
    .where(eq(fabricatorProfile.companyId, companyId));
  const values = { ...input, updatedAt, version: (row?.version ?? 0) + 1 };
  await tx
    .insert(fabricatorProfile)
    .values({ companyId, ...values })
    .onConflictDoUpdate({ target: fabricatorProfile.companyId, set: values });
  await audit(tx, actor, {
    action: 'fabricator-profile.save',
    subjectType: 'company',
    subjectId: companyId,
    companyId,
    detail: {
      shapes: input.capabilities.shapes,
      work: input.capabilities.work,
      tests: input.capabilities.tests,
    },
  });
}

/** Saves what the fabricator says of itself in the directory; it is shown as declared, not as verified. */
export async function saveFabricatorProfile(
  db: Database,
  actor: Actor,
  companyId: string,
  input: FabricatorProfileInput,
): Promise<void> {
  requireAccess(actor, 'verification.ask', { companyId });
  await transact(db, (tx) => writeProfile(tx, actor, companyId, input));
}

/** The papers that are named must be current papers of this company. */
async function requireDocuments(tx: Tx, companyId: string, ids: readonly string[]): Promise<string[]> {
  const wanted = [...new Set(ids)];
  const rows = await tx
    .select({ id: companyDocument.id })
    .from(companyDocument)
    .where(
      and(
        eq(companyDocument.companyId, companyId),
        isNull(companyDocument.archivedAt),
        inArray(companyDocument.id, wanted),
      ),
    );
  if (rows.length === wanted.length) return wanted;
  const message = 'One of the documents is no longer there. Please choose again.';
  throw new AppError('invalid-input', { detail: message, fields: { documents: message } });
}

async function tellAdmins(tx: Tx, caseId: string, companyName: string): Promise<void> {
  const admins = await tx
    .select({ userId: user.id, email: user.email })
    .from(user)
    .where(and(eq(user.isAdmin, true), eq(user.emailVerified, true)));
  await notify(tx, admins, {
    kind: 'verification-asked',
    subject: `${companyName} asks to be verified`,
    content: {
      heading: 'A fabricator asks to be verified',
      paragraphs: [`${companyName} has named its works address, what it makes and its documents.`],
      action: { label: 'Look at the case', path: `/admin/verification/${caseId}` },
    },
    about: { type: 'verification', id: caseId },
    href: `/admin/verification/${caseId}`,
    dedupeKey: `verification-asked/${caseId}`,
  });
}

/**
 * A fabricator asks to be verified, with what it makes, its works address and its documents as they are
 * now. One asking at a time; after a decision it may be asked again. The same command twice is one case.
 */
export async function askForVerification(
  db: Database,
  actor: Actor,
  companyId: string,
  input: { profile: FabricatorProfileInput } & z.output<typeof askingInput>,
): Promise<{ caseId: string }> {
  requireAccess(actor, 'verification.ask', { companyId });
  requireVerifiedEmail(actor);
  return transact(db, async (tx) => {
    const [same] = await tx
      .select({ id: verificationCase.id, companyId: verificationCase.companyId })
      .from(verificationCase)
      .where(eq(verificationCase.commandId, input.commandId));
    if (same?.companyId === companyId) return { caseId: same.id };
    const [open] = await tx
      .select({ id: verificationCase.id })
      .from(verificationCase)
      .where(and(eq(verificationCase.companyId, companyId), eq(verificationCase.state, 'asked')));
    if (open || same) {
      throw new AppError('already-exists', { detail: 'You have asked already; the answer is on its way.' });
    }
    const [about] = await tx.select({ name: company.name }).from(company).where(eq(company.id, companyId));
    const documents = await requireDocuments(tx, companyId, input.documents);
    await writeProfile(tx, actor, companyId, input.profile);
    const id = newId();
    await tx.insert(verificationCase).values({
      id,
      companyId,
      ...input.profile,
      askedBy: actor.userId,
      askedAt: await businessNow(tx),
      commandId: input.commandId,
    });
    await tx.insert(verificationDocument).values(documents.map((documentId) => ({ caseId: id, documentId })));
    await audit(tx, actor, {
      action: 'verification.ask',
      subjectType: 'verification',
      subjectId: id,
      companyId,
      detail: { documents },
    });
    await tellAdmins(tx, id, about?.name ?? 'A fabricator');
    return { caseId: id };
  });
}

/** Takes an asking back before it is decided. */
export async function withdrawAsking(
  db: Database,
  actor: Actor,
  caseId: string,
  input: { version: number },
): Promise<void> {
  await transact(db, async (tx) => {
    const row = await caseRow(tx, caseId);
    requireAccess(actor, 'verification.ask', { companyId: row.companyId });
    await transition(tx, {
      machine: verificationMachine,
      table: verificationCase,
      column: verificationCase.state,
      columnName: 'state',
      id: row.id,
      from: row.state,
      event: 'withdraw',
      by: actor,
      companyId: row.companyId,
      set: { decidedAt: await businessNow(tx) },
      expectedVersion: input.version,
    });
  });
}
