import type { MilestoneLimits } from './commercial.ts';
import { fractionHalfUp, splitByWeights, type Currency } from './money.ts';
import { defineStateMachine } from './transitions.ts';

/** What a fabricator offers. Amounts are integer minor units of the request's currency. */
export const priceKinds = ['tooling', 'coil', 'fixture', 'tests', 'packing', 'freight', 'other'] as const;
export type PriceKind = (typeof priceKinds)[number];

export const priceKindText: Record<PriceKind, string> = {
  tooling: 'Tooling (mandrels, nests)',
  coil: 'Work coil',
  fixture: 'Fixture',
  tests: 'Tests and records',
  packing: 'Packing',
  freight: 'Freight',
  other: 'Other',
};

export interface PriceLine {
  kind: PriceKind;
  label: string;
  /** Net, for the whole quantity. */
  amount: number;
}

export const taxKinds = ['vat', 'sales-tax', 'reverse-charge', 'export', 'other'] as const;
export type TaxKind = (typeof taxKinds)[number];

export const taxKindText: Record<TaxKind, string> = {
  vat: 'Value added tax',
  'sales-tax': 'Sales tax',
  'reverse-charge': 'Reverse charge (no tax shown)',
  export: 'Export (no tax)',
  other: 'Other tax or duty',
};

/** A tax line as the fabricator enters it: nothing is computed for them but the product rate × base. */
export interface TaxLine {
  kind: TaxKind;
  /** Basis points, 1900 = 19 %. */
  rateBp: number;
  amount: number;
}

export const milestoneKinds = ['material', 'drawing', 'build', 'delivery'] as const;
export type MilestoneKind = (typeof milestoneKinds)[number];

export const milestoneKindText: Record<MilestoneKind, string> = {
  material: 'Material',
  drawing: 'Drawing',
  build: 'Build',
  delivery: 'Delivery',
};

export interface MilestoneShare {
  kind: MilestoneKind;
  /** Basis points of the total; a plan adds up to 10 000. */
  shareBp: number;
}

export type ToolingOwner = 'buyer' | 'fabricator' | 'none';

export const toolingOwnerText: Record<ToolingOwner, string> = {
  buyer: 'The buyer owns the tooling',
  fabricator: 'The fabricator keeps the tooling',
  none: 'No tooling is made',
};

export interface BidBody {
  lines: PriceLine[];
  taxLines: TaxLine[];
  milestonePlan: MilestoneShare[];
  toolingOwner: ToolingOwner;
  warrantyMonths: number;
  note: string;
}

export const defaultMilestonePlan: MilestoneShare[] = [
  { kind: 'drawing', shareBp: 2000 },
  { kind: 'build', shareBp: 5000 },
  { kind: 'delivery', shareBp: 3000 },
];

export interface BidTotals {
  currency: Currency;
  net: number;
  freight: number;
  tax: number;
  total: number;
}

/** Sums of a bid. Net holds freight; tax is the fabricator's own figure. Throws RangeError beyond safe integers. */
export function bidTotals(body: Pick<BidBody, 'lines' | 'taxLines'>, currency: Currency): BidTotals {
  const add = (amounts: number[]) =>
    amounts.reduce((a, b) => {
      const result = a + b;
      if (!Number.isSafeInteger(result)) throw new RangeError('the sum is too large');
      return result;
    }, 0);
  const net = add(body.lines.map((line) => line.amount));
  const freight = add(body.lines.filter((line) => line.kind === 'freight').map((line) => line.amount));
  const tax = add(body.taxLines.map((line) => line.amount));
  return { currency, net, freight, tax, total: add([net, tax]) };
}

/** The tax that a rate gives on a base, half up: offered as a starting value, the fabricator answers for it. */
export function taxOn(base: number, rateBp: number): number {
  return fractionHalfUp(base, rateBp);
}

/** Amount of each milestone: the total by shares, no minor unit lost (largest remainder). */
export function milestoneAmounts(total: number, plan: readonly MilestoneShare[]): number[] {
  return splitByWeights(
    total,
    plan.map((share) => share.shareBp),
  );
}

