import AxeBuilder from '@axe-core/playwright'
import { expect, test } from '../support/test.ts'
import { stack } from '../support/stack.ts'

interface Card {
  readonly slug: string
  readonly state: string
}

/** Every public page: the fixed ones, and of each state that the demo data has, one draw. */
async function publicPaths(): Promise<readonly string[]> {
  const fixed = ['/', '/draws', '/organisations', '/how-it-works', '/developers', '/log', '/sign-in', '/no-such-page']
  const draws = (await (await fetch(`${stack().site}/api/draws`)).json()) as { items: Card[] }
  const organisations = (await (await fetch(`${stack().site}/api/organisations`)).json()) as { items: Card[] }
  const byState = new Map(draws.items.map((card) => [card.state, card.slug]))
  for (const state of ['open', 'closed', 'sealed', 'drawn', 'cancelled', 'failed']) {
    expect(byState.has(state), `the demo data has a draw that is ${state}`).toBe(true)
  }
  const drawn = byState.get('drawn') ?? ''
  return [
    ...fixed,
    ...[...byState.values()].map((slug) => `/draws/${slug}`),
    `/draws/${drawn}/picks/0`,
    `/draws/${drawn}/check`,
    `/draws/${drawn}/hall`,
    `/organisations/${organisations.items[0]?.slug}`,
  ]
}

for (const scheme of ['light', 'dark'] as const) {
  for (const width of [360, 1440]) {
    test(`public pages at ${width} px, ${scheme}: accessible, in bounds, nothing from elsewhere`, async ({
      browser,
    }) => {
      test.setTimeout(5 * 60_000)
      const context = await browser.newContext({ viewport: { width, height: 900 }, colorScheme: scheme })
      const page = await context.newPage()
      const site = new URL(stack().site).host
      const strangers: string[] = []
      const faults: string[] = []
      page.on('request', (request) => {
        const url = new URL(request.url())
        if (url.protocol.startsWith('http') && url.host !== site) strangers.push(request.url())
      })
      page.on('console', (message) => {
        // The page that is not there answers 404, and Chromium says so.
        if (message.type() === 'error' && !message.text().includes('status of 404')) faults.push(message.text())
      })
      page.on('pageerror', (error) => faults.push(String(error)))
      for (const path of await publicPaths()) {
        await page.goto(stack().site + path, { waitUntil: 'networkidle' })
        const overflow = await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)
        expect.soft(overflow, `${path} is wider than the window`).toBeLessThanOrEqual(0)
        const { violations } = await new AxeBuilder({ page })
          .withTags(['wcag2a', 'wcag2aa', 'wcag21aa', 'wcag22aa'])
          .analyze()
        expect.soft(violations.map(({ id, nodes }) => `${path}: ${id}: ${nodes[0]?.html}`)).toEqual([])
        expect.soft(await page.locator('h1').count(), `${path} has one h1`).toBe(1)
      }
      expect(strangers).toEqual([])
      expect(faults).toEqual([])
      await context.close()
    })
  }
}

test('every public page is whole without JavaScript', async ({ browser }) => {
  test.setTimeout(3 * 60_000)
  const withScripts = await browser.newContext()
  const without = await browser.newContext({ javaScriptEnabled: false })
  const page = await withScripts.newPage()
  const plain = await without.newPage()
  for (const path of await publicPaths()) {
    // Times left run on, and buttons (to copy, to send again) come with JavaScript: neither is compared.
    const words = async (which: typeof page) =>
      (
        await which.locator('main').evaluate((main) => {
          const copy = main.cloneNode(true) as HTMLElement
          for (const button of copy.querySelectorAll('button, noscript')) button.remove()
          return copy.textContent
        })
      )
        .replace(/\d+\s*(days?|hours?|minutes?|seconds?)/g, '')
        .replace(/\s+/g, '')
    await plain.goto(stack().site + path)
    const served = await words(plain)
    expect(served.length, `${path} says something`).toBeGreaterThan(40)
    await page.goto(stack().site + path, { waitUntil: 'networkidle' })
    if (path !== '/sign-in') {
      // With JavaScript the browser proves the log by itself and says so in words of its own; all parts stand in both.
      const headings = (which: typeof page) => which.locator('main').getByRole('heading').allInnerTexts()
      expect.soft(await headings(plain), path).toEqual(await headings(page))
      expect.soft(served.length / (await words(page)).length, path).toBeGreaterThan(0.9)
    }
  }
  await withScripts.close()
  await without.close()
})

test('pages name themselves for search engines and social cards', async ({ request }) => {
  for (const path of await publicPaths()) {
    const html = await (await request.get(stack().site + path)).text()
    expect(html, path).toMatch(/<title>[^<]{5,}<\/title>/)
    expect(html, path).toMatch(/<meta name="description" content="[^"]{10,}"/)
    const hidden = path === '/sign-in' || path === '/no-such-page'
    if (hidden) expect(html, path).toContain('<meta name="robots" content="noindex"')
    else expect(html, path).toContain(`<link rel="canonical" href="${stack().site}${path}"`)
    expect(html, path).toContain(`<meta property="og:image" content="${stack().site}/card.png"`)
  }
})
