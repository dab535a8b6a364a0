import { createHash } from 'node:crypto';
import type { Actor } from '../../src/lib/domain/actor.ts';
import type { AsBuiltBody } from '../../src/lib/domain/as-built.ts';
import type { MilestoneShare } from '../../src/lib/domain/bid.ts';
import { dateIn } from '../../src/lib/domain/dates.ts';
import type { FilePurpose } from '../../src/lib/domain/files.ts';
import type { MilestoneKind } from '../../src/lib/domain/milestone-states.ts';
import type { Currency } from '../../src/lib/domain/money.ts';
import { businessNow } from '../../src/lib/server/adapters/clock.ts';
import { newId } from '../../src/lib/server/adapters/ids.ts';
import { transact, type Database } from '../../src/lib/server/db/index.ts';
import { file } from '../../src/lib/server/db/schema/files.ts';
import { fundMilestone, openOnboarding, payoutAccountOf } from '../../src/lib/server/money/index.ts';
import {
  acceptSubmission,
  acknowledgeOrder,
  confirmReceipt,
  createOrder,
  enterRecord,
  judgeDrawing,
  milestonesOf,
  piecesOf,
  shipOrder,
  submitDrawing,
  submitMilestone,
} from '../../src/lib/server/orders/index.ts';
import { requestForUpdate, setRequestState } from '../../src/lib/server/requests/index.ts';
import type { MoneyWorld } from './money.ts';
import { aCompany, aMember, anAdmin } from './people.ts';
import { aPostedRequest } from './requests.ts';

/** Both companies with a person in every role that matters, and strangers. */
export interface Cast {
  buyerId: string;
  purchaser: Actor;
  purchaser2: Actor;
  engineer: Actor;
  technician: Actor;
  fabricatorId: string;
  shopOwner: Actor;
  builder: Actor;
  estimator: Actor;
  outsider: Actor;
  otherShop: Actor;
  admin: Actor;
  admin2: Actor;
}

export async function aCast(db: Database): Promise<Cast> {
  const buyerId = await aCompany(db, 'buyer');
  const fabricatorId = await aCompany(db, 'fabricator', { verified: true });
  const otherBuyer = await aCompany(db, 'buyer');
  const otherFabricator = await aCompany(db, 'fabricator', { verified: true });
  return {
    buyerId,
    purchaser: await aMember(db, buyerId, ['purchaser']),
    purchaser2: await aMember(db, buyerId, ['purchaser']),
    engineer: await aMember(db, buyerId, ['engineer']),
    technician: await aMember(db, buyerId, ['technician']),
    fabricatorId,
    shopOwner: await aMember(db, fabricatorId, ['owner']),
    builder: await aMember(db, fabricatorId, ['builder']),
    estimator: await aMember(db, fabricatorId, ['estimator']),
    outsider: await aMember(db, otherBuyer, ['owner']),
    otherShop: await aMember(db, otherFabricator, ['owner']),
    admin: await anAdmin(db),
    admin2: await anAdmin(db),
  };
}

/** A specification with one measured line, one test and one paper. */
export function aSpecificationBody(): string {
  const line = (id: string, extra: Record<string, unknown>) => ({
    id,
    basis: 'computed',
    nominal: null,
    low: null,
    high: null,
    unit: '1',
    testFrequency: null,
    temperatureC: null,
    measuringPlane: '',
    leadState: '',
    holdTime: null,
    differentialPressure: null,
    note: '',
    ...extra,
  });
  return JSON.stringify({
    requirement: {
      acceptance: [
        line('L', {
          kind: 'inductance',
          label: 'Inductance, bare',
          nominal: 1.2e-6,
          low: 1.14e-6,
          high: 1.26e-6,
          unit: 'H',
        }),
        line('P', { kind: 'hydrostatic', label: 'Pressure test' }),
        line('D', { kind: 'document', label: 'Certificate 3.1' }),
      ],
    },
  });
}

export function aRecordBody(inductance = 1.2e-6, uncertainty = 0.01e-6): AsBuiltBody {
  const value = (lineId: string, number: number | null, passed: boolean | null) => ({
    lineId,
    value: number,
    uncertainty: number === null ? 0 : uncertainty,
    passed,
    instrument: 'LCR meter',
    calibrationDate: '2026-03-01',
    note: '',
  });
  return {
    values: [value('L', inductance, null), value('P', null, true), value('D', null, true)],
    testFrequency: 10_000,
    temperatureC: 21,
    leadState: 'as delivered',
    compensation: 'open and short',
    measuredOn: '2026-11-20',
    note: '',
  };
}

export interface OrderOptions {
  net?: number;
  tax?: number;
  freight?: number;
  currency?: Currency;
  plan?: MilestoneShare[];
  inspectionDays?: number;
  buyerZone?: string;
  quantity?: number;
}

export const standardPlan: MilestoneShare[] = [
  { kind: 'drawing', shareBp: 2000 },
  { kind: 'build', shareBp: 5000 },
  { kind: 'delivery', shareBp: 3000 },
];

export interface TestOrder {
  orderId: string;
  number: number;
  milestone: Record<MilestoneKind, string>;
}

