/**
 * Balance, transfers, refunds and disputes as documented ("Create separate charges and transfers", "Refund and
 * cancel payments", "How disputes work", "Balance transaction types"), recalled from memory.
 */
import type { Stripe } from 'stripe';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  accountParams,
  errorOf,
  eventually,
  pay,
  payee,
  standIn,
  startContract,
  type Contract,
} from '../../support/payments.ts';

let contract: Contract;
let account: string;
beforeAll(async () => {
  contract = await startContract();
  account = await payee(contract);
});
afterAll(() => contract.close());

const of = (list: { amount: number; currency: string }[], currency = 'eur') =>
  list.find((one) => one.currency === currency)?.amount ?? 0;
const balance = async () => {
  const { available, pending } = await contract.stripe.balance.retrieve();
  return { available: of(available), pending: of(pending) };
};
const transfer = (params: Partial<Stripe.TransferCreateParams> = {}) =>
  contract.stripe.transfers.create({ amount: 1000, currency: 'eur', destination: account, ...params });
const bt = (id: unknown) => contract.stripe.balanceTransactions.retrieve(String(id));

describe('the balance', () => {
  standIn('gets a payment less its fee, pending first and available after some days', async () => {
    const before = await balance();
    const charge = await pay(contract.stripe, 10_000);
    const transaction = await bt(charge.balance_transaction);
    expect(transaction).toMatchObject({
      type: 'charge',
      reporting_category: 'charge',
      amount: 10_000,
      status: 'pending',
      source: charge.id,
    });
    expect(transaction.fee).toBeGreaterThan(0);
    expect(transaction.net).toBe(10_000 - transaction.fee);
    expect(transaction.fee_details.reduce((sum, detail) => sum + detail.amount, 0)).toBe(transaction.fee);
    expect((await balance()).pending - before.pending).toBe(transaction.net);
    await contract.control('POST', 'clock', { advanceSeconds: 8 * 86_400 });
    expect((await bt(charge.balance_transaction)).status).toBe('available');
    expect((await balance()).available - before.available).toBeGreaterThanOrEqual(transaction.net);
  });

  it('gets a payment at once where the card bypasses waiting', async () => {
    const charge = await pay(contract.stripe, 10_000, 'pm_card_bypassPending');
    expect((await bt(charge.balance_transaction)).status).toBe('available');
  });
});

