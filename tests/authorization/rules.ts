import { newId } from '../../src/lib/server/adapters/ids.ts';
import type { Call } from './call.ts';
import { visitors, type Visitor, type World } from './world.ts';

/**
 * Who may come in by which way. Every handler of every route has its line here; one without fails the
 * matrix. Ids mean the objects of `world.ts`: a request and an order of the buyer, made by the maker.
 */
export interface Rule {
  may: readonly Visitor[];
  /** A valid body, so that a refusal comes from the guard and not from a missing field. */
  body?: (ids: World['ids']) => NonNullable<Call['body']>;
  /** Why only the refusal is looked at: what else the act needs is not in this small world. */
  refusalOnly?: string;
}

type Ids = World['ids'];
export interface RouteRules {
  params?: (ids: Ids) => Record<string, string>;
  /** Rules by handler; `*` for every handler of the route that is not named. */
  handlers: Record<string, Rule | readonly Visitor[]>;
}

const everyone: readonly Visitor[] = visitors;
const signedIn = visitors.filter((v) => v !== 'visitor');
const admin: readonly Visitor[] = ['admin'];
const buyers = ['buyer-owner', 'buyer-engineer', 'buyer-purchaser', 'buyer-technician'] as const;
const makers = ['maker-owner', 'maker-estimator', 'maker-builder'] as const;
const parties = [...buyers, ...makers];
const members = signedIn.filter((v) => v !== 'stranger' && v !== 'admin');
const verifiedMakers: readonly Visitor[] = [...makers, 'other-maker'];
const bidders: readonly Visitor[] = ['maker-owner', 'maker-estimator', 'other-maker'];
const shop: readonly Visitor[] = ['maker-owner', 'maker-builder'];
const money: readonly Visitor[] = ['buyer-owner', 'buyer-purchaser'];
const judges: readonly Visitor[] = ['buyer-owner', 'buyer-engineer'];
const planners: readonly Visitor[] = ['buyer-owner', 'buyer-engineer', 'buyer-purchaser'];
const disputants: readonly Visitor[] = ['buyer-owner', 'buyer-purchaser', 'maker-owner'];

const form = (fields: (ids: Ids) => Record<string, string | string[]>) => (ids: Ids) => ({
  form: fields(ids),
});
const json = (value: (ids: Ids) => unknown) => (ids: Ids) => ({ json: value(ids) });
const only = (may: readonly Visitor[], body?: Rule['body'], refusalOnly?: string): Rule => ({
  may,
  ...(body ? { body } : {}),
  ...(refusalOnly ? { refusalOnly } : {}),
});

const address = {
  name: 'Gate 3',
  line1: 'Hill Road 1',
  line2: '',
  postalCode: '1',
  city: 'Fen',
  region: '',
  country: 'GB',
};
const uuid = () => newId();

const company: RouteRules = {
  params: (ids) => ({ id: ids.buyer }),
  handlers: {
    load: [...buyers, 'admin'],
    'action:company': only(
      ['buyer-owner'],
      form(() => ({
        name: 'New name',
        timeZone: 'UTC',
        taxNumber: '',
        website: '',
        about: '',
        version: '1',
      })),
    ),
    'action:limit': only(
      ['buyer-owner'],
      form(() => ({ approvalLimit: '5000', version: '1' })),
    ),
    'action:invite': only(
      ['buyer-owner'],
      form(() => ({ email: 'new@works.example', roles: ['engineer'] })),
    ),
    'action:withdraw': only(
      ['buyer-owner'],
      form((ids) => ({ invitationId: ids.invitation, version: '1' })),
    ),
    'action:roles': only(
      ['buyer-owner'],
      form((ids) => ({ membershipId: ids.membership, roles: ['purchaser'], version: '1' })),
    ),
    // The technician is the member in question: everybody may leave.
    'action:remove': only(
      ['buyer-owner', 'buyer-technician'],
      form((ids) => ({ membershipId: ids.membership, version: '1' })),
    ),
    'action:add-address': only(
      ['buyer-owner'],
      form(() => ({ purpose: 'works', ...address })),
    ),
    'action:update-address': only(
      ['buyer-owner'],
      form((ids) => ({ addressId: ids.address, version: '1', purpose: 'works', ...address })),
    ),
    'action:archive-address': only(
      ['buyer-owner'],
      form((ids) => ({ addressId: ids.address, version: '1' })),
    ),
  },
};

