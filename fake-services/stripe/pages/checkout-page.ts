import { luhnValid, TEST_CARDS, TEST_IBANS, type CardBehaviour } from '../cards.ts';
import { formatAmount } from '../core/money.ts';
import type { SessionRecord } from '../core/records.ts';
import type { PaymentService } from '../core/service.ts';
import { confirmSession, paySession } from '../resources/checkout-sessions.ts';
import { escapeHtml, htmlPage } from './layout.ts';

export interface PageAnswer {
  status: number;
  html?: string;
  location?: string;
}

function linesTable(record: SessionRecord): string {
  const currency = record.object.currency ?? 'eur';
  const rows = record.lineItems
    .map(
      (item) =>
        `<tr><td>${escapeHtml(item.description)}${item.quantity > 1 ? ` × ${String(item.quantity)}` : ''}${
          item.detail === null ? '' : `<br><small>${escapeHtml(item.detail)}</small>`
        }</td><td>${formatAmount(item.unitAmount * item.quantity, currency)}</td></tr>`,
    )
    .join('');
  return `<table><thead><tr><th>For</th><th>Amount</th></tr></thead><tbody>${rows}</tbody>
<tfoot><tr><th>Total</th><th id="total">${formatAmount(record.object.amount_total ?? 0, currency)}</th></tr></tfoot></table>`;
}

export function payPage(
  record: SessionRecord,
  error: string | null,
  values: Record<string, string> = {},
): string {
  const session = record.object;
  const value = (name: string, fallback = '') => escapeHtml(values[name] ?? fallback);
  return htmlPage(
    error === null ? 'Pay' : 'Error: Pay',
    `<h1>Pay ${formatAmount(session.amount_total ?? 0, session.currency ?? 'eur')}</h1>
${error === null ? '' : `<p class="error" role="alert" id="error">${escapeHtml(error)}</p>`}
${linesTable(record)}
<form method="post">
<h2>Card</h2>
<label for="email">E-mail</label><input id="email" name="email" type="email" autocomplete="email" value="${value('email', session.customer_email ?? '')}">
<label for="card">Card number</label><input id="card" name="card" inputmode="numeric" autocomplete="cc-number" value="${value('card')}">
<div class="pair"><div><label for="expiry">Expiry (MM/YY)</label><input id="expiry" name="expiry" autocomplete="cc-exp" value="${value('expiry')}"></div>
<div><label for="cvc">Security code</label><input id="cvc" name="cvc" inputmode="numeric" autocomplete="cc-csc" value=""></div></div>
<h2>Or bank debit</h2>
<label for="iban">IBAN</label><input id="iban" name="iban" autocomplete="off" value="${value('iban')}">
${record.submitMessage === null ? '' : `<p>${escapeHtml(record.submitMessage)}</p>`}
<button class="primary" type="submit" id="pay">Pay ${formatAmount(session.amount_total ?? 0, session.currency ?? 'eur')}</button>
</form>
${session.cancel_url === null ? '' : `<p><a id="back" href="${escapeHtml(session.cancel_url)}">Back without paying</a></p>`}
<p><small>Test numbers: <code>4242 4242 4242 4242</code> pays, <code>4000 0000 0000 0002</code> is declined, <code>4000 0027 6000 3184</code> asks the bank first. Any later expiry, any security code. IBAN <code>DE89 3704 0044 0532 0130 00</code> pays after some seconds, <code>DE62 3704 0044 0532 0130 01</code> fails.</small></p>`,
  );
}

function closedPage(record: SessionRecord): string {
  const session = record.object;
  const paid = session.status === 'complete';
  const back = paid ? successUrl(record) : session.cancel_url;
  return htmlPage(
    paid ? 'Already paid' : 'Page expired',
    `<h1>${paid ? 'This payment has been made' : 'This payment page has expired'}</h1>
<p>${paid ? 'Nothing more is to be done here.' : 'Nothing was charged. Go back and start the payment again.'}</p>
${back === null ? '' : `<p><a id="back" href="${escapeHtml(back)}">Back to the order</a></p>`}`,
  );
}

function successUrl(record: SessionRecord): string {
  return (record.object.success_url ?? '/').replaceAll('{CHECKOUT_SESSION_ID}', record.object.id);
}

function expired(service: PaymentService, expiry: string): boolean {
  const match = /^(\d{2})\s*\/?\s*(\d{2}|\d{4})$/.exec(expiry.trim());
  if (match === null) return true;
  const month = Number(match[1]);
  const year = Number(match[2]) + ((match[2] ?? '').length === 2 ? 2000 : 0);
  if (month < 1 || month > 12) return true;
  return Date.UTC(year, month, 1) / 1000 <= service.now();
}

/** Reads the form: the way to pay, or what is wrong with it. */
function readMethod(service: PaymentService, form: Record<string, string>): CardBehaviour | string {
  const iban = (form['iban'] ?? '').replace(/\s/g, '').toUpperCase();
  const number = (form['card'] ?? '').replace(/[\s-]/g, '');
  if (number === '' && iban !== '') return TEST_IBANS[iban] ?? 'This IBAN is not one of the test numbers.';
  if (number === '') return 'Enter a card number or an IBAN.';
  if (!luhnValid(number)) return 'The card number is incorrect.';
  if (expired(service, form['expiry'] ?? '')) return 'The expiry date is missing or in the past.';
  if (!/^\d{3,4}$/.test((form['cvc'] ?? '').trim())) return 'The security code is missing or incomplete.';
  return TEST_CARDS[number] ?? 'This card is not one of the test numbers; no other card is taken here.';
}

export function showSession(record: SessionRecord): PageAnswer {
  return record.object.status === 'open'
    ? { status: 200, html: payPage(record, null) }
    : { status: 200, html: closedPage(record) };
}

function outcome(
  service: PaymentService,
  record: SessionRecord,
  result: string,
  form: Record<string, string>,
): PageAnswer {
  if (result === 'succeeded' || result === 'processing') return { status: 303, location: successUrl(record) };
  const intent = service.store.tables.intents.get(String(record.object.payment_intent));
  if (result === 'requires_action')
    return { status: 303, location: `/confirm/${String(record.object.payment_intent)}` };
  return {
    status: 402,
    html: payPage(record, intent?.object.last_payment_error?.message ?? 'The payment was declined.', form),
  };
}

export function submitSession(
  service: PaymentService,
  record: SessionRecord,
  form: Record<string, string>,
): PageAnswer {
  if (record.object.status !== 'open') return { status: 200, html: closedPage(record) };
  const method = readMethod(service, form);
  if (typeof method === 'string') return { status: 400, html: payPage(record, method, form) };
  const email = (form['email'] ?? '').trim();
  return outcome(service, record, paySession(service, record, method, email === '' ? null : email), form);
}

export function showConfirmation(record: SessionRecord): PageAnswer {
  return {
    status: 200,
    html: htmlPage(
      'Confirm with your bank',
      `<h1>Confirm with your bank</h1><p>The card holder's bank asks whether this payment of
<strong>${formatAmount(record.object.amount_total ?? 0, record.object.currency ?? 'eur')}</strong> is yours.</p>
<form method="post"><button class="primary" name="answer" value="approve" id="approve" type="submit">Confirm payment</button>
<button class="plain" name="answer" value="deny" id="deny" type="submit">This was not me</button></form>`,
    ),
  };
}

export function submitConfirmation(
  service: PaymentService,
  record: SessionRecord,
  form: Record<string, string>,
): PageAnswer {
  return outcome(service, record, confirmSession(service, record, form['answer'] === 'approve'), {});
}
