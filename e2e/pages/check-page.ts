import { expect, type Locator, type Page } from '@playwright/test'

export interface GivenFile {
  readonly name: string
  readonly bytes: Uint8Array
}

/** The check in the browser: on a draw's page, or as a file of its own. */
export class CheckPage {
  readonly start: Locator
  readonly stop: Locator
  readonly verdict: Locator

  constructor(readonly page: Page) {
    this.start = page.getByRole('button', { name: /^Check every coin/ })
    this.stop = page.getByRole('button', { name: 'Stop' })
    this.verdict = page
      .getByRole('region')
      .or(page.locator('section.part'))
      .filter({
        has: page.getByRole('heading', { name: /^(The verdict|No verdict)$/ }),
      })
  }

  async give(...files: readonly GivenFile[]): Promise<void> {
    await this.page
      .locator('#check-files')
      .setInputFiles(files.map(({ name, bytes }) => ({ name, mimeType: '', buffer: Buffer.from(bytes) })))
  }

  /** Lets the development chain and timestamps pass, with which every demonstration is drawn. */
  allowDemonstration(): Promise<void> {
    return this.page.getByLabel('This is a demonstration: let it pass').check()
  }

  /** Runs the check to its end. */
  async run(): Promise<void> {
    await this.start.click()
    await expect(this.start).not.toHaveAttribute('aria-busy', 'true', { timeout: 60_000 })
  }

  async expectHeld(): Promise<void> {
    await expect(this.page.getByRole('heading', { name: 'The arithmetic holds' })).toBeVisible()
    await expect(this.page.getByRole('heading', { name: /^Sealed in time: / })).toBeVisible()
    await expect(this.steps().filter({ hasText: /^Holds/ })).toHaveCount(await this.steps().count())
  }

  /** The first thing that fails: its step, its place and its code. */
  async expectFailed(step: number, at: string | RegExp, code: string): Promise<void> {
    await expect(this.page.getByRole('heading', { name: new RegExp(`^Step ${step} fails: `) })).toBeVisible()
    await expect(this.verdict.locator('code').first()).toHaveText(at)
    await expect(this.verdict.locator('code').nth(1)).toHaveText(code)
    await expect(this.step(step)).toHaveClass('fails')
    await expect(this.page.getByRole('heading', { name: 'The arithmetic holds' })).toHaveCount(0)
  }

  steps(): Locator {
    return this.page.locator('.check-steps > li')
  }

  step(number: number): Locator {
    return this.steps().nth(number - 1)
  }

  /** A figure of a step that is open. */
  figure(step: number, name: string): Locator {
    return this.step(step)
      .locator('.step-facts > div')
      .filter({ has: this.page.getByText(name, { exact: true }) })
      .locator('dd')
  }
}