describe('a transfer', () => {
  it('needs available funds', async () => {
    const error = await errorOf(transfer({ amount: 99_000_000, currency: 'eur' }));
    expect(error).toMatchObject({
      type: 'StripeInvalidRequestError',
      code: 'balance_insufficient',
      statusCode: 400,
    });
  });

  it('from a named charge does not wait, and takes over its group', async () => {
    const charge = await pay(contract.stripe, 10_000, 'pm_card_visa', { transfer_group: 'order-9' });
    const made = await transfer({
      amount: 9500,
      source_transaction: charge.id,
      metadata: { milestone: 'm1' },
    });
    expect(made).toMatchObject({
      object: 'transfer',
      amount: 9500,
      destination: account,
      source_transaction: charge.id,
      transfer_group: 'order-9',
      reversed: false,
      metadata: { milestone: 'm1' },
    });
    expect(await bt(made.balance_transaction)).toMatchObject({
      type: 'transfer',
      amount: -9500,
      fee: 0,
      net: -9500,
      source: made.id,
    });
  });

  it('of more than the charge is refused, also in several parts', async () => {
    const charge = await pay(contract.stripe, 10_000);
    expect((await errorOf(transfer({ amount: 10_001, source_transaction: charge.id }))).statusCode).toBe(400);
    await transfer({ amount: 6000, source_transaction: charge.id });
    expect((await errorOf(transfer({ amount: 4001, source_transaction: charge.id }))).statusCode).toBe(400);
    expect((await transfer({ amount: 4000, source_transaction: charge.id })).amount).toBe(4000);
  });

  it('in another currency than its charge is refused by code', async () => {
    const charge = await pay(contract.stripe, 10_000);
    const error = await errorOf(transfer({ amount: 100, currency: 'gbp', source_transaction: charge.id }));
    expect(error.code).toBe('transfer_source_balance_parameters_mismatch');
  });

  it('from a charge that failed or does not exist is refused', async () => {
    const failed = await errorOf(pay(contract.stripe, 1000, 'pm_card_chargeDeclined'));
    expect(
      (await errorOf(transfer({ amount: 100, source_transaction: String(failed.charge) }))).statusCode,
    ).toBe(400);
    expect((await errorOf(transfer({ amount: 100, source_transaction: 'ch_none' }))).code).toBe(
      'resource_missing',
    );
  });

  it('of nothing, or in an unknown currency, is refused', async () => {
    expect((await errorOf(transfer({ amount: 0 }))).param).toBe('amount');
    expect((await errorOf(transfer({ currency: 'xxx' }))).param).toBe('currency');
  });

  it('to an account that does not exist, or was never onboarded, is refused by code', async () => {
    const charge = await pay(contract.stripe, 10_000);
    expect(
      await errorOf(transfer({ destination: 'acct_none', source_transaction: charge.id })),
    ).toMatchObject({ code: 'resource_missing', param: 'destination' });
    const fresh = await contract.stripe.v2.core.accounts.create(accountParams());
    expect((await errorOf(transfer({ destination: fresh.id, source_transaction: charge.id }))).code).toBe(
      'insufficient_capabilities_for_transfer',
    );
  });

  standIn('to a restricted, rejected or closed account is refused by code', async () => {
    const charge = await pay(contract.stripe, 10_000);
    const to = await payee(contract);
    await contract.control('POST', `accounts/${to}/restrict`);
    expect((await errorOf(transfer({ destination: to, source_transaction: charge.id }))).code).toBe(
      'insufficient_capabilities_for_transfer',
    );
    await contract.control('POST', `accounts/${to}/reject`);
    expect((await errorOf(transfer({ destination: to, source_transaction: charge.id }))).code).toBe(
      'transfers_not_allowed',
    );
    await contract.control('POST', `accounts/${to}/activate`);
    expect((await transfer({ destination: to, source_transaction: charge.id })).destination).toBe(to);
    await contract.stripe.v2.core.accounts.close(to);
    expect((await errorOf(transfer({ destination: to, source_transaction: charge.id }))).code).toBe(
      'resource_missing',
    );
  });

  it('can be found by its group and its destination, and keeps added metadata', async () => {
    const charge = await pay(contract.stripe, 10_000, 'pm_card_visa', { transfer_group: 'order-find' });
    const made = await transfer({ amount: 700, source_transaction: charge.id, transfer_group: 'order-find' });
    expect(
      (await contract.stripe.transfers.list({ transfer_group: 'order-find' })).data.map((one) => one.id),
    ).toEqual([made.id]);
    expect((await contract.stripe.transfers.list({ destination: 'acct_none' })).data).toEqual([]);
    await contract.stripe.transfers.update(made.id, { metadata: { note: 'late' } });
    expect((await contract.stripe.transfers.retrieve(made.id)).metadata).toEqual({ note: 'late' });
  });
});

describe('a reversal', () => {
  it('takes back a part, then the rest, and no more', async () => {
    const charge = await pay(contract.stripe, 10_000);
    const made = await transfer({ amount: 5000, source_transaction: charge.id });
    const part = await contract.stripe.transfers.createReversal(made.id, {
      amount: 2000,
      metadata: { why: 'refund' },
    });
    expect(part).toMatchObject({ object: 'transfer_reversal', amount: 2000, transfer: made.id });
    expect(await contract.stripe.transfers.retrieve(made.id)).toMatchObject({
      amount_reversed: 2000,
      reversed: false,
    });
    expect(
      (await errorOf(contract.stripe.transfers.createReversal(made.id, { amount: 3001 }))).statusCode,
    ).toBe(400);
    await contract.stripe.transfers.createReversal(made.id, { amount: 3000 });
    expect(await contract.stripe.transfers.retrieve(made.id)).toMatchObject({
      amount_reversed: 5000,
      reversed: true,
    });
    expect((await errorOf(contract.stripe.transfers.createReversal(made.id))).statusCode).toBe(400);
    expect((await contract.stripe.transfers.listReversals(made.id)).data.map((one) => one.amount)).toEqual([
      3000, 2000,
    ]);
    expect((await contract.stripe.transfers.retrieveReversal(made.id, part.id)).id).toBe(part.id);
  });

  standIn('fails when the account has been emptied', async () => {
    const charge = await pay(contract.stripe, 10_000);
    const to = await payee(contract);
    const made = await transfer({ amount: 5000, source_transaction: charge.id, destination: to });
    await contract.control('POST', `accounts/${to}/payout`, { amount: 4000 });
    expect((await errorOf(contract.stripe.transfers.createReversal(made.id, { amount: 1001 }))).code).toBe(
      'balance_insufficient',
    );
    expect((await contract.stripe.transfers.createReversal(made.id, { amount: 1000 })).amount).toBe(1000);
  });
});

