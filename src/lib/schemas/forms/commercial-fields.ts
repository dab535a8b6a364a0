/** The commercial fields of a request. */
import { deliveryTerms, deliveryTermText } from '../../domain/commercial.ts';
import { currencies } from '../../domain/money.ts';
import { choice, count, flag, special, text, type FieldGroupSpec } from './field-spec.ts';

export const commercialGroups: readonly FieldGroupSpec[] = [
  {
    title: 'What is asked for',
    fields: [
      count('commercial.quantity', 'Coils', { initial: '1' }),
      flag('commercial.firstArticle', 'One first article before the rest'),
      special('date', 'commercial.needBy', 'Needed by'),
      special('date', 'commercial.closesOn', 'Bids close at the end of', {
        empty: 'required',
        hint: '24:00 in your company’s time zone.',
      }),
      text('commercial.freeIssue', 'Free-issue and sample parts that we send', 1000, { rows: 3 }),
    ],
  },
  {
    title: 'Delivery and papers',
    fields: [
      choice(
        'commercial.deliveryTerm',
        'Delivery term (Incoterms 2020)',
        deliveryTerms.map((term) => [term, deliveryTermText[term]] as const),
        { initial: 'DAP' },
      ),
      text('commercial.deliveryPlace', 'Named place', 200, { empty: 'required' }),
      choice(
        'commercial.currency',
        'Currency of the bids',
        currencies.map((c) => [c, c] as const),
        { initial: 'EUR' },
      ),
      text('commercial.poNumber', 'Own purchase order number', 60),
      text('commercial.costCentre', 'Cost centre', 60),
      special('money', 'commercial.budget', 'Budget', { hint: 'Never shown to bidders.' }),
    ],
  },
  {
    title: 'Milestones',
    lead: 'Money is paid in stages and held until the evidence is there. These are the limits for the bidders’ plans.',
    fields: [
      special('percent', 'commercial.milestoneLimits.drawingMaxBp', 'Drawing: at most', {
        empty: 'required',
        initial: '20 %',
      }),
      special('percent', 'commercial.milestoneLimits.deliveryMinBp', 'Delivery: at least', {
        empty: 'required',
        initial: '20 %',
      }),
      count('commercial.inspectionDays', 'Days for inspection', {
        initial: '10',
        hint: 'Calendar days after receipt in which you accept, return or dispute.',
      }),
    ],
  },
];
