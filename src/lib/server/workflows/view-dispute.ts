import { inArray } from 'drizzle-orm';
import type { Actor } from '../../domain/actor.ts';
import { can, requireAccess } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import type { Reader } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { decisionsOf, offersOf, statementsOf, unsafeDispute } from '../disputes/index.ts';
import { unsafeFileFacts } from '../files/index.ts';
import { heldBalance } from '../money/index.ts';
import { orderNumberText, parties, sideOf } from '../orders/index.ts';

/** A dispute as its parties and the admin read it: the same for all of them. */
export async function viewDispute(reader: Reader, actor: Actor | null, disputeId: string) {
  const { dispute, order, milestone, opener } = await unsafeDispute(reader, disputeId);
  const admin = can(actor, 'admin.decide-dispute');
  if (!admin) requireAccess(actor, 'order.view', parties(order));
  const person = actor as Actor;
  const statements = await statementsOf(reader, disputeId);
  const decisions = await decisionsOf(reader, disputeId);
  const offers = await offersOf(reader, disputeId);
  const files = await unsafeFileFacts(
    reader,
    statements.flatMap((row) => row.fileIds),
  );
  const ids = [...new Set([...statements.map((s) => s.authorUserId), ...decisions.map((d) => d.decidedBy)])];
  const names =
    ids.length === 0
      ? []
      : await reader.select({ id: user.id, name: user.name }).from(user).where(inArray(user.id, ids));
  const nameOf = (id: string) => names.find((row) => row.id === id)?.name ?? '';
  const companyName = (id: string | null) =>
    id === null ? 'The platform' : id === order.buyerCompanyId ? order.buyerName : order.fabricatorName;
  const side = sideOf(person, 'order.view', order);
  const companyId =
    side === 'buyer' ? order.buyerCompanyId : side === 'fabricator' ? order.fabricatorCompanyId : null;
  return {
    now: await businessNow(reader),
    zone: person.timeZone,
    admin,
    side,
    companyId,
    mayAct: can(person, 'order.dispute', parties(order)),
    /** An appeal is decided by another admin. */
    decidedFirst: decisions.some((row) => row.instance === 1 && row.decidedBy === person.userId),
    order: {
      id: order.id,
      number: orderNumberText(order),
      title: order.title,
      currency: order.currency,
      buyerName: order.buyerName,
      fabricatorName: order.fabricatorName,
      buyerZone: order.buyerZone,
    },
    milestone: { id: milestone.id, kind: milestone.kind, work: milestone.work, money: milestone.money },
    held: await heldBalance(reader, milestone.id),
    dispute: {
      id: dispute.id,
      state: dispute.state,
      reason: dispute.reason,
      complaintAbout: dispute.complaintAbout,
      amountClaimed: dispute.amountClaimed,
      openedAt: dispute.openedAt,
      openedBy: companyName(dispute.openedByCompanyId),
      opener,
      answerDueAt: dispute.answerDueAt,
      decisionDueAt: dispute.decisionDueAt,
      appealUntil: dispute.appealUntil,
      closedAt: dispute.closedAt,
      releaseAmount: dispute.releaseAmount,
      refundAmount: dispute.refundAmount,
      version: dispute.version,
    },
    statements: statements.map((row) => ({
      id: row.id,
      kind: row.kind,
      at: row.at,
      author: nameOf(row.authorUserId),
      company: companyName(row.authorCompanyId),
      text: row.text,
      files: row.fileIds
        .flatMap((id) => files.filter((f) => f.id === id))
        .map(({ id, name, size }) => ({ id, name, size })),
    })),
    offers: offers.map((row) => ({
      id: row.id,
      by: companyName(row.companyId),
      own: row.companyId === companyId,
      at: row.offeredAt,
      release: row.releaseAmount,
      refund: row.refundAmount,
      note: row.note,
      state: row.state,
    })),
    decisions: decisions.map((row) => ({
      instance: row.instance,
      at: row.at,
      release: row.releaseAmount,
      refund: row.refundAmount,
      goods: row.goods,
      otherMilestones: row.otherMilestones,
      freightPaidBy: row.freightPaidBy,
      reason: row.reason,
    })),
  };
}
export type DisputeView = Awaited<ReturnType<typeof viewDispute>>;