const orderRoom: RouteRules = {
  params: (ids) => ({ id: ids.order }),
  handlers: {
    load: parties,
    'action:acknowledge': ['maker-owner', 'maker-estimator'],
    'action:decline': ['maker-owner', 'maker-estimator'],
    'action:drawing': only(
      shop,
      form((ids) => ({ fileId: ids.makerFile, note: '', commandId: uuid() })),
    ),
    'action:judge': only(
      judges,
      form((ids) => ({ revisionId: ids.drawing, decision: 'approve', reasons: '', version: '1' })),
    ),
    'action:submit': only(
      shop,
      form((ids) => ({ milestoneId: ids.milestone, note: '', version: '1' })),
    ),
    'action:accept': only(
      judges,
      form((ids) => ({ milestoneId: ids.milestone, version: '1' })),
    ),
    'action:return': only(
      judges,
      form((ids) => ({ milestoneId: ids.milestone, reasons: 'Too short.', version: '1' })),
    ),
    'action:concede': only(
      judges,
      form((ids) => ({ recordId: ids.record, reasons: 'It will do.' })),
    ),
    'action:remake': only(
      judges,
      form((ids) => ({ recordId: ids.record, reasons: 'Again.', dueDate: '2027-03-01' })),
    ),
    'action:ship': only(
      shop,
      form(() => ({
        carrier: 'Road',
        trackingNumber: '1',
        shippedOn: '2026-12-01',
        note: '',
        commandId: uuid(),
      })),
    ),
    'action:proof': only(
      shop,
      form((ids) => ({ shipmentId: ids.shipment, deliveredOn: '2026-12-01' })),
    ),
    'action:receipt': only(
      buyers,
      form((ids) => ({ shipmentId: ids.shipment, note: '' })),
    ),
    'action:message': only(
      parties,
      form(() => ({ text: 'Hello', commandId: uuid() })),
    ),
    'action:suspend': ['maker-owner', 'maker-estimator'],
    'action:endByRight': only(
      disputants,
      form(() => ({ ground: 'overdue' })),
    ),
    'action:answerEnd': only(
      disputants,
      form(() => ({ proposalId: uuid(), answer: 'accept' })),
      'needs a proposal to end',
    ),
  },
};

const ofOrder = (
  handlers: RouteRules['handlers'],
  more: (ids: Ids) => Record<string, string> = () => ({}),
): RouteRules => ({
  params: (ids) => ({ id: ids.order, ...more(ids) }),
  handlers,
});
const ofRequest = (handlers: RouteRules['handlers']): RouteRules => ({
  params: (ids) => ({ id: ids.request }),
  handlers,
});
const ofDraft = (handlers: RouteRules['handlers']): RouteRules => ({
  params: (ids) => ({ id: ids.draft }),
  handlers,
});
const ofMaker = (handlers: RouteRules['handlers']): RouteRules => ({
  params: (ids) => ({ id: ids.maker }),
  handlers,
});
const plain = (handlers: RouteRules['handlers']): RouteRules => ({ handlers });

const byHand = (id: (ids: Ids) => string) => form((ids) => ({ id: id(ids), event: 'retry' }));

