import { and, eq, isNull, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import type { AddressPurpose } from '../../domain/address.ts';
import { AppError } from '../../domain/errors.ts';
import { requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Tx } from '../db/index.ts';
import { companyAddress, type PostalAddress } from '../db/schema/companies.ts';

export type { AddressPurpose, PostalAddress };

/** More would be a list nobody reads. */
const mostAddresses = 50;

async function addressForUpdate(tx: Tx, input: { companyId: string; addressId: string; version: number }) {
  const [row] = await tx
    .select()
    .from(companyAddress)
    .where(and(eq(companyAddress.id, input.addressId), eq(companyAddress.companyId, input.companyId)));
  if (!row || row.archivedAt !== null) throw new AppError('not-found');
  if (row.version !== input.version) {
    throw new AppError('version-conflict', {
      data: { ...row.address, purpose: row.purpose, version: row.version },
    });
  }
  return row;
}

export async function addAddress(
  db: Database,
  actor: Actor,
  input: { companyId: string; purpose: AddressPurpose; address: PostalAddress },
): Promise<string> {
  requireAccess(actor, 'company.edit', { companyId: input.companyId });
  return transact(db, async (tx) => {
    const [count] = await tx
      .select({ n: sql<number>`count(*)` })
      .from(companyAddress)
      .where(and(eq(companyAddress.companyId, input.companyId), isNull(companyAddress.archivedAt)));
    if ((count?.n ?? 0) >= mostAddresses) {
      throw new AppError('limit-exceeded', { detail: `A company keeps ${mostAddresses} addresses at most.` });
    }
    const id = newId();
    await tx.insert(companyAddress).values({ id, ...input });
    await audit(tx, actor, {
      action: 'address.add',
      subjectType: 'company-address',
      subjectId: id,
      companyId: input.companyId,
      detail: { purpose: input.purpose },
    });
    return id;
  });
}

/** Changes an address; orders keep the one they were made with. */
export async function updateAddress(
  db: Database,
  actor: Actor,
  input: {
    companyId: string;
    addressId: string;
    purpose: AddressPurpose;
    address: PostalAddress;
    version: number;
  },
): Promise<void> {
  requireAccess(actor, 'company.edit', { companyId: input.companyId });
  await transact(db, async (tx) => {
    const row = await addressForUpdate(tx, input);
    await tx
      .update(companyAddress)
      .set({ purpose: input.purpose, address: input.address, version: row.version + 1 })
      .where(eq(companyAddress.id, row.id));
    await audit(tx, actor, {
      action: 'address.update',
      subjectType: 'company-address',
      subjectId: row.id,
      companyId: input.companyId,
      detail: { before: row.address, after: input.address },
    });
  });
}

/** Takes an address off the lists without deleting it. */
export async function archiveAddress(
  db: Database,
  actor: Actor,
  input: { companyId: string; addressId: string; version: number },
): Promise<void> {
  requireAccess(actor, 'company.edit', { companyId: input.companyId });
  await transact(db, async (tx) => {
    const row = await addressForUpdate(tx, input);
    await tx
      .update(companyAddress)
      .set({ archivedAt: await businessNow(tx), version: row.version + 1 })
      .where(eq(companyAddress.id, row.id));
    await audit(tx, actor, {
      action: 'address.archive',
      subjectType: 'company-address',
      subjectId: row.id,
      companyId: input.companyId,
    });
  });
}
