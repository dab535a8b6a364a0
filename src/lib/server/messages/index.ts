import { and, asc, desc, eq, inArray, lt } from 'drizzle-orm';
import type { z } from 'zod';
import type { Actor } from '../../domain/actor.ts';
import { AppError } from '../../domain/errors.ts';
import type { orderMessageInput } from '../../schemas/forms/messages.ts';
import { requireVerifiedEmail } from '../access/index.ts';
import { businessNow } from '../adapters/clock.ts';
import { newId } from '../adapters/ids.ts';
import { audit } from '../audit/index.ts';
import { notifyCompany } from '../companies/recipients.ts';
import { transact, type Database, type Reader, type Tx } from '../db/index.ts';
import { user } from '../db/schema/auth.ts';
import { orderMessage, orderMessageFile } from '../db/schema/orders.ts';
import { requireCleanFile, shareFile, unsafeFileFacts, type FileFacts } from '../files/index.ts';
import { orderFor, orderNumberText, sideOf, type OrderRow, type Side } from '../orders/index.ts';

export interface OrderMessage {
  id: string;
  authorName: string;
  side: Side;
  companyName: string;
  text: string;
  at: number;
  files: Pick<FileFacts, 'id' | 'name' | 'size' | 'sha256'>[];
}

interface Ends {
  from: { companyId: string; name: string };
  to: { companyId: string; name: string };
}

function endsOf(order: OrderRow, side: Side): Ends {
  const buyer = { companyId: order.buyerCompanyId, name: order.buyerName };
  const fabricator = { companyId: order.fabricatorCompanyId, name: order.fabricatorName };
  return side === 'buyer' ? { from: buyer, to: fabricator } : { from: fabricator, to: buyer };
}

async function attach(tx: Tx, messageId: string, files: readonly string[], { from, to }: Ends) {
  for (const fileId of new Set(files)) {
    await requireCleanFile(tx, fileId, { ownerCompanyId: from.companyId, purpose: 'message-attachment' });
    await shareFile(tx, fileId, [to.companyId]);
    await tx.insert(orderMessageFile).values({ messageId, fileId });
  }
}

/**
 * A message in the order room, with files, to the other company; it is told by mail. Stays possible after
 * the order is done or ended. The same command twice is one message.
 */
export async function postMessage(
  db: Database,
  actor: Actor,
  orderId: string,
  input: z.output<typeof orderMessageInput>,
): Promise<{ id: string }> {
  return transact(db, async (tx) => {
    const order = await orderFor(tx, actor, 'order.message', orderId);
    requireVerifiedEmail(actor);
    const side = sideOf(actor, 'order.message', order);
    if (!side) throw new AppError('not-found');
    const [same] = await tx
      .select({ id: orderMessage.id, author: orderMessage.authorUserId, orderId: orderMessage.orderId })
      .from(orderMessage)
      .where(eq(orderMessage.commandId, input.commandId));
    if (same) {
      if (same.author === actor.userId && same.orderId === orderId) return { id: same.id };
      throw new AppError('already-exists');
    }
    const ends = endsOf(order, side);
    const id = newId();
    await tx.insert(orderMessage).values({
      id,
      orderId,
      authorUserId: actor.userId,
      authorCompanyId: ends.from.companyId,
      text: input.text,
      at: await businessNow(tx),
      commandId: input.commandId,
    });
    await attach(tx, id, input.files, ends);
    await audit(tx, actor, {
      action: 'order.message',
      subjectType: 'order',
      subjectId: orderId,
      companyId: ends.from.companyId,
      detail: { messageId: id, files: input.files },
    });
    const number = orderNumberText(order);
    const href = `/orders/${orderId}#messages`;
    await notifyCompany(tx, ends.to.companyId, 'all', {
      kind: 'order-message',
      subject: `${number}: message from ${ends.from.name}`,
      content: {
        heading: `${ends.from.name} wrote to you`,
        paragraphs: [input.text === '' ? 'A file without words.' : input.text],
        facts: [
          ['Order', `${number}, ${order.title}`],
          ['From', actor.name],
          ...(input.files.length > 0 ? [['Files', String(input.files.length)] as [string, string]] : []),
        ],
        action: { label: 'Answer in the order room', path: href },
      },
      about: { type: 'order', id: orderId },
      href,
      dedupeKey: `order-message/${id}`,
    });
    return { id };
  });
}

async function filesOf(reader: Reader, messageIds: readonly string[]) {
  if (messageIds.length === 0) return new Map<string, FileFacts[]>();
  const links = await reader
    .select()
    .from(orderMessageFile)
    .where(inArray(orderMessageFile.messageId, [...messageIds]))
    .orderBy(asc(orderMessageFile.fileId));
  const facts = await unsafeFileFacts(
    reader,
    links.map((link) => link.fileId),
  );
  const byId = new Map(facts.map((fact) => [fact.id, fact]));
  const byMessage = new Map<string, FileFacts[]>();
  for (const { messageId, fileId } of links) {
    const fact = byId.get(fileId);
    if (fact) byMessage.set(messageId, [...(byMessage.get(messageId) ?? []), fact]);
  }
  return byMessage;
}

const pageSize = 50;

/** Messages of an order, oldest first; `before` (a message id) gives those before it. */
export async function listMessages(
  reader: Reader,
  actor: Actor,
  orderId: string,
  options: { before?: string | null } = {},
): Promise<{ items: OrderMessage[]; earlier: string | null }> {
  const order = await orderFor(reader, actor, 'order.view', orderId);
  const rows = await reader
    .select({
      id: orderMessage.id,
      authorName: user.name,
      companyId: orderMessage.authorCompanyId,
      text: orderMessage.text,
      at: orderMessage.at,
    })
    .from(orderMessage)
    .innerJoin(user, eq(user.id, orderMessage.authorUserId))
    .where(
      and(
        eq(orderMessage.orderId, orderId),
        ...(options.before ? [lt(orderMessage.id, options.before)] : []),
      ),
    )
    .orderBy(desc(orderMessage.id))
    .limit(pageSize + 1);
  const shown = rows.slice(0, pageSize).reverse();
  const files = await filesOf(
    reader,
    shown.map((row) => row.id),
  );
  const items = shown.map(({ companyId, ...row }) => {
    const side: Side = companyId === order.buyerCompanyId ? 'buyer' : 'fabricator';
    return {
      ...row,
      side,
      companyName: side === 'buyer' ? order.buyerName : order.fabricatorName,
      files: (files.get(row.id) ?? []).map(({ id, name, size, sha256 }) => ({ id, name, size, sha256 })),
    };
  });
  return { items, earlier: rows.length > pageSize ? (items[0]?.id ?? null) : null };
}
