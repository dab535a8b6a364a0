import { eq } from 'drizzle-orm';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import type { Actor } from '../../../src/lib/domain/actor.ts';
import { defaultOrderTerms } from '../../../src/lib/domain/order-terms.ts';
import { orderMessageInput } from '../../../src/lib/schemas/forms/messages.ts';
import { businessNow } from '../../../src/lib/server/adapters/clock.ts';
import { newId } from '../../../src/lib/server/adapters/ids.ts';
import { fileAudience } from '../../../src/lib/server/db/schema/files.ts';
import { coilOrder, orderMessage } from '../../../src/lib/server/db/schema/orders.ts';
import { outboxMail } from '../../../src/lib/server/db/schema/platform.ts';
import { fileLink } from '../../../src/lib/server/files/index.ts';
import { listMessages, postMessage } from '../../../src/lib/server/messages/index.ts';
import { testDatabase, type TestDatabase } from '../../support/db.ts';
import { anUploadedFile, testStore, type TestStore } from '../../support/files.ts';
import { aCompany, aMember, anAdmin, aPerson } from '../../support/people.ts';

let objects: TestStore;
let t: TestDatabase;
let buyerId: string;
let shopId: string;
let engineer: Actor;
let builder: Actor;
let orderId: string;

beforeAll(async () => {
  objects = await testStore();
});
afterAll(() => objects.close());

async function anOrder(): Promise<string> {
  const id = newId();
  await t.db.insert(coilOrder).values({
    id,
    number: 1001,
    requestId: newId(),
    bidId: newId(),
    specificationId: newId(),
    buyerCompanyId: buyerId,
    fabricatorCompanyId: shopId,
    title: 'Coil for a pin',
    quantity: 1,
    state: 'running',
    currency: 'EUR',
    netAmount: 100_00,
    taxAmount: 0,
    freightAmount: 0,
    totalAmount: 100_00,
    feeBasisPoints: 500,
    inspectionDays: 10,
    buyerZone: 'Europe/Berlin',
    leadTimeWorkingDays: 10,
    terms: defaultOrderTerms,
    awardedAt: await businessNow(t.db),
    awardedBy: engineer.userId,
  });
  return id;
}

beforeEach(async () => {
  t = await testDatabase();
  buyerId = await aCompany(t.db, 'buyer', { name: 'Anvil Row Hardening' });
  shopId = await aCompany(t.db, 'fabricator', { verified: true, name: 'Fennel Row Coils' });
  engineer = await aMember(t.db, buyerId, ['engineer']);
  builder = await aMember(t.db, shopId, ['builder']);
  orderId = await anOrder();
});
afterEach(() => t.close());

const message = (text: string, files: string[] = []) =>
  orderMessageInput.parse({ commandId: newId(), text, files });

describe('a message', () => {
  test('reaches the other company in the room and by mail, with its files readable there', async () => {
    const fileId = await anUploadedFile(t.db, objects.store, builder, {
      companyId: shopId,
      purpose: 'message-attachment',
      name: 'joint.pdf',
    });
    await expect(fileLink(t.db, engineer, fileId, objects.store)).rejects.toMatchObject({
      code: 'not-found',
    });
    await postMessage(t.db, builder, orderId, message('The second joint, as photographed.', [fileId]));
    await postMessage(t.db, engineer, orderId, message('Thank you.'));
    const { items } = await listMessages(t.db, engineer, orderId);
    expect(items).toMatchObject([
      {
        side: 'fabricator',
        companyName: 'Fennel Row Coils',
        authorName: builder.name,
        files: [{ name: 'joint.pdf' }],
      },
      { side: 'buyer', companyName: 'Anvil Row Hardening', text: 'Thank you.', files: [] },
    ]);
    await expect(fileLink(t.db, engineer, fileId, objects.store)).resolves.toMatchObject({
      name: 'joint.pdf',
    });
    const mails = await t.db.select().from(outboxMail).where(eq(outboxMail.kind, 'order-message'));
    expect(mails.map((mail) => [mail.toEmail, mail.subject])).toEqual([
      [engineer.email, 'O-1001: message from Fennel Row Coils'],
      [builder.email, 'O-1001: message from Anvil Row Hardening'],
    ]);
  });

  test('sent twice by the same command is one', async () => {
    const input = message('Once.');
    const first = await postMessage(t.db, engineer, orderId, input);
    expect(await postMessage(t.db, engineer, orderId, input)).toEqual(first);
    expect(await t.db.select().from(orderMessage)).toHaveLength(1);
  });

  test('has words or a file, within limits', () => {
    const fails = (input: object) => orderMessageInput.safeParse({ commandId: newId(), ...input }).success;
    expect(fails({ text: '   ' })).toBe(false);
    expect(fails({ text: 'x'.repeat(5001) })).toBe(false);
    expect(fails({ text: '', files: [newId()] })).toBe(true);
  });

  test('takes no file of another company or purpose, and then nothing is written', async () => {
    const foreign = await anUploadedFile(t.db, objects.store, engineer, {
      companyId: buyerId,
      purpose: 'message-attachment',
    });
    const sketch = await anUploadedFile(t.db, objects.store, engineer, {
      companyId: buyerId,
      purpose: 'request-sketch',
    });
    await expect(postMessage(t.db, builder, orderId, message('see', [foreign]))).rejects.toMatchObject({
      code: 'invalid-input',
    });
    await expect(postMessage(t.db, engineer, orderId, message('see', [sketch]))).rejects.toMatchObject({
      code: 'invalid-input',
    });
    expect(await t.db.select().from(orderMessage)).toEqual([]);
    expect(await t.db.select().from(fileAudience)).toEqual([]);
    expect(await t.db.select().from(outboxMail)).toEqual([]);
  });
});

test('outsiders, other companies and admins neither read nor write', async () => {
  await postMessage(t.db, engineer, orderId, message('For the two of us.'));
  const rival = await aMember(t.db, await aCompany(t.db, 'fabricator', { verified: true }), ['owner']);
  for (const who of [rival, await aPerson(t.db), await anAdmin(t.db)]) {
    await expect(postMessage(t.db, who, orderId, message('Hello'))).rejects.toMatchObject({
      code: 'not-found',
    });
    await expect(listMessages(t.db, who, orderId)).rejects.toMatchObject({ code: 'not-found' });
  }
  const unconfirmed = await aMember(t.db, shopId, ['builder'], { emailVerified: false });
  await expect(postMessage(t.db, unconfirmed, orderId, message('Hello'))).rejects.toMatchObject({
    code: 'email-not-verified',
  });
  expect(await t.db.select().from(orderMessage)).toHaveLength(1);
});

test('long talks come in pages, newest page first, each in order', async () => {
  for (let n = 0; n < 60; n += 1) await postMessage(t.db, engineer, orderId, message(`${n}`));
  const newest = await listMessages(t.db, builder, orderId);
  const earlier = await listMessages(t.db, builder, orderId, { before: newest.earlier });
  expect([...earlier.items, ...newest.items].map((item) => item.text)).toEqual(
    Array.from({ length: 60 }, (_, n) => `${n}`),
  );
  expect(earlier.earlier).toBeNull();
});
