import type { Browser, Page } from '@playwright/test';
import { aSignUp, anOwner, aWord } from '../../support/e2e-people.ts';
import * as order from '../../support/e2e-order.ts';
import { expect, signIn, test, TroubleLog, waitForMail, watch } from '../../support/e2e.ts';

// The product's main job in three browser sessions. These specs move business time, so they run alone.

async function session(browser: Browser, log: TroubleLog): Promise<Page> {
  const context = await browser.newContext({ locale: 'en-GB', timezoneId: 'Europe/Berlin' });
  await watch(context, log);
  return context.newPage();
}

test('from requirement to released payment, disputed at the end and resolved by an admin', async ({
  browser,
  trouble,
}) => {
  test.setTimeout(420_000);
  // The composer asks again when a newer version was saved meanwhile; the browser logs the refusal.
  trouble.allow(/409 \(Conflict\) .*\/checks/);
  const buyer = await anOwner('buyer');
  const shop = await order.aVerifiedShop();
  const admin = await aSignUp('Arbiter', { admin: true });
  const [buyerPage, shopPage, adminPage] = [
    await session(browser, trouble),
    await session(browser, trouble),
    await session(browser, trouble),
  ];
  await signIn(shopPage, shop);
  await order.onboardPayouts(shopPage, shop);
  await signIn(buyerPage, buyer);

  const title = `Journal coil ${aWord()}`;
  const requestPath = await order.postRequest(buyerPage, { title, inspectionDays: '10' });
  await waitForMail({ to: shop.email, subject: title });

  await order.handInBid(shopPage, requestPath, {
    coil: '1840.00',
    freight: '95.00',
    tax: '367.65',
    exception: 'Plate 28 mm wide instead of 30 mm.',
  });
  await waitForMail({ to: buyer.email, subject: 'Bid from' });
  const path = await order.award(buyerPage, requestPath, shop.companyName);
  await waitForMail({ to: shop.email, subject: 'You have the order' });

  await shopPage.goto(path);
  await shopPage.getByRole('button', { name: 'Acknowledge the order' }).click();
  await waitForMail({ to: buyer.email, subject: 'acknowledged' });

  await order.fund(buyerPage, path, 'drawing');
  await waitForMail({ to: shop.email, subject: 'drawing funded' });
  await order.submitDrawing(shopPage, path);
  await waitForMail({ to: buyer.email, subject: 'drawing revision A to judge' });
  await order.approveDrawing(buyerPage, path);
  await waitForMail({ to: shop.email, subject: 'drawing revision A approved' });
  await order.release(buyerPage, path, 'drawing');
  await waitForMail({ to: shop.email, subject: 'drawing released' });

  await order.fund(buyerPage, path, 'build');
  await order.recordAndSubmit(shopPage, path);
  await waitForMail({ to: buyer.email, subject: 'build submitted' });
  await order.acceptEvidence(buyerPage, path);
  await order.release(buyerPage, path, 'build');

  await order.fund(buyerPage, path, 'delivery');
  await order.ship(shopPage, path);
  await waitForMail({ to: buyer.email, subject: 'shipped' });
  await order.confirmReceipt(buyerPage, path);

  // The buyer is not content: the money of the delivery stays held until the dispute has ended.
  await buyerPage.goto(path);
  await buyerPage.getByRole('link', { name: 'Open a dispute' }).last().click();
  await buyerPage.getByLabel('Reason').selectOption('not-as-specified');
  await buyerPage.getByLabel('Acceptance line or piece complained of').fill('Lead spacing');
  await buyerPage.getByLabel(/Amount claimed/).fill('300.00');
  await buyerPage
    .getByLabel('What is wrong')
    .fill('The leads stand wider than the plate and had to be bent.');
  await buyerPage.getByRole('button', { name: 'Open the dispute' }).click();
  await waitForMail({ to: shop.email, subject: 'dispute' });

  await shopPage.goto(path);
  await shopPage.getByRole('link', { name: 'Open the dispute' }).click();
  await shopPage
    .getByLabel('Answer to the complaint')
    .fill('The spacing is the one of the approved drawing.');
  await shopPage.getByRole('button', { name: 'Send the answer' }).click();

  await signIn(adminPage, admin);
  await adminPage.goto('/admin/disputes');
  await adminPage
    .getByRole('link', { name: new RegExp(title) })
    .first()
    .click();
  // 30 % of 2302.65 is held.
  await adminPage.getByLabel(/Release to the fabricator/).fill('590.79');
  await adminPage.getByLabel(/Refund to the buyer/).fill('100.00');
  await adminPage.getByLabel('What becomes of the goods').fill('The coil stays with the buyer.');
  await adminPage.getByLabel('Who pays freight').selectOption('none');
  await adminPage
    .getByLabel('Reason in writing')
    .fill('The drawing was approved with this spacing; the cost of bending is shared by the parties.');
  await adminPage.getByRole('button', { name: 'Decide the dispute' }).click();
  await waitForMail({ to: buyer.email, subject: 'decided' });

  // Money moves when nobody has appealed within five days.
  await order.daysLater(6);
  await expect(async () => {
    await buyerPage.goto(path);
    await expect(buyerPage.locator('header').filter({ hasText: title })).toContainText('done', {
      timeout: 500,
    });
  }).toPass({ timeout: 60_000 });
  await waitForMail({ to: shop.email, subject: 'final' });
});

test('once more in inch units and dollars, with a seven-day window that ends by itself', async ({
  browser,
  trouble,
}) => {
  test.setTimeout(420_000);
  // The composer asks again when a newer version was saved meanwhile; the browser logs the refusal.
  trouble.allow(/409 \(Conflict\) .*\/checks/);
  const buyer = await anOwner('buyer');
  await order.useInches(buyer, 'USD');
  const shop = await order.aVerifiedShop();
  await order.useInches(shop, 'USD');
  const buyerPage = await session(browser, trouble);
  const shopPage = await session(browser, trouble);
  await signIn(shopPage, shop);
  await order.onboardPayouts(shopPage, shop);
  await signIn(buyerPage, buyer);
  const title = `Ring coil ${aWord()}`;
  const requestPath = await order.postRequest(buyerPage, { title, inspectionDays: '7' });
  await order.handInBid(shopPage, requestPath, { coil: '2310.55', freight: '120.00' });
  const path = await order.award(buyerPage, requestPath, shop.companyName);
  await expect(buyerPage.getByText('USD\u00a02,430.55').first()).toBeVisible();
  await shopPage.goto(path);
  await shopPage.getByRole('button', { name: 'Acknowledge the order' }).click();
  await order.fund(buyerPage, path, 'drawing');
  await order.submitDrawing(shopPage, path);
  await order.approveDrawing(buyerPage, path);
  await order.fund(buyerPage, path, 'build');
  await order.recordAndSubmit(shopPage, path);

  // Nobody answers: after the seven days of the window the build is accepted and released by itself.
  await order.daysLater(9);
  await expect(async () => {
    await shopPage.goto(path);
    await expect(shopPage.locator('#money')).toContainText(/build[\s\S]*released/i, { timeout: 500 });
  }).toPass({ timeout: 60_000 });
  await waitForMail({ to: shop.email, subject: 'build released' });
});
