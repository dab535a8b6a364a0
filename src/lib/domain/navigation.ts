import type { Actor } from './actor.ts';
import { can } from './policy.ts';
import { roleText } from './roles.ts';

interface Item {
  label: string;
  href: string;
}

/** The main navigation by what the person may do; the pages decide again for themselves. */
export function navigationFor(actor: Actor): Item[] {
  if (actor.isAdmin) {
    return [
      { label: 'Desk', href: '/desk' },
      { label: 'Fabricators', href: '/fabricators' },
      { label: 'Admin', href: '/admin' },
    ];
  }
  const buyer = actor.memberships.some((m) => m.kind === 'buyer');
  const fabricator = actor.memberships.some((m) => m.kind === 'fabricator');
  const items: Item[] = [{ label: 'Desk', href: '/desk' }];
  if (buyer) items.push({ label: 'Machines', href: '/machines' }, { label: 'Requests', href: '/requests' });
  if (can(actor, 'board.view')) items.push({ label: 'Board', href: '/board' });
  if (fabricator) items.push({ label: 'Bids', href: '/bids' });
  if (buyer || fabricator) items.push({ label: 'Orders', href: '/orders' });
  if (buyer) items.push({ label: 'Fabricators', href: '/fabricators' });
  const [only, ...more] = actor.memberships;
  if (only) {
    items.push(
      more.length === 0
        ? { label: 'Company', href: `/companies/${only.companyId}` }
        : { label: 'Companies', href: '/companies' },
    );
  }
  return items;
}

/** Under the name in the account menu: company and part, or the address. */
export function accountDetail(actor: Actor): string {
  if (actor.isAdmin) return 'Admin';
  const [first, ...more] = actor.memberships;
  if (!first) return actor.email;
  const roles = first.roles.map((role) => roleText[role].name).join(', ');
  return more.length > 0 ? `${first.companyName} and ${more.length} more` : `${first.companyName} · ${roles}`;
}
