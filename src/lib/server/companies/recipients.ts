import { and, eq } from 'drizzle-orm';
import type { Role } from '../../domain/roles.ts';
import type { Reader, Tx } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { membership } from '../db/schema/companies.ts';
import { notify, type MailInput, type Recipient } from '../outbox/index.ts';

/** The active members of a company who hold one of the roles (owners always), or all of them. */
export async function recipientsOf(
  reader: Reader,
  companyId: string,
  roles: readonly Role[] | 'all',
): Promise<Recipient[]> {
  const rows = await reader
    .select({ userId: user.id, email: user.email, roles: membership.roles })
    .from(membership)
    .innerJoin(user, eq(user.id, membership.userId))
    .where(and(eq(membership.companyId, companyId), eq(membership.active, true)));
  return rows
    .filter((row) => roles === 'all' || row.roles.some((role) => role === 'owner' || roles.includes(role)))
    .map(({ userId, email }) => ({ userId, email }));
}

/** Mail and notification to the members of a company whose role it concerns. */
export async function notifyCompany(
  tx: Tx,
  companyId: string,
  roles: readonly Role[] | 'all',
  event: Omit<MailInput, 'to' | 'secret'> & { href: string },
): Promise<void> {
  await notify(tx, await recipientsOf(tx, companyId, roles), event);
}
