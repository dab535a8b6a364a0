import { eq } from 'drizzle-orm';
import type { CheckResult, Requirement } from '../../lib/induction/check/types.ts';
import type { Actor } from '../../lib/domain/actor.ts';
import type { BidBody } from '../../lib/domain/bid.ts';
import { addDays, dateIn } from '../../lib/domain/dates.ts';
import { openFindings } from '../../lib/domain/finding-answers.ts';
import type { MilestoneKind } from '../../lib/domain/milestone-states.ts';
import type { Currency } from '../../lib/domain/money.ts';
import type { Machine } from '../../lib/induction/check/types.ts';
import { businessNow } from '../../lib/server/adapters/clock.ts';
import { submitBid } from '../../lib/server/bids/index.ts';
import { machine as machineTable } from '../../lib/server/db/schema/machines.ts';
import { request as requestTable } from '../../lib/server/db/schema/requests.ts';
import { createMachine } from '../../lib/server/machines/index.ts';
import { fundMilestone } from '../../lib/server/money/index.ts';
import {
  acceptSubmission,
  acknowledgeOrder,
  confirmReceipt,
  judgeDrawing,
  milestonesOf,
  shipOrder,
  submitDrawing,
  submitMilestone,
} from '../../lib/server/orders/index.ts';
import { answerFinding, checkDraft, createDraft, saveDraft } from '../../lib/server/requests/index.ts';
import { awardBid } from '../../lib/server/workflows/award-bid.ts';
import { postRequest } from '../../lib/server/workflows/post-request.ts';
import type { Buyer, Shop } from './cast.ts';
import { coilDrawingPdf } from './papers.ts';
import type { SeedWorld } from './world.ts';

export async function enterMachine(world: SeedWorld, buyer: Buyer, machine: Machine): Promise<string> {
  const { id } = await createMachine(world.db, buyer.engineer, {
    companyId: buyer.id,
    commandId: world.command(),
    machine,
  });
  return id;
}

export interface RequestPlan {
  title: string;
  requirement: Requirement;
  machineId: string;
  currency: Currency;
  place: string;
  quantity?: number;
  closesInDays?: number;
  needByInDays?: number;
  budget?: string;
  inspectionDays?: number;
}

async function draftForm(world: SeedWorld, id: string) {
  const [row] = await world.db.select().from(requestTable).where(eq(requestTable.id, id));
  if (!row) throw new Error('the draft is gone');
  return row;
}

/** A draft as an engineer leaves it, saved once. */
export async function draft(world: SeedWorld, buyer: Buyer, plan: RequestPlan): Promise<string> {
  const { id } = await createDraft(world.db, buyer.engineer, {
    companyId: buyer.id,
    commandId: world.command(),
    from: { kind: 'requirement', requirement: plan.requirement, title: plan.title },
  });
  const row = await draftForm(world, id);
  const today = dateIn('Europe/Berlin', await businessNow(world.db));
  const [machine] = await world.db
    .select({ version: machineTable.version })
    .from(machineTable)
    .where(eq(machineTable.id, plan.machineId));
  await saveDraft(world.db, buyer.engineer, {
    requestId: id,
    version: row.version,
    machineId: plan.machineId,
    machineVersion: machine?.version ?? 1,
    form: {
      ...row.form,
      values: {
        ...row.form.values,
        'commercial.quantity': String(plan.quantity ?? 1),
        'commercial.closesOn': addDays(today, plan.closesInDays ?? 10),
        'commercial.needBy': addDays(today, plan.needByInDays ?? 60),
        'commercial.deliveryTerm': 'DAP',
        'commercial.deliveryPlace': plan.place,
        'commercial.currency': plan.currency,
        'commercial.budget': plan.budget ?? '',
        'commercial.inspectionDays': String(plan.inspectionDays ?? 10),
      },
    },
  });
  return id;
}

/** Checked by the server, its cautions acknowledged, and posted. */
export async function post(world: SeedWorld, buyer: Buyer, plan: RequestPlan): Promise<string> {
  const id = await draft(world, buyer, plan);
  const row = await draftForm(world, id);
  if (row.requirement === null || row.commercial === null) throw new Error(`“${plan.title}” is not complete`);
  const checked = await checkDraft(world.db, buyer.engineer, { requestId: id, version: row.version });
  const { findings } = JSON.parse(checked.body) as CheckResult;
  const open = openFindings(findings, []);
  if (open.blockers.length > 0) {
    throw new Error(`“${plan.title}”: ${open.blockers.map((finding) => finding.message).join('; ')}`);
  }
  for (const { code, subject } of open.cautions) {
    await answerFinding(world.db, buyer.engineer, {
      requestId: id,
      checkId: checked.checkId,
      kind: 'acknowledged',
      code,
      subject,
    });
  }
  await postRequest(world.db, buyer.engineer, {
    requestId: id,
    version: row.version,
    checkId: checked.checkId,
  });
  await world.settle();
  return id;
}

export interface BidPlan {
  coil: number;
  tests?: number;
  freight: number;
  vatBp?: number;
  days: number;
  validDays?: number;
  exceptions?: { subject: string; text: string }[];
  note?: string;
}

