import type { Currency } from './money.ts';

/** Delivery terms of Incoterms 2020 (International Chamber of Commerce), by code. */
export const deliveryTerms = [
  'EXW',
  'FCA',
  'CPT',
  'CIP',
  'DAP',
  'DPU',
  'DDP',
  'FAS',
  'FOB',
  'CFR',
  'CIF',
] as const;
export type DeliveryTerm = (typeof deliveryTerms)[number];

export const deliveryTermText: Record<DeliveryTerm, string> = {
  EXW: 'EXW, ex works',
  FCA: 'FCA, free carrier',
  CPT: 'CPT, carriage paid to',
  CIP: 'CIP, carriage and insurance paid to',
  DAP: 'DAP, delivered at place',
  DPU: 'DPU, delivered at place unloaded',
  DDP: 'DDP, delivered duty paid',
  FAS: 'FAS, free alongside ship',
  FOB: 'FOB, free on board',
  CFR: 'CFR, cost and freight',
  CIF: 'CIF, cost, insurance and freight',
};

/** What the buyer allows in a bid's milestone plan, in basis points of the whole. */
export interface MilestoneLimits {
  drawingMaxBp: number;
  deliveryMinBp: number;
}

export const defaultMilestoneLimits: MilestoneLimits = { drawingMaxBp: 2000, deliveryMinBp: 2000 };
export const defaultInspectionDays = 10;

/** The commercial side of a request. Dates are `YYYY-MM-DD` in the buyer's zone. */
export interface Commercial {
  quantity: number;
  firstArticle: boolean;
  needBy: string | null;
  deliveryTerm: DeliveryTerm;
  deliveryPlace: string;
  currency: Currency;
  poNumber: string;
  costCentre: string;
  /** The last day on which bids are taken; it ends at 24:00 in the buyer's zone. */
  closesOn: string;
  /** Free-issue and sample parts that the buyer sends along. */
  freeIssue: string;
  milestoneLimits: MilestoneLimits;
  inspectionDays: number;
  /** Minor units; never leaves the buyer's company. */
  budget: number | null;
}

/** What a bidder may see of it. */
export type PublicCommercial = Omit<Commercial, 'budget' | 'poNumber' | 'costCentre'>;

/** Takes out what belongs to the buyer alone. */
export function publicCommercial(commercial: Commercial): PublicCommercial {
  return {
    quantity: commercial.quantity,
    firstArticle: commercial.firstArticle,
    needBy: commercial.needBy,
    deliveryTerm: commercial.deliveryTerm,
    deliveryPlace: commercial.deliveryPlace,
    currency: commercial.currency,
    closesOn: commercial.closesOn,
    freeIssue: commercial.freeIssue,
    milestoneLimits: commercial.milestoneLimits,
    inspectionDays: commercial.inspectionDays,
  };
}
