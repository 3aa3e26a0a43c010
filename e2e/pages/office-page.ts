import { expect, type Page } from '@playwright/test'

/** What an organiser types about a draw, as the form has it. */
export interface DrawForm {
  readonly title: string
  readonly goodCause: string
  readonly promoterName: string
  readonly promoterAddress: string
  readonly ticketPrice: string
  readonly terms: string
  readonly closesAt: string
  readonly drawAt: string
  readonly reserves: string
}

/** The office as an organiser goes through it. Every method ends where its page says that it is done. */
export class OfficePage {
  readonly page: Page
  constructor(page: Page) {
    this.page = page
  }

  async signIn(email: string, password: string) {
    const { page } = this
    await page.goto('/sign-in')
    await expect(page.getByRole('heading', { level: 1, name: 'Sign in' })).toBeVisible()
    await page.getByLabel('E-mail address').fill(email)
    await page.getByLabel('Password', { exact: true }).fill(password)
    await page.getByRole('button', { name: 'Sign in' }).click()
    await expect(page.getByRole('button', { name: 'Sign out' }).first()).toBeVisible()
  }

  async makeDraw(organisation: string, form: DrawForm) {
    const { page } = this
    await page.goto(`/office/${organisation}`)
    await page.getByRole('link', { name: 'Make a draw' }).click()
    await page.getByLabel('Title').fill(form.title)
    await page.getByLabel('Good cause').fill(form.goodCause)
    await page.getByLabel('Promoter', { exact: true }).fill(form.promoterName)
    await page.getByLabel('Promoter’s address').fill(form.promoterAddress)
    await page.getByLabel(/^Price of a ticket/).fill(form.ticketPrice)
    await page.getByLabel('The list closes').fill(form.closesAt)
    await page.getByLabel('The draw', { exact: true }).fill(form.drawAt)
    await page.getByLabel('Reserves').fill(form.reserves)
    await page.getByLabel('Terms').fill(form.terms)
    await page.getByRole('button', { name: 'Save, and go on to the prizes' }).click()
    await expect(page.getByRole('heading', { level: 1, name: form.title })).toBeVisible()
  }

  /** On the page of the prizes: types them in their order and saves. */
  async setPrizes(prizes: readonly { readonly name: string; readonly quantity: string }[]) {
    const { page } = this
    for (const [index, prize] of prizes.entries()) {
      if (index > 0) await page.getByRole('button', { name: 'Add a prize' }).click()
      const group = page.getByRole('group', { name: `Prize ${index + 1} of` })
      await group.getByLabel(`${index + 1}. Prize`).fill(prize.name)
      await group.getByLabel('How many').fill(prize.quantity)
    }
    await page.getByRole('button', { name: 'Save the prizes' }).click()
    await expect(page.getByText(/^Saved: /)).toBeVisible()
  }

  async goTo(step: 'Terms' | 'Prizes' | 'Entrants' | 'Seal') {
    await this.page.getByRole('navigation', { name: 'Steps of this draw' }).getByRole('link', { name: step }).click()
  }

  async open() {
    await this.goTo('Terms')
    await this.page.getByRole('button', { name: 'Open for entries' }).click()
    await expect(this.state('Open')).toBeVisible()
  }

  async close() {
    const { page } = this
    await page.goto(this.drawAddress())
    await page.getByRole('button', { name: 'Close the list now' }).click()
    await page.getByRole('button', { name: 'Close the list', exact: true }).click()
    await expect(this.state('Closed')).toBeVisible()
  }

  async seal() {
    const { page } = this
    await this.goTo('Seal')
    await page.getByRole('checkbox').check()
    await page.getByRole('button', { name: 'Seal the list' }).click()
    await expect(this.state('Sealed')).toBeVisible({ timeout: 30_000 })
  }

  state(word: string) {
    return this.page.locator('.state', { hasText: word }).first()
  }

  /** The address of the draw's first page, out of whichever of its pages is open. */
  drawAddress(): string {
    const match = /^(.*\/office\/[^/]+\/draws\/[0-9a-f-]{36})/.exec(this.page.url())
    if (!match?.[1]) throw new Error(`Not on a page of a draw: ${this.page.url()}`)
    return match[1]
  }
}
