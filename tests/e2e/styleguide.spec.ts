import AxeBuilder from '@axe-core/playwright';
import { expect, test } from '@playwright/test';

// The gallery holds every component in every state, so one page stands for all of them.
const rules = ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa', 'best-practice'];

for (const colorScheme of ['light', 'dark'] as const) {
  for (const width of [320, 1440]) {
    test(`every component is accessible and fits, ${colorScheme}, ${width} px wide`, async ({ browser }) => {
      const context = await browser.newContext({ colorScheme, viewport: { width, height: 900 } });
      const page = await context.newPage();
      await page.goto('/styleguide');
      await expect(page.getByRole('heading', { name: 'Colours and type' })).toBeVisible();
      expect(
        await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth),
      ).toBeLessThanOrEqual(0);
      // One drawing stands for the other thirteen, whose thousands of lines axe would take a minute to walk.
      await page.evaluate(() =>
        document.querySelectorAll('#drawings figure').forEach((figure, i) => i > 0 && figure.remove()),
      );
      const found = await new AxeBuilder({ page }).withTags(rules).analyze();
      expect(
        found.violations.map((violation) => `${violation.id}: ${violation.nodes[0]?.target.join(' ')}`),
      ).toEqual([]);
      await context.close();
    });
  }
}

test('a chosen theme holds from the first paint of the next page, against the system', async ({
  browser,
}) => {
  const context = await browser.newContext({ colorScheme: 'dark' });
  const page = await context.newPage();
  await page.goto('/styleguide');
  const ground = () => page.evaluate(() => getComputedStyle(document.documentElement).backgroundColor);
  const dark = await ground();
  const light = page.getByRole('radio', { name: 'Light' });
  await expect(page.getByRole('radio', { name: 'As the system' })).toBeChecked();
  await light.focus();
  await page.keyboard.press('Space');
  await expect.poll(ground).not.toBe(dark);
  const chosen = await ground();
  await page.reload({ waitUntil: 'domcontentloaded' });
  expect(await ground()).toBe(chosen);
  await context.close();
});

test('a dialog keeps the focus and gives it back', async ({ page }) => {
  await page.goto('/styleguide');
  const opener = page.getByRole('button', { name: 'Open a dialog' });
  await expect(async () => {
    await opener.click();
    await expect(page.getByRole('dialog', { name: 'Return the record' })).toBeVisible({ timeout: 1000 });
  }).toPass();
  for (let i = 0; i < 6; i++) {
    await page.keyboard.press('Tab');
    expect(await page.evaluate(() => document.activeElement?.closest('[role="dialog"]') !== null)).toBe(true);
  }
  await page.keyboard.press('Escape');
  await expect(page.getByRole('dialog')).toHaveCount(0);
  await expect(opener).toBeFocused();
});

test('a line of the error summary leads to its field', async ({ page }) => {
  await page.goto('/styleguide');
  await page.getByRole('link', { name: 'Choose how the part is quenched.' }).click();
  await expect(page.locator('#field-quench')).toBeFocused();
});

test.describe('without script', () => {
  test.use({ javaScriptEnabled: false, viewport: { width: 360, height: 800 } });

  test('menu and account open, and the fields are native', async ({ page }) => {
    await page.goto('/styleguide');
    await page.getByText('Menu', { exact: false }).first().click();
    await expect(page.getByRole('link', { name: 'Machines' }).first()).toBeVisible();
    await page.locator('summary', { hasText: 'Account of' }).click();
    await expect(page.getByRole('button', { name: 'Sign out' })).toBeVisible();
    await page.getByLabel('Name of the part').fill('Shaft');
    await expect(page.getByLabel('Name of the part')).toHaveValue('Shaft');
  });
});
