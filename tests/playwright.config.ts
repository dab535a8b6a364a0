import { defineConfig } from '@playwright/test';
import { stackInfo } from './support/stack-info.ts';

export default defineConfig({
  testDir: 'e2e',
  // Journeys move business time for everybody, so they run alone, after the others.
  projects: [
    { name: 'pages', testMatch: '**/*.spec.ts', testIgnore: '**/journey/**' },
    { name: 'journeys', testMatch: '**/journey/*.spec.ts', dependencies: ['pages'], fullyParallel: false },
  ],
  outputDir: '../test-results',
  // Two cores serve the browser, the application and the worker.
  workers: 2,
  fullyParallel: false,
  retries: 0,
  forbidOnly: true,
  timeout: 60_000,
  expect: { timeout: 10_000 },
  reporter: process.env['PLAYWRIGHT_JSON_OUTPUT_NAME'] === undefined ? 'list' : [['json'], ['dot']],
  use: {
    baseURL: stackInfo().origin,
    locale: 'en-GB',
    timezoneId: 'Europe/Berlin',
    actionTimeout: 15_000,
    navigationTimeout: 30_000,
    screenshot: 'only-on-failure',
    trace: 'off',
    launchOptions: {
      executablePath: process.env['CHROMIUM_PATH'] ?? '/usr/bin/chromium',
      args: [
        '--no-sandbox',
        '--disable-gpu',
        '--disable-quic',
        '--no-first-run',
        '--disable-background-networking',
        '--disable-component-update',
        '--disable-sync',
      ],
    },
  },
});