describe('a refund', () => {
  it('gives back all of a charge', async () => {
    const charge = await pay(contract.stripe, 4000);
    const refund = await contract.stripe.refunds.create({
      charge: charge.id,
      reason: 'requested_by_customer',
      metadata: { milestone: 'm1' },
    });
    expect(refund).toMatchObject({
      object: 'refund',
      amount: 4000,
      status: 'succeeded',
      charge: charge.id,
      metadata: { milestone: 'm1' },
    });
    expect(await contract.stripe.charges.retrieve(charge.id)).toMatchObject({
      amount_refunded: 4000,
      refunded: true,
      status: 'succeeded',
    });
    expect(await bt(refund.balance_transaction)).toMatchObject({ type: 'refund', amount: -4000 });
    expect((await errorOf(contract.stripe.refunds.create({ charge: charge.id }))).code).toBe(
      'charge_already_refunded',
    );
  });

  it('gives back parts, never more than the charge', async () => {
    const charge = await pay(contract.stripe, 4000);
    await contract.stripe.refunds.create({ payment_intent: String(charge.payment_intent), amount: 1500 });
    expect(
      (await errorOf(contract.stripe.refunds.create({ charge: charge.id, amount: 2501 }))).statusCode,
    ).toBe(400);
    await contract.stripe.refunds.create({ charge: charge.id, amount: 2500 });
    const list = await contract.stripe.refunds.list({ charge: charge.id });
    expect(list.data.map((one) => one.amount)).toEqual([2500, 1500]);
    expect(
      (await contract.stripe.charges.retrieve(charge.id, { expand: ['refunds'] })).refunds?.data,
    ).toHaveLength(2);
  });

  it('of what does not exist, failed, or is nothing is refused', async () => {
    expect((await errorOf(contract.stripe.refunds.create({ charge: 'ch_none' }))).code).toBe(
      'resource_missing',
    );
    expect((await errorOf(contract.stripe.refunds.create({}))).statusCode).toBe(400);
    const failed = await errorOf(pay(contract.stripe, 1000, 'pm_card_chargeDeclined'));
    expect(
      (await errorOf(contract.stripe.refunds.create({ charge: String(failed.charge) }))).statusCode,
    ).toBe(400);
    const charge = await pay(contract.stripe, 1000);
    expect((await errorOf(contract.stripe.refunds.create({ charge: charge.id, amount: 0 }))).statusCode).toBe(
      400,
    );
  });

  it('does not pull back a transfer of the same charge', async () => {
    const charge = await pay(contract.stripe, 10_000);
    const made = await transfer({ amount: 5000, source_transaction: charge.id });
    await contract.stripe.refunds.create({ charge: charge.id, amount: 1000 });
    expect(await contract.stripe.transfers.retrieve(made.id)).toMatchObject({ amount_reversed: 0 });
  });

  standIn('may be pending first and succeed later', async () => {
    const charge = await pay(contract.stripe, 4000, 'pm_card_pendingRefund');
    const refund = await contract.stripe.refunds.create({ charge: charge.id });
    expect(refund.status).toBe('pending');
    await contract.control('POST', 'clock', { advanceSeconds: 5 });
    expect((await contract.stripe.refunds.retrieve(refund.id)).status).toBe('succeeded');
  });

  standIn('may fail later: the money comes back and the charge can be refunded again', async () => {
    const charge = await pay(contract.stripe, 4000, 'pm_card_refundFail');
    const refund = await contract.stripe.refunds.create({ charge: charge.id });
    expect(refund.status).toBe('succeeded');
    await contract.control('POST', 'clock', { advanceSeconds: 5 });
    const failed = await eventually(
      () => contract.stripe.refunds.retrieve(refund.id),
      (one) => one.status === 'failed',
    );
    expect(failed.failure_reason).toBe('lost_or_stolen_card');
    expect(await bt(failed.failure_balance_transaction)).toMatchObject({
      type: 'refund_failure',
      amount: 4000,
    });
    expect(await contract.stripe.charges.retrieve(charge.id)).toMatchObject({
      amount_refunded: 0,
      refunded: false,
    });
    const events = await contract.stripe.events.list({ type: 'refund.failed' });
    expect(events.data[0]?.data.object).toMatchObject({ id: refund.id });
  });

  standIn('without funds waits for them', async () => {
    const charge = await pay(contract.stripe, 4000);
    const { available, pending } = await balance();
    await contract.control('POST', 'balance', { amount: -(available + pending) });
    const refund = await contract.stripe.refunds.create({ charge: charge.id });
    expect(refund).toMatchObject({
      status: 'pending',
      pending_reason: 'insufficient_funds',
      balance_transaction: null,
    });
    await contract.control('POST', 'balance', { amount: 500_000 });
    expect(await contract.stripe.refunds.retrieve(refund.id)).toMatchObject({ status: 'succeeded' });
  });

  it('keeps added metadata and cannot be cancelled', async () => {
    const charge = await pay(contract.stripe, 1000);
    const refund = await contract.stripe.refunds.create({ charge: charge.id });
    expect((await contract.stripe.refunds.update(refund.id, { metadata: { a: 'b' } })).metadata).toEqual({
      a: 'b',
    });
    expect((await errorOf(contract.stripe.refunds.cancel(refund.id))).statusCode).toBe(400);
  });
});