/** Messages by field for a milestone plan that does not add up or leaves the buyer's limits; empty when it is right. */
export function planProblems(
  plan: readonly MilestoneShare[],
  limits: MilestoneLimits,
): Partial<Record<MilestoneKind | 'plan', string>> {
  const share = (kind: MilestoneKind) => plan.find((m) => m.kind === kind)?.shareBp ?? 0;
  const percent = (bp: number) => `${bp / 100} %`;
  const problems: Partial<Record<MilestoneKind | 'plan', string>> = {};
  const kinds = plan.map((m) => m.kind);
  if (new Set(kinds).size !== kinds.length) problems.plan = 'Each milestone may be there once.';
  for (const kind of ['drawing', 'build', 'delivery'] as const) {
    if (share(kind) <= 0) problems[kind] = `${milestoneKindText[kind]} needs a share above 0 %.`;
  }
  const sum = plan.reduce((a, m) => a + m.shareBp, 0);
  if (sum !== 10_000) problems.plan ??= `The shares add up to ${percent(sum)}; they have to make 100 %.`;
  if (share('drawing') > limits.drawingMaxBp) {
    problems.drawing ??= `The buyer allows at most ${percent(limits.drawingMaxBp)} for the drawing.`;
  }
  if (share('delivery') < limits.deliveryMinBp) {
    problems.delivery ??= `The buyer asks for at least ${percent(limits.deliveryMinBp)} on delivery.`;
  }
  return problems;
}

export const bidStates = [
  'draft',
  'submitted',
  'to-confirm',
  'awarded',
  'not-selected',
  'withdrawn',
  'lapsed',
] as const;
export type BidState = (typeof bidStates)[number];

export const bidMachine = defineStateMachine({
  name: 'bid',
  initial: 'draft',
  states: bidStates,
  transitions: [
    { event: 'submit', from: ['draft'], to: 'submitted' },
    { event: 'revise', from: ['submitted', 'to-confirm', 'withdrawn'], to: 'draft' },
    // From not selected: the buyer turns to this bid after an order fell through; the bidder has to agree.
    { event: 'ask-confirmation', from: ['submitted', 'not-selected'], to: 'to-confirm' },
    { event: 'confirm', from: ['to-confirm'], to: 'submitted' },
    { event: 'award', from: ['submitted'], to: 'awarded' },
    { event: 'pass-over', from: ['draft', 'submitted', 'to-confirm'], to: 'not-selected' },
    { event: 'withdraw', from: ['draft', 'submitted', 'to-confirm'], to: 'withdrawn' },
    { event: 'lapse', from: ['draft', 'submitted', 'to-confirm'], to: 'lapsed' },
  ],
});
export type BidEvent = (typeof bidMachine.transitions)[number]['event'];

/** A bid confirmed after an order fell through holds for at least this long again. */
export const daysHeldAgain = 30;

export const bidStateText: Record<BidState, string> = {
  draft: 'Draft',
  submitted: 'Submitted',
  'to-confirm': 'To be confirmed',
  awarded: 'Awarded',
  'not-selected': 'Not selected',
  withdrawn: 'Withdrawn',
  lapsed: 'Lapsed',
};

export const exceptionStates = ['open', 'accepted', 'refused'] as const;
export type ExceptionState = (typeof exceptionStates)[number];
export const exceptionMachine = defineStateMachine({
  name: 'bid-exception',
  initial: 'open',
  states: exceptionStates,
  transitions: [
    { event: 'accept', from: ['open', 'refused'], to: 'accepted' },
    { event: 'refuse', from: ['open', 'accepted'], to: 'refused' },
  ],
});
export type ExceptionEvent = (typeof exceptionMachine.transitions)[number]['event'];

export const approvalStates = ['asked', 'given', 'refused'] as const;
export type ApprovalState = (typeof approvalStates)[number];
export const approvalMachine = defineStateMachine({
  name: 'approval',
  initial: 'asked',
  states: approvalStates,
  transitions: [
    { event: 'give', from: ['asked'], to: 'given' },
    { event: 'refuse', from: ['asked'], to: 'refused' },
  ],
});
export type ApprovalEvent = (typeof approvalMachine.transitions)[number]['event'];

/** What the buyer would have released before the measured record of a finished coil is accepted, minor units. */
export function exposureBeforeEvidence(total: number, plan: readonly MilestoneShare[]): number {
  const amounts = milestoneAmounts(total, plan);
  return plan.reduce(
    (sum, share, index) =>
      share.kind === 'material' || share.kind === 'drawing' ? sum + (amounts[index] ?? 0) : sum,
    0,
  );
}
