/** What a verified fabricator sees of requests: allow-lists. The buyer's budget, order number and cost centre are not among it. */
import { z } from 'zod';
import { deliveryTerms } from '../../domain/commercial.ts';
import { currencies } from '../../domain/money.ts';
import { requestStates } from '../../domain/request-states.ts';
import { checkResultSchema } from './check.ts';
import { requirementSchema } from './requirement.ts';

export const boardItemSchema = z.object({
  id: z.string(),
  number: z.number(),
  title: z.string(),
  buyerName: z.string(),
  shape: z.string(),
  tubeSize: z.number().describe('m'),
  turns: z.number().nullable(),
  insideDiameter: z.number().nullable().describe('m'),
  material: z.string(),
  purpose: z.string(),
  quantity: z.number(),
  firstArticle: z.boolean(),
  currency: z.enum(currencies),
  needBy: z.string().nullable(),
  deliveryTerm: z.enum(deliveryTerms),
  deliveryPlace: z.string(),
  closesAt: z.number(),
  postedAt: z.number(),
  buyerZone: z.string(),
  /** State of the reader's own bid, if there is one. */
  myBid: z.string().nullable(),
});
export type BoardItem = z.infer<typeof boardItemSchema>;

export const boardSchema = z.object({ items: z.array(boardItemSchema), next: z.string().nullable() });
export type Board = z.infer<typeof boardSchema>;

const publicCommercialSchema = z.object({
  quantity: z.number(),
  firstArticle: z.boolean(),
  needBy: z.string().nullable(),
  deliveryTerm: z.enum(deliveryTerms),
  deliveryPlace: z.string(),
  currency: z.enum(currencies),
  closesOn: z.string(),
  freeIssue: z.string(),
  milestoneLimits: z.object({ drawingMaxBp: z.number(), deliveryMinBp: z.number() }),
  inspectionDays: z.number(),
});

/** A request as a bidder sees it. Unknown keys are dropped, so nothing else leaves by accident. */
export const bidderRequestSchema = z.object({
  id: z.string(),
  number: z.number(),
  title: z.string(),
  state: z.enum(requestStates),
  buyerName: z.string(),
  closesAt: z.number(),
  postedAt: z.number(),
  buyerZone: z.string(),
  withdrawReason: z.string(),
  specification: z.object({ id: z.string(), number: z.number(), hash: z.string(), createdAt: z.number() }),
  commercial: publicCommercialSchema,
  requirement: requirementSchema,
  check: checkResultSchema,
  /** Blockers that the buyer carries, by name and reason. */
  carried: z.array(z.object({ code: z.string(), subject: z.string(), name: z.string(), reason: z.string() })),
  files: z.array(
    z.object({
      id: z.string(),
      kind: z.string(),
      name: z.string(),
      contentType: z.string(),
      size: z.number(),
    }),
  ),
  questions: z.array(
    z.object({
      id: z.string(),
      kind: z.enum(['clarification', 'proposal']),
      text: z.string(),
      answer: z.string().nullable(),
      askedAt: z.number(),
      answeredAt: z.number().nullable(),
      mine: z.boolean(),
    }),
  ),
  /** The reader's companies that may ask and bid. */
  companies: z.array(z.object({ id: z.string(), name: z.string() })),
  myBid: z.string().nullable(),
});
export type BidderRequest = z.infer<typeof bidderRequestSchema>;
