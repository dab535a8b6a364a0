/** Chargebacks and inquiries: opened by test cards and control calls, answered through the API. */
import type { Stripe } from 'stripe';
import { z } from 'zod';
import { missing, refused } from '../core/errors.ts';
import { inRange, listPage } from '../core/listing.ts';
import { DISPUTE_FEE } from '../core/money.ts';
import { bool, expand, mergeMetadata, metadata, page, range, text } from '../core/params.ts';
import type { ChargeRecord } from '../core/records.ts';
import { route } from '../core/router.ts';
import type { PaymentService } from '../core/service.ts';

const EVIDENCE_FIELDS = [
  'access_activity_log',
  'billing_address',
  'cancellation_policy',
  'cancellation_policy_disclosure',
  'cancellation_rebuttal',
  'customer_communication',
  'customer_email_address',
  'customer_name',
  'customer_purchase_ip',
  'customer_signature',
  'duplicate_charge_documentation',
  'duplicate_charge_explanation',
  'duplicate_charge_id',
  'product_description',
  'receipt',
  'refund_policy',
  'refund_policy_disclosure',
  'refund_refusal_explanation',
  'service_date',
  'service_documentation',
  'shipping_address',
  'shipping_carrier',
  'shipping_date',
  'shipping_documentation',
  'shipping_tracking_number',
  'uncategorized_file',
  'uncategorized_text',
] as const;

export interface NewDispute {
  amount: number;
  reason: string;
  inquiry: boolean;
}

function withdrawFunds(service: PaymentService, dispute: Stripe.Dispute): void {
  dispute.balance_transactions.push(
    service.addBalanceTransaction({
      type: 'adjustment',
      reportingCategory: 'dispute',
      amount: -dispute.amount,
      fee: DISPUTE_FEE[dispute.currency] ?? 2000,
      feeDescription: 'Dispute fee',
      currency: dispute.currency,
      source: dispute.id,
      description: 'Chargeback withdrawal',
    }),
  );
}

export function openDispute(service: PaymentService, row: ChargeRecord, given: NewDispute): Stripe.Dispute {
  const charge = row.object;
  const noEvidence = Object.fromEntries(EVIDENCE_FIELDS.map((field) => [field, null])) as Record<
    (typeof EVIDENCE_FIELDS)[number],
    null
  >;
  const dispute = {
    id: service.store.id('du'),
    object: 'dispute',
    amount: given.amount,
    balance_transactions: [],
    charge: charge.id,
    created: service.now(),
    currency: charge.currency,
    enhanced_eligibility_types: [],
    evidence: { ...noEvidence, enhanced_evidence: {} },
    evidence_details: {
      due_by: service.now() + 9 * 86_400,
      enhanced_eligibility: {},
      has_evidence: false,
      past_due: false,
      submission_count: 0,
      submission_method: 'not_submitted',
    },
    intended_submission_method: null,
    is_charge_refundable: given.inquiry,
    livemode: false,
    metadata: {},
    network_reason_code: given.reason === 'fraudulent' ? '10.4' : '13.1',
    payment_intent: charge.payment_intent,
    reason: given.reason,
    status: given.inquiry ? 'warning_needs_response' : 'needs_response',
  } satisfies Stripe.Dispute as Stripe.Dispute;
  if (!given.inquiry) {
    withdrawFunds(service, dispute);
    charge.disputed = true;
  }
  service.store.tables.disputes.put(dispute.id, dispute);
  service.store.tables.charges.put(charge.id, row);
  service.emit('charge.dispute.created', dispute);
  if (!given.inquiry) service.emit('charge.dispute.funds_withdrawn', dispute);
  return dispute;
}

const isInquiry = (dispute: Stripe.Dispute): boolean => dispute.status.startsWith('warning_');
const isOpen = (dispute: Stripe.Dispute): boolean =>
  ['needs_response', 'under_review', 'warning_needs_response', 'warning_under_review'].includes(
    dispute.status,
  );