/** A bid handed in by the shop's estimator. Amounts in minor units. */
export async function bid(world: SeedWorld, shop: Shop, requestId: string, plan: BidPlan) {
  const net = plan.coil + (plan.tests ?? 18_000) + plan.freight;
  const rate = plan.vatBp ?? 0;
  const body: BidBody = {
    lines: [
      { kind: 'coil', label: 'Work coil', amount: plan.coil },
      { kind: 'tests', label: 'Inductance, pressure and flow, with record', amount: plan.tests ?? 18_000 },
      { kind: 'freight', label: 'Freight', amount: plan.freight },
    ],
    taxLines:
      rate === 0
        ? [{ kind: 'reverse-charge', rateBp: 0, amount: 0 }]
        : [{ kind: 'vat', rateBp: rate, amount: Math.floor((net * rate + 5_000) / 10_000) }],
    milestonePlan: [
      { kind: 'drawing', shareBp: 2000 },
      { kind: 'build', shareBp: 5000 },
      { kind: 'delivery', shareBp: 3000 },
    ],
    toolingOwner: 'none',
    warrantyMonths: 12,
    note: plan.note ?? '',
  };
  const today = dateIn('Europe/Berlin', await businessNow(world.db));
  const saved = await submitBid(world.db, shop.estimator, {
    requestId,
    companyId: shop.id,
    commandId: world.command(),
    version: null,
    values: {
      body,
      leadTimeWorkingDays: plan.days,
      validUntil: addDays(today, plan.validDays ?? 45),
      exceptions: plan.exceptions ?? [],
      fileIds: [],
    },
  });
  await world.settle();
  return saved;
}

export async function award(world: SeedWorld, buyer: Buyer, made: { id: string; version: number }) {
  const outcome = await awardBid(world.db, buyer.purchaser, { bidId: made.id, version: made.version });
  if (outcome.kind !== 'awarded') throw new Error('the award waits for an approval');
  await world.settle();
  return outcome.orderId;
}

async function milestoneId(world: SeedWorld, orderId: string, kind: MilestoneKind): Promise<string> {
  const row = (await milestonesOf(world.db, orderId)).find((one) => one.kind === kind);
  if (!row) throw new Error(`no milestone ${kind}`);
  return row.id;
}

export async function acknowledge(world: SeedWorld, shop: Shop, orderId: string): Promise<void> {
  await acknowledgeOrder(world.db, shop.estimator, { orderId });
  await world.settle();
}

export async function fund(world: SeedWorld, buyer: Buyer, orderId: string, kind: MilestoneKind) {
  const id = await milestoneId(world, orderId, kind);
  await fundMilestone(world.db, buyer.purchaser, { milestoneId: id });
  await world.payPage(id);
  return id;
}

export async function sendDrawing(
  world: SeedWorld,
  shop: Shop,
  orderId: string,
  requirement: Requirement,
  title: string,
  revision = 'A',
): Promise<string> {
  const fileId = await world.upload(
    shop.builder,
    shop.id,
    'coil-drawing',
    `coil-drawing-${revision}.pdf`,
    'application/pdf',
    await coilDrawingPdf(requirement, title, revision),
  );
  const { revisionId } = await submitDrawing(world.db, shop.builder, {
    orderId,
    fileId,
    note: revision === 'A' ? '' : 'Corrected as asked.',
    commandId: world.command(),
  });
  await world.settle();
  return revisionId;
}

export async function judge(
  world: SeedWorld,
  buyer: Buyer,
  revisionId: string,
  reasons?: string,
): Promise<void> {
  await judgeDrawing(world.db, buyer.engineer, {
    revisionId,
    decision: reasons === undefined ? 'approve' : 'request-changes',
    reasons: reasons ?? '',
  });
  await world.settle();
}

export async function submitBuild(world: SeedWorld, shop: Shop, orderId: string): Promise<string> {
  const id = await milestoneId(world, orderId, 'build');
  await submitMilestone(world.db, shop.builder, { milestoneId: id, note: '' });
  await world.settle();
  return id;
}

export async function acceptBuild(world: SeedWorld, buyer: Buyer, orderId: string): Promise<string> {
  const id = await milestoneId(world, orderId, 'build');
  await acceptSubmission(world.db, buyer.engineer, { milestoneId: id });
  await world.settle();
  return id;
}

export async function ship(world: SeedWorld, shop: Shop, orderId: string): Promise<string> {
  const { shipmentId } = await shipOrder(world.db, shop.builder, {
    orderId,
    carrier: 'Parcel service',
    trackingNumber: `PS-${orderId.slice(-6).toUpperCase()}`,
    shippedOn: dateIn('Europe/Berlin', await businessNow(world.db)),
    note: 'Crated, leads capped.',
    paperFileId: null,
    commandId: world.command(),
  });
  await world.settle();
  return shipmentId;
}

export async function receive(world: SeedWorld, actor: Actor, shipmentId: string): Promise<void> {
  await confirmReceipt(world.db, actor, { shipmentId, note: '' });
  await world.settle();
}

export { milestoneId };