/** An awarded order: net 1000.00 with 50.00 freight in it and 190.00 tax, unless told otherwise. */
export async function anOrder(db: Database, cast: Cast, options: OrderOptions = {}): Promise<TestOrder> {
  const net = options.net ?? 100_000;
  const tax = options.tax ?? 19_000;
  const { requestId } = await aPostedRequest(db, cast.engineer, cast.buyerId);
  const made = await transact(db, async (tx) => {
    await setRequestState(tx, cast.purchaser, await requestForUpdate(tx, requestId), 'award');
    return createOrder(tx, cast.purchaser, {
      requestId,
      bidId: newId(),
      buyerCompanyId: cast.buyerId,
      fabricatorCompanyId: cast.fabricatorId,
      specificationId: newId(),
      orderSpecificationBody: aSpecificationBody(),
      currency: options.currency ?? 'EUR',
      netAmount: net,
      taxAmount: tax,
      freightAmount: options.freight ?? 5_000,
      totalAmount: net + tax,
      leadTimeWorkingDays: 20,
      quantity: options.quantity ?? 1,
      milestonePlan: options.plan ?? standardPlan,
      inspectionDays: options.inspectionDays ?? 10,
      buyerZone: options.buyerZone ?? 'Europe/Berlin',
      title: 'Coil for pin ends',
      needBy: null,
    });
  });
  const rows = await milestonesOf(db, made.orderId);
  const ids = Object.fromEntries(rows.map((row) => [row.kind, row.id])) as Record<MilestoneKind, string>;
  return { ...made, milestone: ids };
}

/** A payout account that can receive, made the real way. */
export async function readyPayout(world: MoneyWorld, cast: Cast): Promise<string> {
  await openOnboarding(world.db, cast.shopOwner, { companyId: cast.fabricatorId, country: 'DE' });
  const account = await payoutAccountOf(world.db, cast.fabricatorId);
  if (!account?.accountId) throw new Error('no account');
  await world.control('POST', `accounts/${account.accountId}/activate`);
  await world.settle();
  return account.accountId;
}

/** A clean file as the upload leaves it, for tests that are not about files. */
export async function aCleanFile(
  db: Database,
  owner: Actor,
  companyId: string,
  purpose: FilePurpose,
): Promise<string> {
  const id = newId();
  const now = await businessNow(db);
  await db.insert(file).values({
    id,
    ownerCompanyId: companyId,
    uploadedBy: owner.userId,
    purpose,
    name: 'paper.pdf',
    contentType: 'application/pdf',
    size: 1234,
    sha256: createHash('sha256').update(id).digest('hex'),
    storageKey: `company/2026/${id}`,
    incomingKey: `incoming/${id}`,
    state: 'clean',
    createdAt: now,
    verifiedAt: now,
    expiresAt: now,
  });
  return id;
}

/** Funds a milestone on the stand-in's page and lets the webhook arrive. */
export async function fund(world: MoneyWorld, cast: Cast, milestoneId: string, card?: string): Promise<void> {
  await fundMilestone(world.db, cast.purchaser, { milestoneId });
  await world.pay(milestoneId, card);
  await world.settle();
}

export type Stage =
  | 'acknowledged'
  | 'drawing-held'
  | 'drawing-approved'
  | 'build-held'
  | 'build-accepted'
  | 'delivery-held'
  | 'shipped'
  | 'received';

const stages: Stage[] = [
  'acknowledged',
  'drawing-held',
  'drawing-approved',
  'build-held',
  'build-accepted',
  'delivery-held',
  'shipped',
  'received',
];

/** Brings a fresh order to a stage by the use-cases that people use. */
export async function bringTo(world: MoneyWorld, cast: Cast, order: TestOrder, stage: Stage): Promise<void> {
  const { db } = world;
  for (const step of stages.slice(0, stages.indexOf(stage) + 1)) {
    if (step === 'acknowledged') await acknowledgeOrder(db, cast.estimator, { orderId: order.orderId });
    if (step === 'drawing-held') await fund(world, cast, order.milestone.drawing);
    if (step === 'drawing-approved') await approveDrawing(db, cast, order);
    if (step === 'build-held') await fund(world, cast, order.milestone.build);
    if (step === 'build-accepted') await acceptBuild(db, cast, order);
    if (step === 'delivery-held') await fund(world, cast, order.milestone.delivery);
    if (step === 'shipped') await ship(db, cast, order);
    if (step === 'received') await receive(db, cast, order);
  }
}

export async function approveDrawing(db: Database, cast: Cast, order: TestOrder): Promise<void> {
  const fileId = await aCleanFile(db, cast.builder, cast.fabricatorId, 'coil-drawing');
  const { revisionId } = await submitDrawing(db, cast.builder, {
    orderId: order.orderId,
    fileId,
    note: '',
    commandId: newId(),
  });
  await judgeDrawing(db, cast.engineer, { revisionId, decision: 'approve', reasons: '' });
}

export async function submitBuild(db: Database, cast: Cast, order: TestOrder): Promise<void> {
  for (const piece of await piecesOf(db, order.orderId)) {
    await enterRecord(db, cast.builder, {
      pieceId: piece.id,
      body: aRecordBody(),
      photos: [],
      certificates: [],
      commandId: newId(),
    });
  }
  await submitMilestone(db, cast.builder, { milestoneId: order.milestone.build, note: '' });
}

export async function acceptBuild(db: Database, cast: Cast, order: TestOrder): Promise<void> {
  await submitBuild(db, cast, order);
  await acceptSubmission(db, cast.engineer, { milestoneId: order.milestone.build });
}

const shipments = new Map<string, string>();

export async function ship(db: Database, cast: Cast, order: TestOrder): Promise<string> {
  const { shipmentId } = await shipOrder(db, cast.builder, {
    orderId: order.orderId,
    carrier: 'Parcel line',
    trackingNumber: 'PL-77',
    shippedOn: dateIn('Europe/Berlin', await businessNow(db)),
    note: '',
    paperFileId: null,
    commandId: newId(),
  });
  shipments.set(order.orderId, shipmentId);
  return shipmentId;
}

export async function receive(db: Database, cast: Cast, order: TestOrder): Promise<void> {
  const shipmentId = shipments.get(order.orderId);
  if (!shipmentId) throw new Error('nothing was shipped');
  await confirmReceipt(db, cast.technician, { shipmentId, note: '' });
}
