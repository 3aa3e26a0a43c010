import { defineConfig } from '@playwright/test'

// npm test names a file for the report that it counts; by hand the list is enough.
const report = process.env.EVENPENNY_E2E_REPORT

export default defineConfig({
  testDir: 'e2e/specs',
  outputDir: 'test-results',
  globalSetup: './e2e/support/global-setup.ts',
  // One stack serves all specs, and two cores serve the stack.
  workers: 1,
  fullyParallel: false,
  // A test that passes only when tried again has found something.
  retries: 0,
  forbidOnly: Boolean(process.env.CI),
  timeout: 120_000,
  expect: { timeout: 15_000 },
  globalTimeout: 19 * 60_000,
  reporter: report ? [['list'], ['json', { outputFile: report }]] : [['list']],
  use: {
    browserName: 'chromium',
    locale: 'en-GB',
    trace: 'retain-on-failure',
    screenshot: 'only-on-failure',
    launchOptions: {
      // Debian's own; Playwright's would have to be downloaded.
      executablePath: '/usr/bin/chromium',
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
})
