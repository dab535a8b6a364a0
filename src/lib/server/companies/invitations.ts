import { createHash, randomBytes } from 'node:crypto';
import { and, eq } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { dayMs } from '../../domain/dates.ts';
import { AppError } from '../../domain/errors.ts';
import { invitationDays, invitationMachine } from '../../domain/invitation.ts';
import type { Role } from '../../domain/roles.ts';
import { requireAccess, requireSecondFactor, requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { company, invitation, membership } from '../db/schema/companies.ts';
import { transition } from '../db/transition.ts';
import { enqueueMail } from '../outbox/index.ts';
import { notifyCompany } from './recipients.ts';
import { rolesFor, rolesInWords } from './rules.ts';

const hashOf = (token: string) => createHash('sha256').update(token).digest('hex');

async function memberWithEmail(reader: Reader, companyId: string, email: string) {
  const [row] = await reader
    .select({ id: membership.id })
    .from(membership)
    .innerJoin(user, eq(user.id, membership.userId))
    .where(and(eq(membership.companyId, companyId), eq(membership.active, true), eq(user.email, email)));
  return row;
}

async function openInvitationTo(tx: Tx, companyId: string, email: string) {
  const [row] = await tx
    .select()
    .from(invitation)
    .where(
      and(eq(invitation.companyId, companyId), eq(invitation.email, email), eq(invitation.state, 'open')),
    );
  return row;
}

/**
 * Invites an address with a set of roles. An open invitation that has run out is replaced; one that is
 * still valid is kept and said so. Whether the address has an account is not told.
 */
export async function invite(
  db: Database,
  actor: Actor,
  input: { companyId: string; email: string; roles: readonly Role[] },
): Promise<string> {
  requireAccess(actor, 'company.members', { companyId: input.companyId });
  requireVerifiedEmail(actor);
  requireSecondFactor(actor);
  const { companyId } = input;
  const email = input.email.trim().toLowerCase();
  return transact(db, async (tx) => {
    const [row] = await tx.select().from(company).where(eq(company.id, companyId));
    if (!row) throw new AppError('not-found');
    const roles = rolesFor(row.kind, input.roles);
    if (await memberWithEmail(tx, companyId, email)) {
      throw new AppError('already-exists', { fields: { email: 'This person is a member already.' } });
    }
    const now = await businessNow(tx);
    const open = await openInvitationTo(tx, companyId, email);
    if (open && open.expiresAt > now) {
      throw new AppError('already-exists', {
        fields: { email: 'This person has an invitation already. Withdraw it first to send another.' },
      });
    }
    if (open) await withdraw(tx, actor, open);
    const id = newId();
    const token = randomBytes(32).toString('base64url');
    const expiresAt = now + invitationDays * dayMs;
    await tx.insert(invitation).values({
      id,
      companyId,
      email,
      roles,
      tokenHash: hashOf(token),
      expiresAt,
      invitedBy: actor.userId,
      createdAt: now,
    });
    await audit(tx, actor, {
      action: 'invitation.create',
      subjectType: 'invitation',
      subjectId: id,
      companyId,
      detail: { roles },
    });
    await mailInvitation(tx, { id, email, token, companyName: row.name, inviter: actor.name, roles });
    return id;
  });
}

async function mailInvitation(
  tx: Tx,
  about: {
    id: string;
    email: string;
    token: string;
    companyName: string;
    inviter: string;
    roles: readonly Role[];
  },
): Promise<void> {
  const [known] = await tx.select({ id: user.id }).from(user).where(eq(user.email, about.email));
  await enqueueMail(tx, {
    kind: 'company-invitation',
    to: { userId: known?.id ?? null, email: about.email },
    subject: `${about.companyName} invites you to Coilyard`,
    content: {
      heading: `Work with ${about.companyName}`,
      paragraphs: [
        `${about.inviter} invites you to take part in the orders of ${about.companyName}.`,
        `The invitation is for this address only and holds for ${invitationDays} days. Without an account yet, you make one on the way.`,
      ],
      facts: [
        ['Company', about.companyName],
        ['Your part', rolesInWords(about.roles)],
      ],
      action: { label: 'See the invitation', path: `/invitations/${about.token}` },
    },
    about: { type: 'invitation', id: about.id },
    secret: true,
  });
}

async function withdraw(tx: Tx, actor: Actor, row: typeof invitation.$inferSelect, expectedVersion?: number) {
  await transition(tx, {
    machine: invitationMachine,
    table: invitation,
    column: invitation.state,
    columnName: 'state',
    id: row.id,
    from: row.state,
    event: 'withdraw',
    by: actor,
    companyId: row.companyId,
    ...(expectedVersion === undefined ? {} : { expectedVersion }),
  });
}

export async function withdrawInvitation(
  db: Database,
  actor: Actor,
  input: { companyId: string; invitationId: string; version: number },
): Promise<void> {
  requireAccess(actor, 'company.members', { companyId: input.companyId });
  await transact(db, async (tx) => {
    const [row] = await tx
      .select()
      .from(invitation)
      .where(and(eq(invitation.id, input.invitationId), eq(invitation.companyId, input.companyId)));
    if (!row) throw new AppError('not-found');
    await withdraw(tx, actor, row, input.version);
  });
}

export interface InvitationView {
  state: 'open' | 'accepted' | 'withdrawn' | 'expired';
  companyId: string;
  companyName: string;
  companyKind: 'buyer' | 'fabricator';
  email: string;
  roles: Role[];
  inviter: string;
  expiresAt: number;
}

/** What the bearer of the link may see, signed in or not; by id only the invited person. */
export async function invitationByToken(
  reader: Reader,
  token: string,
  actor: Actor | null = null,
): Promise<InvitationView> {
  const own = actor?.emailVerified ? await ownInvitation(reader, actor, token) : undefined;
  const [row] = await reader
    .select({ invitation, company, inviter: user.name })
    .from(invitation)
    .innerJoin(company, eq(company.id, invitation.companyId))
    .innerJoin(user, eq(user.id, invitation.invitedBy))
    .where(own ? eq(invitation.id, own.id) : eq(invitation.tokenHash, hashOf(token)));
  if (!row) throw new AppError('not-found', { detail: 'There is no such invitation.' });
  const expired = row.invitation.state === 'open' && row.invitation.expiresAt <= (await businessNow(reader));
  return {
    state: expired ? 'expired' : row.invitation.state,
    companyId: row.company.id,
    companyName: row.company.name,
    companyKind: row.company.kind,
    email: row.invitation.email,
    roles: row.invitation.roles,
    inviter: row.inviter,
    expiresAt: row.invitation.expiresAt,
  };
}

/** The actor's own invitations, found by the confirmed address: the mail is not needed to accept them. */
export async function invitationsTo(reader: Reader, actor: Actor) {
  if (!actor.emailVerified) return [];
  const rows = await reader
    .select({
      id: invitation.id,
      companyName: company.name,
      roles: invitation.roles,
      expiresAt: invitation.expiresAt,
    })
    .from(invitation)
    .innerJoin(company, eq(company.id, invitation.companyId))
    .where(and(eq(invitation.email, actor.email.toLowerCase()), eq(invitation.state, 'open')));
  const now = await businessNow(reader);
  return rows.filter((row) => row.expiresAt > now);
}

/**
 * Makes the actor a member by the token of the mail, or by the id of an own invitation. The confirmed address must be the invited one, so
 * that a forwarded link is worth nothing and an id tells nobody else anything. Returns the company.
 */
export async function acceptInvitation(db: Database, actor: Actor, token: string): Promise<string> {
  requireVerifiedEmail(actor);
  if (actor.isAdmin) {
    throw new AppError('not-allowed', {
      detail: 'Admins belong to no company; use another account for that.',
    });
  }
  return transact(db, async (tx) => {
    const [byToken] = await tx
      .select()
      .from(invitation)
      .where(eq(invitation.tokenHash, hashOf(token)));
    const row = byToken ?? (await ownInvitation(tx, actor, token));
    if (!row) throw new AppError('not-found', { detail: 'There is no such invitation.' });
    if (row.email !== actor.email.toLowerCase()) {
      throw new AppError('not-allowed', {
        detail: `This invitation is for another address. Sign in with the account of the address that the mail was sent to.`,
      });
    }
    const now = await businessNow(tx);
    if (row.state === 'open' && row.expiresAt <= now) {
      throw new AppError('state-conflict', { detail: 'This invitation has run out. Ask for a new one.' });
    }
    await transition(tx, {
      machine: invitationMachine,
      table: invitation,
      column: invitation.state,
      columnName: 'state',
      id: row.id,
      from: row.state,
      event: 'accept',
      by: actor,
      companyId: row.companyId,
      set: { acceptedBy: actor.userId },
    });
    await joinCompany(tx, actor, row, now);
    return row.companyId;
  });
}

async function ownInvitation(reader: Reader, actor: Actor, id: string) {
  const [row] = await reader
    .select()
    .from(invitation)
    .where(and(eq(invitation.id, id), eq(invitation.email, actor.email.toLowerCase())));
  return row;
}

async function joinCompany(
  tx: Tx,
  actor: Actor,
  row: typeof invitation.$inferSelect,
  now: number,
): Promise<void> {
  const [former] = await tx
    .select()
    .from(membership)
    .where(and(eq(membership.companyId, row.companyId), eq(membership.userId, actor.userId)));
  if (former?.active)
    throw new AppError('already-exists', { detail: 'You are a member of this company already.' });
  if (former) {
    await tx
      .update(membership)
      .set({ active: true, roles: row.roles, version: former.version + 1 })
      .where(eq(membership.id, former.id));
  } else {
    await tx.insert(membership).values({
      id: newId(),
      companyId: row.companyId,
      userId: actor.userId,
      roles: row.roles,
      createdAt: now,
    });
  }
  await audit(tx, actor, {
    action: 'membership.join',
    subjectType: 'company',
    subjectId: row.companyId,
    companyId: row.companyId,
    detail: { userId: actor.userId, roles: row.roles },
  });
  await notifyCompany(tx, row.companyId, ['owner'], {
    kind: 'member-joined',
    subject: `${actor.name} has joined your company`,
    content: {
      heading: `${actor.name} has joined`,
      paragraphs: [`The invitation was accepted. Part in the company: ${rolesInWords(row.roles)}.`],
      action: { label: 'See the members', path: `/companies/${row.companyId}` },
    },
    about: { type: 'company', id: row.companyId },
    href: `/companies/${row.companyId}`,
    dedupeKey: `member-joined/${row.id}`,
  });
}
