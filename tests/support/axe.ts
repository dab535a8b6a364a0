import AxeBuilder from '@axe-core/playwright';
import type { Page } from '@playwright/test';
import { expect } from './e2e.ts';

/** No violation of WCAG 2.2 A and AA on the page as it stands, in light and in dark. */
export async function expectAccessible(page: Page): Promise<void> {
  for (const scheme of ['light', 'dark'] as const) {
    await page.emulateMedia({ colorScheme: scheme });
    const { violations } = await new AxeBuilder({ page })
      .withTags(['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'])
      .analyze();
    const told = violations.map(
      (violation) => `${violation.id}: ${violation.nodes.map((node) => node.target.join(' ')).join(' | ')}`,
    );
    expect(told, `${new URL(page.url()).pathname} in ${scheme}`).toEqual([]);
  }
  await page.emulateMedia({ colorScheme: null });
}
