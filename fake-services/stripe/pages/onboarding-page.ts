import type { AccountLinkRecord } from '../core/records.ts';
import type { PaymentService } from '../core/service.ts';
import { completeOnboarding, linkAddresses, linkReturned } from '../resources/account-links.ts';
import { findAccount } from '../resources/accounts.ts';
import type { PageAnswer } from './checkout-page.ts';
import { escapeHtml, htmlPage } from './layout.ts';

function form(
  link: AccountLinkRecord,
  name: string,
  error: string | null,
  values: Record<string, string>,
): string {
  const value = (field: string, fallback = '') => escapeHtml(values[field] ?? fallback);
  return htmlPage(
    error === null ? 'Set up payouts' : 'Error: Set up payouts',
    `<h1>Set up payouts${name === '' ? '' : ` for ${escapeHtml(name)}`}</h1>
${error === null ? '' : `<p class="error" role="alert" id="error">${escapeHtml(error)}</p>`}
<p>The payment service needs these details before money can be transferred to you.</p>
<form method="post" action="/onboarding/${escapeHtml(link.token)}">
<label for="name">Registered name of the business</label><input id="name" name="name" autocomplete="organization" value="${value('name', name)}">
<label for="iban">Bank account (IBAN)</label><input id="iban" name="iban" autocomplete="off" value="${value('iban')}">
<button class="primary" type="submit" name="answer" value="submit" id="submit">Submit details</button>
<button class="plain" type="submit" name="answer" value="later" id="later">Finish later</button>
</form><p><small>Test account: <code>DE89 3704 0044 0532 0130 00</code></small></p>`,
  );
}

/**
 * A link works once: its first opening shows the form; any other opening, or one after it expired, sends the
 * person to the refresh address, where the platform makes a new link.
 */
export function openOnboarding(service: PaymentService, link: AccountLinkRecord): PageAnswer {
  if (link.used || Date.parse(link.object.expires_at) <= service.now() * 1000) {
    return { status: 303, location: linkAddresses(link).refresh };
  }
  service.store.tables.accountLinks.put(link.token, { ...link, used: true });
  const account = findAccount(service, link.object.account);
  return { status: 200, html: form(link, account.object.display_name ?? '', null, {}) };
}

export function submitOnboarding(
  service: PaymentService,
  link: AccountLinkRecord,
  given: Record<string, string>,
): PageAnswer {
  const { refresh, back } = linkAddresses(link);
  if (!link.used || link.done) return { status: 303, location: refresh };
  if (given['answer'] !== 'later') {
    const name = (given['name'] ?? '').trim();
    const iban = (given['iban'] ?? '').replace(/\s/g, '').toUpperCase();
    if (name === '')
      return { status: 400, html: form(link, '', 'Enter the registered name of the business.', given) };
    if (!/^[A-Z]{2}\d{2}[A-Z0-9]{11,30}$/.test(iban)) {
      return { status: 400, html: form(link, name, 'Enter the IBAN of the business account.', given) };
    }
    completeOnboarding(service, link, name);
  } else {
    service.store.tables.accountLinks.put(link.token, { ...link, done: true });
  }
  linkReturned(service, link);
  return { status: 303, location: back ?? refresh };
}
