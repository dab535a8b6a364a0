import { daysHeldAgain } from '../../domain/bid.ts';
import { formatMoney, type Currency } from '../../domain/money.ts';
import { notifyCompany } from '../companies/recipients.ts';
import type { Tx } from '../db/index.ts';
import type { BidRow, RequestRow } from './queries.ts';

const requestName = (request: RequestRow) => `R-${request.number} “${request.title}”`;
const about = (bid: BidRow) => ({ type: 'bid', id: bid.id });
const total = (bid: BidRow) => formatMoney({ amount: bid.totalAmount, currency: bid.currency as Currency });

export async function mailBidReceived(tx: Tx, request: RequestRow, bid: BidRow, bidder: string) {
  const path = `/requests/${request.id}/compare`;
  await notifyCompany(tx, request.companyId, ['engineer', 'purchaser'], {
    kind: 'bid-received',
    subject: `Bid from ${bidder} for ${requestName(request)}`,
    content: {
      heading: `${bidder} has bid for ${requestName(request)}`,
      paragraphs: ['The bid is in the comparison, with its exceptions and what they ask for.'],
      facts: [
        ['Total', total(bid)],
        ['Lead time', `${bid.leadTimeWorkingDays} working days`],
        ['Holds until', bid.validUntil],
      ],
      action: { label: 'Compare bids', path },
    },
    about: about(bid),
    href: path,
    dedupeKey: `bid-received/${bid.id}/${bid.version}`,
  });
}

export async function mailBidWithdrawn(tx: Tx, request: RequestRow, bid: BidRow, bidder: string) {
  const path = `/requests/${request.id}/compare`;
  await notifyCompany(tx, request.companyId, ['engineer', 'purchaser'], {
    kind: 'bid-withdrawn',
    subject: `${bidder} has withdrawn its bid for ${requestName(request)}`,
    content: {
      heading: `${bidder} has withdrawn its bid`,
      paragraphs: [`It was for ${requestName(request)} and can no longer be awarded.`],
      action: { label: 'See the other bids', path },
    },
    about: about(bid),
    href: path,
    dedupeKey: `bid-withdrawn/${bid.id}/${bid.version}`,
  });
}

export async function mailExceptionRefused(tx: Tx, request: RequestRow, bid: BidRow, subject: string) {
  const path = `/requests/${request.id}/bid`;
  await notifyCompany(tx, bid.companyId, ['estimator'], {
    kind: 'bid-to-confirm',
    subject: `Please confirm your bid for ${requestName(request)}`,
    content: {
      heading: `An exception of your bid was refused: ${subject}`,
      paragraphs: [
        `The buyer of ${requestName(request)} does not take this departure from the specification.`,
        'Your bid cannot be awarded before you confirm that it holds without it. You can also revise or withdraw it.',
      ],
      action: { label: 'Open your bid', path },
    },
    about: about(bid),
    href: path,
    dedupeKey: `bid-to-confirm/${bid.id}/${bid.version}`,
  });
}

export async function mailAskedAgain(tx: Tx, request: RequestRow, bid: BidRow) {
  const path = `/requests/${request.id}/bid`;
  await notifyCompany(tx, bid.companyId, ['estimator'], {
    kind: 'bid-asked-again',
    subject: `Does your bid for ${requestName(request)} still hold?`,
    content: {
      heading: `The buyer of ${requestName(request)} asks for your bid again`,
      paragraphs: [
        'The order of another bidder did not come about. Your bid can be awarded once you confirm that it still holds.',
        `Confirming keeps it open for at least ${daysHeldAgain} days. You can also withdraw it.`,
      ],
      facts: [['Total', total(bid)]],
      action: { label: 'Open your bid', path },
    },
    about: about(bid),
    href: path,
    dedupeKey: `bid-asked-again/${bid.id}/${bid.version}`,
  });
}

export async function mailBidConfirmed(tx: Tx, request: RequestRow, bid: BidRow, bidder: string) {
  const path = `/requests/${request.id}/compare`;
  await notifyCompany(tx, request.companyId, ['engineer', 'purchaser'], {
    kind: 'bid-confirmed',
    subject: `${bidder} has confirmed its bid for ${requestName(request)}`,
    content: {
      heading: `${bidder} has confirmed its bid`,
      paragraphs: [`It holds for ${requestName(request)} without the exceptions you refused.`],
      action: { label: 'Compare bids', path },
    },
    about: about(bid),
    href: path,
    dedupeKey: `bid-confirmed/${bid.id}/${bid.version}`,
  });
}

export async function mailNotSelected(tx: Tx, request: RequestRow, bid: BidRow) {
  const path = `/requests/${request.id}`;
  await notifyCompany(tx, bid.companyId, ['estimator'], {
    kind: 'not-selected',
    subject: `Your bid for ${requestName(request)} was not selected`,
    content: {
      heading: `Your bid for ${requestName(request)} was not selected`,
      paragraphs: ['The buyer has awarded another bid. Thank you for the work you put into yours.'],
      action: { label: 'Open the request', path },
    },
    about: about(bid),
    href: path,
    dedupeKey: `not-selected/${bid.id}`,
  });
}

export async function mailAwarded(
  tx: Tx,
  request: RequestRow,
  bid: BidRow,
  order: { orderId: string; number: number },
) {
  const path = `/orders/${order.orderId}`;
  await notifyCompany(tx, bid.companyId, 'all', {
    kind: 'awarded',
    subject: `You have the order for ${requestName(request)}`,
    content: {
      heading: `Your bid for ${requestName(request)} was awarded`,
      paragraphs: [
        'Please acknowledge the order in its order room within three working days. Work on a stage starts when its money is held.',
      ],
      facts: [
        ['Order', `O-${order.number}`],
        ['Total', total(bid)],
      ],
      action: { label: 'Open the order room', path },
    },
    about: { type: 'order', id: order.orderId },
    href: path,
    dedupeKey: `awarded/${bid.id}`,
  });
}

export async function mailBidLapsed(tx: Tx, request: RequestRow, bid: BidRow) {
  const path = `/requests/${request.id}/bid`;
  await notifyCompany(tx, bid.companyId, ['estimator'], {
    kind: 'bid-lapsed',
    subject: `Your bid for ${requestName(request)} has lapsed`,
    content: {
      heading: `Your bid for ${requestName(request)} has lapsed`,
      paragraphs: [
        bid.submittedAt === null
          ? 'Bids have closed and yours was still a draft.'
          : `It held until ${bid.validUntil} and was not awarded by then.`,
      ],
      action: { label: 'Open the bid', path },
    },
    about: about(bid),
    href: path,
    dedupeKey: `bid-lapsed/${bid.id}`,
  });
}
