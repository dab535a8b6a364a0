import { describe, expect, it } from 'vitest';
import { bidFormValues, parseBidForm } from './bid.ts';

const limits = { drawingMaxBp: 2000, deliveryMinBp: 2000 };

function form(values: Record<string, string>): FormData {
  const data = new FormData();
  for (const [name, value] of Object.entries(values)) data.set(name, value);
  return data;
}

const whole = {
  'price.coil': '1,840.00',
  'price.freight': '95',
  'label.freight': 'Road, insured',
  'tax.0.kind': 'vat',
  'tax.0.rate': '19 %',
  'tax.0.amount': '367.65',
  'share.drawing': '20',
  'share.build': '50',
  'share.delivery': '30',
  leadTime: '20',
  validUntil: '2027-03-01',
  toolingOwner: 'none',
  warrantyMonths: '12',
  note: 'Annealed tube is in stock.',
  'exception.0.subject': 'Leads and connection',
  'exception.0.text': 'Plate 30 mm wide',
};

describe('the bid form', () => {
  it('reads amounts, percentages and rows as people write them', () => {
    const parsed = parseBidForm(form(whole), limits, true);
    expect(parsed).toMatchObject({
      ok: true,
      values: {
        body: {
          lines: [
            { kind: 'coil', amount: 184_000 },
            { kind: 'freight', label: 'Road, insured', amount: 9_500 },
          ],
          taxLines: [{ kind: 'vat', rateBp: 1900, amount: 36_765 }],
          milestonePlan: [
            { kind: 'drawing', shareBp: 2000 },
            { kind: 'build', shareBp: 5000 },
            { kind: 'delivery', shareBp: 3000 },
          ],
        },
        leadTimeWorkingDays: 20,
        exceptions: [{ subject: 'Leads and connection', text: 'Plate 30 mm wide' }],
      },
    });
  });

  it('gives back the same bid from its own texts', () => {
    const first = parseBidForm(form(whole), limits, true);
    if (!first.ok) throw new Error('not parsed');
    const again = parseBidForm(form(bidFormValues(first.values)), limits, true);
    expect(again).toEqual(first);
  });

  it('keeps a draft that is short of everything', () => {
    expect(parseBidForm(form({ toolingOwner: 'none' }), limits, false)).toMatchObject({
      ok: true,
      values: { body: { lines: [], milestonePlan: [] }, leadTimeWorkingDays: 0, validUntil: '' },
    });
  });

  it('tells each unreadable field, draft or not', () => {
    const parsed = parseBidForm(
      form({
        ...whole,
        'price.coil': 'about 2000',
        'share.build': '120',
        leadTime: 'soon',
        'tax.0.kind': '',
        'exception.0.text': '',
      }),
      limits,
      false,
    );
    expect(parsed).toMatchObject({
      ok: false,
      fields: {
        'price.coil': expect.any(String) as string,
        'share.build': expect.any(String) as string,
        leadTime: expect.any(String) as string,
        'tax.0.kind': expect.any(String) as string,
        'exception.0.text': expect.any(String) as string,
      },
    });
  });
});