/** The bank's decision. */
export function closeDispute(service: PaymentService, dispute: Stripe.Dispute, won: boolean): void {
  if (!isOpen(dispute))
    throw refused('dispute_closed', `This dispute is already closed (${dispute.status}).`);
  const inquiry = isInquiry(dispute);
  dispute.status = inquiry ? 'warning_closed' : won ? 'won' : 'lost';
  if (won && !inquiry) {
    dispute.balance_transactions.push(
      service.addBalanceTransaction({
        type: 'adjustment',
        reportingCategory: 'dispute_reversal',
        amount: dispute.amount,
        currency: dispute.currency,
        source: dispute.id,
        description: 'Chargeback reversal',
      }),
    );
  }
  service.store.tables.disputes.put(dispute.id, dispute);
  const charge = service.store.tables.charges.get(String(dispute.charge));
  if (charge !== undefined && won) {
    charge.object.disputed = false;
    service.store.tables.charges.put(charge.object.id, charge);
  }
  service.emit('charge.dispute.closed', dispute);
  if (won && !inquiry) service.emit('charge.dispute.funds_reinstated', dispute);
}

function find(service: PaymentService, id: string): Stripe.Dispute {
  const dispute = service.store.tables.disputes.get(id);
  if (dispute === undefined) throw missing('dispute', id, 'dispute');
  return dispute;
}

const updateSchema = z.strictObject({
  evidence: z
    .strictObject(Object.fromEntries(EVIDENCE_FIELDS.map((field) => [field, text(150_000).optional()])))
    .optional(),
  metadata: metadata(),
  submit: bool().optional(),
  expand: expand(),
});

function update(service: PaymentService, params: z.output<typeof updateSchema>, id: string): Stripe.Dispute {
  const dispute = find(service, id);
  if (!isOpen(dispute))
    throw refused('dispute_closed', 'This dispute is closed; evidence can no longer be added.');
  dispute.metadata = mergeMetadata(dispute.metadata, params.metadata);
  if (params.evidence !== undefined) {
    Object.assign(dispute.evidence, params.evidence);
    dispute.evidence_details.has_evidence = true;
  }
  const submit = params.submit ?? params.evidence !== undefined;
  if (submit && dispute.evidence_details.has_evidence) {
    dispute.status = isInquiry(dispute) ? 'warning_under_review' : 'under_review';
    dispute.evidence_details.submission_count += 1;
    dispute.evidence_details.submission_method = 'manual';
  }
  service.store.tables.disputes.put(id, dispute);
  service.emit('charge.dispute.updated', dispute);
  // Documented test texts decide at once.
  const words = params.evidence?.['uncategorized_text'];
  if (words === 'winning_evidence') closeDispute(service, dispute, true);
  else if (words === 'losing_evidence') closeDispute(service, dispute, false);
  return dispute;
}

export const disputeRoutes = [
  route('GET', '/v1/disputes/:id', z.strictObject({ expand: expand() }), (service, _params, id) =>
    find(service, id),
  ),
  route('POST', '/v1/disputes/:id', updateSchema, update),
  route('POST', '/v1/disputes/:id/close', z.strictObject({ expand: expand() }), (service, _params, id) => {
    const dispute = find(service, id);
    closeDispute(service, dispute, false);
    return dispute;
  }),
  route(
    'GET',
    '/v1/disputes',
    z.strictObject({
      ...page,
      charge: text().optional(),
      payment_intent: text().optional(),
      created: range(),
    }),
    (service, params) =>
      listPage(
        service.store.tables.disputes
          .all()
          .filter(
            (row) =>
              (params.charge === undefined || row.charge === params.charge) &&
              (params.payment_intent === undefined || row.payment_intent === params.payment_intent) &&
              inRange(row.created, params.created),
          ),
        params,
        '/v1/disputes',
      ),
  ),
];
