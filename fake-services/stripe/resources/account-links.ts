/** Onboarding links: made by the API, opened once, answered on the page. */
import { randomBytes } from 'node:crypto';
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { invalidParam } from '../core/errors.ts';
import { text, url } from '../core/params.ts';
import type { AccountLinkRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';
import { emitAccount, findAccount, setTransfers } from './accounts.ts';

const linkCase = () =>
  z.strictObject({
    collection_options: z
      .strictObject({
        fields: z.enum(['currently_due', 'eventually_due']).optional(),
        future_requirements: z.enum(['include', 'omit']).optional(),
      })
      .optional(),
    refresh_url: url(),
    return_url: url().optional(),
  });

const linkSchema = z.strictObject({
  account: text(),
  use_case: z.strictObject({
    type: z.enum(['account_onboarding', 'account_update']),
    account_onboarding: linkCase().optional(),
    account_update: linkCase().optional(),
  }),
});

function createLink(
  service: PaymentService,
  params: z.output<typeof linkSchema>,
): Stripe.V2.Core.AccountLink {
  const account = findAccount(service, params.account);
  if (account.object.closed === true) throw invalidParam('account_closed', 'This account is closed.');
  const { type } = params.use_case;
  if (params.use_case[type] === undefined) {
    throw invalidParam('parameter_missing', `use_case.${type} is required.`, `use_case.${type}`);
  }
  // Not from the seed: the address alone opens someone's onboarding.
  const token = randomBytes(24).toString('base64url');
  const object = {
    object: 'v2.core.account_link',
    account: params.account,
    created: service.nowIso(),
    expires_at: new Date((service.now() + service.settings.accountLinkSeconds) * 1000).toISOString(),
    livemode: false,
    url: `${service.publicUrl}/onboarding/${token}`,
    use_case: params.use_case as Stripe.V2.Core.AccountLink.UseCase,
  } satisfies Stripe.V2.Core.AccountLink;
  service.store.tables.accountLinks.put(token, { object, token, used: false, done: false });
  return object;
}

export function linkAddresses(link: AccountLinkRecord): { refresh: string; back: string | null } {
  const useCase = link.object.use_case;
  const chosen = useCase.type === 'account_update' ? useCase.account_update : useCase.account_onboarding;
  return { refresh: chosen?.refresh_url ?? '/', back: chosen?.return_url ?? null };
}

/** What the onboarding page's form does: the account gets what it lacked. */
export function completeOnboarding(service: PaymentService, link: AccountLinkRecord, name: string): void {
  const record = findAccount(service, link.object.account);
  record.object.identity = { ...record.object.identity, business_details: { registered_name: name } };
  service.store.tables.accounts.put(record.object.id, record);
  emitAccount(service, record.object.id, '[identity].updated');
  if (record.transfers === 'requested') setTransfers(service, record, 'active');
  service.store.tables.accountLinks.put(link.token, { ...link, done: true });
}

export function linkReturned(service: PaymentService, link: AccountLinkRecord): void {
  service.emitThin('v2.core.account_link.returned', null, { account_id: link.object.account });
}

export const accountLinkRoutes = [route('POST', '/v2/core/account_links', linkSchema, createLink)];
