/** The commercial side of a request as JSON. */
import { z } from 'zod';
import { deliveryTerms, type Commercial } from '../../domain/commercial.ts';
import { currencies } from '../../domain/money.ts';
import * as q from './quantity.ts';

const date = z.string().regex(/^\d{4}-\d{2}-\d{2}$/, 'The date is written YYYY-MM-DD.');
const basisPoints = (name: string) => q.count(name, { min: 0, max: 10_000 }, `${name}, in basis points`);

export const commercialSchema = z
  .object({
    quantity: q.count('Coils', { min: 1, max: 10_000 }),
    firstArticle: z.boolean(),
    needBy: date.nullable(),
    deliveryTerm: z.enum(deliveryTerms),
    deliveryPlace: q.text('Named place', 200),
    currency: z.enum(currencies),
    poNumber: q.text('Purchase order number', 60),
    costCentre: q.text('Cost centre', 60),
    closesOn: date,
    freeIssue: q.text('Free-issue parts', 1000),
    milestoneLimits: z.object({
      drawingMaxBp: basisPoints('Drawing share'),
      deliveryMinBp: basisPoints('Delivery share'),
    }),
    inspectionDays: q.count('Days for inspection', { min: 1, max: 60 }),
    budget: z.int().min(0).max(1e13).nullable(),
  })
  .refine((c) => c.needBy === null || c.needBy > c.closesOn, {
    path: ['needBy'],
    error: 'Needed by has to be after the day on which bids close.',
  })
  .refine((c) => c.milestoneLimits.drawingMaxBp + c.milestoneLimits.deliveryMinBp <= 10_000, {
    path: ['milestoneLimits', 'deliveryMinBp'],
    error: 'The two limits leave no room for the build.',
  })
  .describe('Commercial terms of a request') satisfies z.ZodType<Commercial>;
