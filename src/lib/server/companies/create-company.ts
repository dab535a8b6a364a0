import { eq, sql } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { Currency } from '../../domain/money.ts';
import type { CompanyKind } from '../../domain/roles.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database } from '../db/index.ts';
import { company, membership } from '../db/schema/companies.ts';

/** Names are told apart without regard to case. */
export const sameNameAs = (name: string) => eq(sql`lower(${company.name})`, name.toLowerCase());

export interface CreateCompanyInput {
  commandId: string;
  kind: CompanyKind;
  name: string;
  currency: Currency;
  timeZone: string;
}

/**
 * Makes a company with the actor as its owner. The same command again answers with the company it made.
 * Kind and currency are for good. A fabricator may bid once an admin has verified it.
 */
export async function createCompany(db: Database, actor: Actor, input: CreateCompanyInput): Promise<string> {
  requireVerifiedEmail(actor);
  if (actor.isAdmin) {
    throw new AppError('not-allowed', {
      detail: 'Admins belong to no company; use another account for that.',
    });
  }
  return transact(db, async (tx) => {
    const [done] = await tx
      .select({ id: company.id, createdBy: company.createdBy })
      .from(company)
      .where(eq(company.commandId, input.commandId));
    if (done?.createdBy === actor.userId) return done.id;
    if (done) throw new AppError('not-found');
    const [sameName] = await tx.select({ id: company.id }).from(company).where(sameNameAs(input.name));
    if (sameName) {
      throw new AppError('already-exists', {
        fields: {
          name: 'A company of this name is here already. If it is yours, ask its owner for an invitation.',
        },
      });
    }
    const id = newId();
    const now = await businessNow(tx);
    await tx.insert(company).values({ ...input, id, createdAt: now, createdBy: actor.userId });
    await tx.insert(membership).values({
      id: newId(),
      companyId: id,
      userId: actor.userId,
      roles: ['owner'],
      createdAt: now,
    });
    await audit(tx, actor, {
      action: 'company.create',
      subjectType: 'company',
      subjectId: id,
      companyId: id,
      detail: { kind: input.kind, name: input.name, currency: input.currency },
    });
    return id;
  });
}