export const rules: Record<string, RouteRules> = {
  // Frames and pages for all
  '/': plain({ layout: everyone, load: everyone, page: everyone }),
  '/accuracy': plain({ '*': everyone }),
  '/bench': plain({ '*': everyone }),
  '/styleguide': plain({ load: everyone }),
  '/sign-out': plain({ load: everyone, 'action:default': everyone }),
  '/(auth)/sign-in': plain({ '*': everyone }),
  '/(auth)/sign-up': plain({ '*': everyone }),
  '/(auth)/verify': plain({ '*': everyone }),
  '/(auth)/forgot': plain({ '*': everyone }),
  '/(auth)/reset': plain({ '*': everyone }),
  '/(auth)/two-factor': plain({ '*': everyone }),
  '/invitations/[token]': {
    params: (ids) => ({ token: ids.invitationToken }),
    handlers: { load: everyone, 'action:default': ['stranger'] },
  },

  // One's own
  '/(app)': plain({ layout: signedIn }),
  '/(app)/desk': plain({ load: signedIn }),
  '/(app)/account': plain({ '*': signedIn }),
  '/(app)/account/security': plain({
    '*': signedIn,
    'action:end-session': only(
      ['buyer-owner'],
      form((ids) => ({ sessionId: ids.session })),
    ),
  }),
  '/(app)/account/two-factor': plain({ '*': signedIn }),
  '/(app)/account/notifications': plain({ '*': signedIn }),
  '/(app)/confirm': plain({ '*': signedIn }),
  '/(app)/notifications': plain({
    '*': signedIn,
    'action:open': only(
      ['buyer-owner'],
      form((ids) => ({ id: ids.notification })),
    ),
  }),

  // Companies
  '/(app)/companies': plain({ load: signedIn }),
  '/(app)/companies/new': plain({ '*': signedIn }),
  '/(app)/companies/[id]': company,
  '/(app)/companies/[id]/documents': ofMaker({ load: makers, '*': makers }),
  '/(app)/companies/[id]/verification': ofMaker({
    load: [...makers, 'admin'],
    'action:withdraw': only(
      ['maker-owner'],
      form((ids) => ({ caseId: ids.verification, version: '1' })),
    ),
    '*': ['maker-owner'],
  }),
  '/(app)/companies/[id]/payouts': ofMaker({ '*': ['maker-owner'] }),
  '/(app)/fabricators': plain({ load: [...members, 'admin'] }),
  '/(app)/fabricators/[id]': ofMaker({ load: [...members, 'admin'] }),

  // Machines and requests
  '/(app)/machines': plain({ load: signedIn }),
  '/(app)/machines/new': plain({ '*': ['buyer-owner', 'buyer-engineer', 'other-buyer'] }),
  '/(app)/machines/[id]': {
    params: (ids) => ({ id: ids.machine }),
    handlers: {
      load: buyers,
      'action:save': judges,
      'action:archive': only(
        judges,
        form(() => ({ version: '1' })),
      ),
      'action:request': judges,
    },
  },
  '/(app)/requests': plain({ load: signedIn }),
  '/(app)/requests/new': plain({ '*': ['buyer-owner', 'buyer-engineer', 'other-buyer'] }),
  '/(app)/requests/[id]': ofRequest({
    load: [...buyers, ...verifiedMakers],
    'action:ask': only(
      ['maker-owner', 'maker-estimator'],
      form((ids) => ({
        companyId: ids.maker,
        commandId: uuid(),
        kind: 'clarification',
        text: 'Which water?',
      })),
    ),
    'action:answer': only(
      planners,
      form((ids) => ({ questionId: ids.question, version: '1', answer: 'Soft.' })),
    ),
    'action:withdraw': only(
      planners,
      form(() => ({ version: '1', reason: '' })),
    ),
    '*': planners,
  }),
  '/(app)/requests/[id]/compose': ofDraft({ load: judges, '*': judges }),
  '/(app)/requests/[id]/compare': ofRequest({
    load: planners,
    'action:award': only(
      money,
      form((ids) => ({ bidId: ids.bid, version: '1' })),
    ),
    'action:again': only(
      money,
      form((ids) => ({ bidId: ids.bid, version: '1' })),
    ),
    'action:exception': only(
      planners,
      form((ids) => ({ exceptionId: ids.exception, decision: 'accept', reason: '', version: '1' })),
    ),
    '*': money,
  }),
  '/(app)/requests/[id]/bid': ofRequest({ load: verifiedMakers, '*': bidders }),
  '/(app)/board': plain({ load: verifiedMakers }),
  '/(app)/bids': plain({ load: signedIn }),

  // Orders
  '/(app)/orders': plain({ load: signedIn }),
  '/(app)/orders/[id]': orderRoom,
  '/(app)/orders/[id]/statement': ofOrder({ load: [...parties, 'admin'] }),
  '/(app)/orders/[id]/statement.csv': ofOrder({ GET: [...parties, 'admin'] }),
  '/(app)/orders/[id]/end': ofOrder({ load: parties, '*': disputants }),
  '/(app)/orders/[id]/fund/[milestone]': ofOrder({ load: parties, '*': money }, (ids) => ({
    milestone: ids.milestone,
  })),
  '/(app)/orders/[id]/release/[milestone]': ofOrder(
    {
      load: parties,
      'action:default': only(
        money,
        form((ids) => ({ milestoneId: ids.milestone, version: '1', confirm: 'on' })),
      ),
    },
    (ids) => ({ milestone: ids.milestone }),
  ),
  '/(app)/orders/[id]/pieces/[piece]': ofOrder({ load: parties, '*': shop }, (ids) => ({ piece: ids.piece })),
  '/(app)/orders/[id]/dispute/[milestone]': ofOrder(
    {
      load: parties,
      'action:default': only(
        disputants,
        form(() => ({
          reason: 'not-as-specified',
          complaintAbout: 'Bore',
          pieceId: '',
          amountClaimed: '5.00',
          text: 'The bore is 2 mm too small.',
          commandId: uuid(),
        })),
      ),
    },
    (ids) => ({ milestone: ids.milestone }),
  ),
  '/(app)/orders/[id]/disputes/[dispute]': ofOrder(
    {
      load: [...parties, 'admin'],
      'action:statement': only(
        disputants,
        form(() => ({ text: 'It was measured twice.', commandId: uuid() })),
      ),
      'action:offer': only(
        disputants,
        form(() => ({ release: '5', refund: '5', note: '', commandId: uuid() })),
      ),
      'action:withdraw': money,
      '*': disputants,
    },
    (ids) => ({ dispute: ids.dispute }),
  ),

  // Admin
  '/(admin)': plain({ layout: admin }),
  '/(admin)/admin': plain({ load: admin }),
  '/(admin)/admin/audit': plain({ '*': admin }),
  '/(admin)/admin/users': plain({ '*': admin }),
  '/(admin)/admin/jobs': plain({
    load: admin,
    'action:hand': only(
      admin,
      byHand((ids) => ids.job),
    ),
  }),
  '/(admin)/admin/outbox': plain({
    load: admin,
    'action:hand': only(
      admin,
      byHand((ids) => ids.mail),
    ),
  }),
  '/(admin)/admin/outbox/[id]': { params: (ids) => ({ id: ids.mail }), handlers: { '*': admin } },
  '/(admin)/admin/ledger': plain({
    load: admin,
    'action:reconcile': admin,
    'action:resolve': only(
      admin,
      form(() => ({ alarmId: uuid(), resolution: 'Looked at.' })),
    ),
    'action:retry': only(
      admin,
      form((ids) => ({ milestoneId: ids.milestone })),
    ),
  }),
  '/(admin)/admin/disputes': plain({ load: admin }),
  '/(admin)/admin/disputes/[id]': {
    params: (ids) => ({ id: ids.dispute }),
    handlers: {
      load: admin,
      'action:decide': only(
        admin,
        form(() => ({
          release: '5',
          refund: '5',
          goods: 'stay',
          otherMilestones: 'go on',
          freightPaidBy: 'none',
          reason: 'Both measured.',
          version: '1',
        })),
      ),
      '*': admin,
    },
  },
  '/(admin)/admin/verification': plain({ load: admin }),
  '/(admin)/admin/verification/[id]': {
    params: (ids) => ({ id: ids.verification }),
    handlers: {
      load: admin,
      'action:verify': only(
        admin,
        form(() => ({ version: '1', items: ['legal-entity'], untilDate: '2027-11-30', reasons: '' })),
      ),
      'action:refuse': only(
        admin,
        form(() => ({ version: '1', reasons: 'The papers are not legible.' })),
      ),
      '*': admin,
    },
  },

  // Endpoints
  '/api/health': plain({ GET: everyone }),
  '/api/openapi.json': plain({ GET: everyone }),
  '/api/v1/checks': plain({ '*': everyone }),
  '/api/v1/impedance': plain({ '*': everyone }),
  '/api/v1/heatings': plain({ '*': everyone }),
  // The run of a signed-in person is theirs alone.
  '/api/v1/heatings/[id]': { params: (ids) => ({ id: ids.heating }), handlers: { '*': ['buyer-engineer'] } },
  '/api/v1/board': plain({ GET: verifiedMakers }),
  '/api/v1/requests/[id]/answers': ofDraft({ '*': judges }),
  '/api/v1/requests/[id]/checks': ofDraft({ '*': judges }),
  '/api/v1/requests/[id]/draft': ofDraft({ '*': judges }),
  '/api/v1/requests/[id]/files': ofDraft({ '*': judges }),
  '/api/v1/uploads': plain({
    POST: only(
      ['buyer-owner', 'buyer-engineer', 'buyer-purchaser'],
      json((ids) => ({
        companyId: ids.buyer,
        purpose: 'company-document',
        name: 'paper.pdf',
        contentType: 'application/pdf',
        size: 1000,
      })),
    ),
  }),
  '/api/v1/uploads/[id]': {
    params: (ids) => ({ id: ids.upload }),
    handlers: { '*': planners },
  },
  '/api/v1/uploads/[id]/finish': { params: (ids) => ({ id: ids.upload }), handlers: { '*': planners } },
  '/api/v1/uploads/[id]/parts': {
    params: (ids) => ({ id: ids.upload }),
    handlers: {
      '*': only(
        planners,
        json(() => ({ numbers: [1] })),
      ),
    },
  },
  '/files/[id]': { params: (ids) => ({ id: ids.file }), handlers: { GET: planners } },
  // No session at all: the signature of the sender decides.
  '/api/webhooks/payments': plain({ POST: everyone }),
  '/api/webhooks/payment-accounts': plain({ POST: everyone }),
};