describe('a dispute', () => {
  const disputed = async (method = 'pm_card_createDispute') => {
    const charge = await pay(contract.stripe, 8000, method);
    const list = await eventually(
      () => contract.stripe.disputes.list({ charge: charge.id }),
      (one) => one.data.length > 0,
      20_000,
    );
    const [dispute] = list.data;
    if (dispute === undefined) throw new Error('no dispute');
    return { charge, dispute };
  };

  it('takes amount and fee from the balance and blocks refunds', async () => {
    const { charge, dispute } = await disputed();
    expect(dispute).toMatchObject({
      status: 'needs_response',
      reason: 'fraudulent',
      amount: 8000,
      charge: charge.id,
      is_charge_refundable: false,
    });
    expect(dispute.balance_transactions).toMatchObject([
      { type: 'adjustment', reporting_category: 'dispute', amount: -8000 },
    ]);
    expect(dispute.balance_transactions[0]?.fee).toBeGreaterThan(0);
    expect((await contract.stripe.charges.retrieve(charge.id)).disputed).toBe(true);
    expect((await errorOf(contract.stripe.refunds.create({ charge: charge.id }))).code).toBe(
      'charge_disputed',
    );
  });

  it('as an inquiry moves no money and leaves the charge refundable', async () => {
    const { charge, dispute } = await disputed('pm_card_createDisputeInquiry');
    expect(dispute).toMatchObject({
      status: 'warning_needs_response',
      balance_transactions: [],
      is_charge_refundable: true,
    });
    expect((await contract.stripe.refunds.create({ charge: charge.id, amount: 100 })).amount).toBe(100);
  });

  it('goes to review with evidence, and is won by the documented words', async () => {
    const { dispute } = await disputed();
    const review = await contract.stripe.disputes.update(dispute.id, {
      evidence: { product_description: 'A coil' },
      submit: true,
    });
    expect(review).toMatchObject({
      status: 'under_review',
      evidence_details: { has_evidence: true, submission_count: 1 },
    });
    const { dispute: other } = await disputed();
    await contract.stripe.disputes.update(other.id, { evidence: { uncategorized_text: 'winning_evidence' } });
    const won = await eventually(
      () => contract.stripe.disputes.retrieve(other.id),
      (one) => one.status === 'won',
      20_000,
    );
    expect(won.balance_transactions.map((one) => one.amount)).toEqual([-8000, 8000]);
  });

  standIn('that is won gives the money back; one that is lost does not', async () => {
    for (const [call, status, moved] of [
      ['win', 'won', 2],
      ['lose', 'lost', 1],
    ] as const) {
      const charge = await pay(contract.stripe, 8000);
      const opened = await contract.control('POST', 'disputes', { charge: charge.id, amount: 3000 });
      await contract.control('POST', `disputes/${String(opened['id'])}/${call}`);
      const dispute = await contract.stripe.disputes.retrieve(String(opened['id']));
      expect(dispute.status).toBe(status);
      expect(dispute.balance_transactions).toHaveLength(moved);
      expect((await contract.stripe.charges.retrieve(charge.id)).disputed).toBe(call === 'lose');
    }
  });

  it('can be given up, once', async () => {
    const { dispute } = await disputed();
    expect((await contract.stripe.disputes.close(dispute.id)).status).toBe('lost');
    expect((await errorOf(contract.stripe.disputes.close(dispute.id))).statusCode).toBe(400);
    expect(
      (
        await errorOf(
          contract.stripe.disputes.update(dispute.id, { evidence: { product_description: 'late' } }),
        )
      ).statusCode,
    ).toBe(400);
  });
});

describe('all of it together', () => {
  standIn('adds up: the net of all balance transactions is what is available and pending', async () => {
    let net = 0;
    let rows = 0;
    const seen = new Set<string>();
    for await (const row of contract.stripe.balanceTransactions.list({ limit: 100, currency: 'eur' })) {
      net += row.net;
      rows += 1;
      seen.add(row.type);
    }
    const { available, pending } = await balance();
    expect(rows).toBeGreaterThan(40);
    expect([...seen].sort()).toEqual([
      'adjustment',
      'charge',
      'payout',
      'refund',
      'refund_failure',
      'topup',
      'transfer',
      'transfer_refund',
    ]);
    expect(available + pending).toBe(net);
  });
});
