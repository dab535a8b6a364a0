import { and, eq, gt, inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { can } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { company, invitation } from '../db/schema/companies.ts';
import { invitationsTo } from './invitations.ts';
import { rolesInWords } from './rules.ts';

/** What waits about companies: invitations to me, those my companies sent, verification. */
export async function companyDeskItems(reader: Reader, actor: Actor) {
  const toMe = await invitationsTo(reader, actor);
  const ownerOf = actor.memberships.filter((m) => can(actor, 'company.members', { companyId: m.companyId }));
  const sent =
    ownerOf.length === 0
      ? []
      : await reader
          .select({
            id: invitation.id,
            email: invitation.email,
            expiresAt: invitation.expiresAt,
            companyId: invitation.companyId,
            companyName: company.name,
          })
          .from(invitation)
          .innerJoin(company, eq(company.id, invitation.companyId))
          .where(
            and(
              inArray(
                invitation.companyId,
                ownerOf.map((m) => m.companyId),
              ),
              eq(invitation.state, 'open'),
              gt(invitation.expiresAt, await businessNow(reader)),
            ),
          );
  return [
    ...toMe.map((row) => ({
      id: `invitation/${row.id}`,
      title: `Answer the invitation of ${row.companyName}`,
      detail: `Your part would be: ${rolesInWords(row.roles)}`,
      href: `/invitations/${row.id}`,
      dueAt: row.expiresAt,
      waitsFor: 'me' as const,
    })),
    ...sent.map((row) => ({
      id: `invitation-sent/${row.id}`,
      title: 'Accept the invitation',
      detail: `${row.companyName}`,
      href: `/companies/${row.companyId}#invitations`,
      dueAt: row.expiresAt,
      waitsFor: 'others' as const,
      who: row.email,
    })),
    ...ownerOf
      .filter((m) => m.kind === 'fabricator' && !m.verified)
      .map((m) => ({
        id: `verification/${m.companyId}`,
        title: 'Ask for verification',
        detail: `${m.companyName} can bid once it is verified`,
        href: `/companies/${m.companyId}/verification`,
        dueAt: null,
        waitsFor: 'me' as const,
      })),
  ];
}
