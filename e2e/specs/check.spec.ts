import { createHash, randomBytes } from 'node:crypto'
import { mkdtemp, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { pathToFileURL } from 'node:url'
import AxeBuilder from '@axe-core/playwright'
import type { Page } from '@playwright/test'
import { unzipSync } from 'fflate'
import { CheckPage } from '../pages/check-page.ts'
import { rawZip } from '../support/raw-zip.ts'
import { stack } from '../support/stack.ts'
import { expect, test } from '../support/test.ts'

interface Card {
  readonly slug: string
  readonly state: string
  readonly entrants: number | null
}

const sha256 = (bytes: Uint8Array) => createHash('sha256').update(bytes).digest('hex')
const text = (bytes: Uint8Array | undefined) => Buffer.from(bytes ?? []).toString('utf8')
const utf8 = (words: string) => new Uint8Array(Buffer.from(words))
const api = async (path: string) => (await fetch(`${stack().site}/api${path}`)).json()
const fetchBytes = async (path: string) => new Uint8Array(await (await fetch(stack().site + path)).arrayBuffer())

let slug = ''
let archive = new Uint8Array()

test.beforeAll(async () => {
  const { items } = (await api('/draws')) as { items: Card[] }
  slug = items.find((card) => card.state === 'drawn' && (card.entrants ?? 0) > 5000)?.slug ?? ''
  expect(slug, 'the demo data has a drawn draw of more than 5,000 entrants').not.toBe('')
  archive = await fetchBytes(`/draws/${slug}/proof.zip`)
})

/** The archive with members changed, and its sums made to fit again. */
function tampered(change: (members: Record<string, Uint8Array>) => void): Buffer {
  const members = unzipSync(archive)
  change(members)
  const names = Object.keys(members).filter((name) => name !== 'SHA256SUMS')
  members.SHA256SUMS = utf8(names.map((name) => `${sha256(members[name] ?? new Uint8Array())}  ${name}\n`).join(''))
  return rawZip([...names, 'SHA256SUMS'].map((name) => ({ name, bytes: members[name] ?? new Uint8Array() })))
}

async function expectAccessible(page: Page, what: string): Promise<void> {
  const { violations } = await new AxeBuilder({ page })
    .withTags(['wcag2a', 'wcag2aa', 'wcag21aa', 'wcag22aa'])
    .analyze()
  expect.soft(violations.map(({ id, nodes }) => `${what}: ${id}: ${nodes[0]?.html}`)).toEqual([])
  const overflow = await page.evaluate(() => document.documentElement.scrollWidth - window.innerWidth)
  expect.soft(overflow, `${what} is wider than the window`).toBeLessThanOrEqual(0)
}

test('a stranger checks a draw of 5,000 entrants in the page', async ({ page }) => {
  const members = unzipSync(archive)
  const seal = JSON.parse(text(members['seal.json']))
  const result = JSON.parse(text(members['result.json']))
  const strangers: string[] = []
  const faults: string[] = []
  page.on('request', (request) => {
    const url = new URL(request.url())
    if (url.protocol.startsWith('http') && url.host !== new URL(stack().site).host) strangers.push(request.url())
  })
  page.on('pageerror', (error) => faults.push(String(error)))
  page.on('console', (message) => {
    if (message.type() === 'error') faults.push(message.text())
  })
  await page.goto(`/draws/${slug}/check`, { waitUntil: 'networkidle' })
  const check = new CheckPage(page)

  // A demonstration does not pass unless somebody says that it may.
  await check.run()
  await check.expectFailed(3, /^seal\.json sources\.beacon/, 'development-chain')

  await check.allowDemonstration()
  await check.run()
  await check.expectHeld()
  await expect(check.verdict).toContainText('Signed by the key whose fingerprint was given.')
  await expect(check.verdict).toContainText('the development chain, whose secret is public')
  await expect(check.verdict).toContainText('What no check can show')
  await expect(check.verdict, 'the worker may use WebAssembly').toContainText('hashed in WebAssembly')

  await check.step(4).locator('summary').click()
  const root = (await check.figure(4, 'Root of entries.csv').innerText()).replace(/\s/g, '')
  expect(root).toBe(seal.entries.root)
  await expect(check.figure(4, 'Entrants in entries.csv')).toHaveText(seal.entries.count.toLocaleString('en-GB'))

  // The walk of the second pick is the one that the archive holds, and ends at whom the site announces.
  const line = JSON.parse(text(members['transcript.jsonl']).split('\n')[1] ?? '')
  const announced = (await api(`/draws/${slug}/picks/1`)) as { pick: { label: string; leaf: number } }
  expect(announced.pick.leaf).toBe(result.picks[1].leaf)
  await page.locator('.check-picks > li').nth(1).getByRole('button').click()
  await expect(page.locator('.ladder .display')).toHaveText(announced.pick.label)
  await expect(page.locator('.ladder > li')).toHaveCount(line.coins.length + 1)
  await expectAccessible(page, 'the check that holds')

  // Another key than the given one.
  await page.getByLabel('The key’s fingerprint').fill('ab'.repeat(32))
  await check.run()
  await check.expectFailed(2, 'site-key.pem', 'key-not-the-expected')
  await page.getByLabel('The key’s fingerprint').fill('ab12')
  await check.start.click()
  await expect(page.getByText('A fingerprint has 64 digits, and this one has 4.')).toBeVisible()
  expect(strangers).toEqual([])
  expect(faults).toEqual([])
})

test('a tampered archive is refused, and the place is named', async ({ page }) => {
  await page.goto(`/draws/${slug}/check`, { waitUntil: 'networkidle' })
  const check = new CheckPage(page)
  await check.allowDemonstration()

  const oneTicketMore = tampered((members) => {
    const lines = text(members['entries.csv']).split('\n')
    // From one entrant to another, so that the total stays.
    const from = lines.findIndex((line, index) => index > 3000 && /^\d+/.test(line) && Number(line.split(',')[0]) > 1)
    const moved = (line: string | undefined, by: number) =>
      (line ?? '').replace(/^\d+/, (tickets) => String(Number(tickets) + by))
    lines[from] = moved(lines[from], -1)
    lines[3000] = moved(lines[3000], 1)
    members['entries.csv'] = utf8(lines.join('\n'))
  })
  await check.give({ name: 'one-ticket-more.zip', bytes: oneTicketMore })
  await check.run()
  await check.expectFailed(4, 'entries.csv', 'root-mismatch')
  await expectAccessible(page, 'the check that fails')

  const anotherCoin = tampered((members) => {
    const lines = text(members['transcript.jsonl']).split('\n')
    lines[6] = (lines[6] ?? '').replace(
      /"([01]+)"/,
      (_whole, flips: string) => `"${flips === '1' ? '0' : `${flips}1`}"`,
    )
    members['transcript.jsonl'] = utf8(lines.join('\n'))
  })
  await check.give({ name: 'another-coin.zip', bytes: anotherCoin })
  await check.run()
  await check.expectFailed(9, /^transcript\.jsonl line 7 coins\[\d+\]$/, 'coin-wrong')
  await expect(check.step(10)).toContainText('Not reached')

  const flippedByte = Buffer.from(archive)
  const middle = Math.floor(flippedByte.length / 2)
  flippedByte[middle] = (flippedByte[middle] ?? 0) ^ 1
  await check.give({ name: 'damaged.zip', bytes: flippedByte })
  await check.run()
  await expect(page.getByRole('heading', { name: 'Step 1 fails: the archive and its members' })).toBeVisible()

  // The page is as good as before.
  await page.getByRole('button', { name: 'Take the download instead' }).click()
  await check.run()
  await check.expectHeld()
})

test('the saved page checks the archive and receipts with the network off', async ({ browser, request }) => {
  const folder = await mkdtemp(join(tmpdir(), 'evenpenny-saved-'))
  const context = await browser.newContext()
  try {
    const served = await request.get('/check.html')
    expect(served.status()).toBe(200)
    expect(served.headers()['content-security-policy']).toContain("default-src 'none'")
    const file = join(folder, 'check.html')
    await writeFile(file, await served.body())
    const page = await context.newPage()
    const faults: string[] = []
    page.on('pageerror', (error) => faults.push(String(error)))
    page.on('console', (message) => {
      if (message.type() === 'error') faults.push(message.text())
    })
    await context.setOffline(true)
    await page.goto(pathToFileURL(file).href)
    const check = new CheckPage(page)
    await check.start.click()
    await expect(page.getByText('Choose the archive first.')).toBeVisible()

    await check.allowDemonstration()
    const { receipt, leaf, tickets } = receiptOf(unzipSync(archive), 17)
    await check.give({ name: 'proof.zip', bytes: archive }, { name: 'mine.json', bytes: utf8(receipt) })
    await check.run()
    await check.expectHeld()
    await expect(check.verdict).toContainText('hashed in WebAssembly')
    await expect(check.verdict).toContainText('Signed by an unknown key.')
    const receipts = page.locator('.check-receipts > li')
    await expect(receipts).toHaveText([
      `The short proof mine.json holds: leaf ${leaf} with ${tickets} ${tickets === 1 ? 'ticket' : 'tickets'} is in the sealed list.`,
    ])
    await expectAccessible(page, 'the saved page')

    // Receipts that are none, each refused by its name while the archive still holds.
    const changed = receipt.replace(`"tickets":${tickets}}`, `"tickets":${tickets + 1}}`)
    expect(changed).not.toBe(receipt)
    await check.give(
      { name: 'more-tickets.json', bytes: utf8(changed) },
      { name: 'other-seal.json', bytes: utf8(receipt.replace(/"seal":"[0-9a-f]{64}"/, `"seal":"${'5'.repeat(64)}"`)) },
      { name: 'cut-short.json', bytes: utf8(receipt.slice(0, receipt.length / 2)) },
      { name: 'nested.json', bytes: utf8('['.repeat(500_000)) },
      { name: 'nested-object.json', bytes: utf8('{"a":'.repeat(150_000)) },
    )
    const refusal = (name: string) => receipts.filter({ hasText: `${name} does not hold` })
    await expect(refusal('more-tickets.json')).toContainText('total-mismatch')
    await expect(refusal('other-seal.json')).toContainText('seal-mismatch')
    await expect(refusal('cut-short.json')).toContainText('not-json')
    await expect(refusal('nested.json')).toContainText('too-deep')
    await expect(refusal('nested-object.json')).toContainText('too-deep')
    await expect(receipts).toHaveCount(6)
    const junk = [join(folder, 'junk.json'), join(folder, 'junk.bin')]
    for (const name of junk) await writeFile(name, randomBytes(50 * 2 ** 20))
    await page.locator('#check-files').setInputFiles(junk)
    const notTaken = page.locator('.notice').filter({ hasText: 'Not taken' })
    await expect(notTaken).toContainText('junk.json: It is 52.4 MB long, and no receipt is longer than 1 MB.')
    await expect(notTaken).toContainText('junk.bin: It is neither a proof archive')
    await check.expectHeld()
    expect(faults).toEqual([])
  } finally {
    await context.close()
    await rm(folder, { recursive: true, force: true })
  }
})

test('zips with tricks are refused by name, and the page goes on', async ({ page }) => {
  await page.goto(`/draws/${slug}/check`, { waitUntil: 'networkidle' })
  const check = new CheckPage(page)
  await check.allowDemonstration()
  const members = Object.entries(unzipSync(archive)).map(([name, bytes]) => ({ name, bytes }))
  const only = (name: string) => members.filter((member) => member.name === name)
  const tricks = [
    ['a path out of the folder', [...members, { name: '../seal.json', bytes: utf8('{}') }], 'member-name'],
    ['a path from the root', [...members, { name: '/etc/passwd', bytes: utf8('x') }], 'member-name'],
    ['one name twice', [...members, ...only('seal.json')], 'member-doubled'],
    ['one name in two cases', [...members, { name: 'SEAL.json', bytes: utf8('{}') }], 'member-doubled'],
    [
      'two gigabytes stated',
      [...members, { name: 'big.txt', bytes: utf8('x'), statedSize: 2 ** 31 }],
      'archive-too-large',
    ],
    ['a member without a sum', [...members, { name: 'more.txt', bytes: utf8('x') }], 'sum-missing'],
    ['bytes behind a member', bombed('terms.txt', { behind: utf8('hidden') }), 'member-compression'],
    ['a member that blows up', bombed('terms.txt', { bytes: new Uint8Array(2 ** 28), statedSize: 100 }), 'member-size'],
    ['nothing but junk', null, 'not-a-zip'],
  ] as const
  for (const [what, list, code] of tricks) {
    await test.step(what, async () => {
      const bytes = list === null ? Buffer.concat([Buffer.from('PK'), randomBytes(100_000)]) : rawZip(list)
      await check.give({ name: 'tricks.zip', bytes })
      await check.run()
      await expect(page.getByRole('heading', { name: /^Step 1 fails: / })).toBeVisible()
      await expect(check.verdict.locator('code').nth(1)).toHaveText(code)
    })
  }
  await page.getByRole('button', { name: 'Take the download instead' }).click()
  await check.run()
  await check.expectHeld()

  function bombed(name: string, change: { bytes?: Uint8Array; statedSize?: number; behind?: Uint8Array }) {
    return members.map((member) => (member.name === name ? { ...member, ...change } : member))
  }
})

test('a check can be stopped in the middle and begun again', async ({ page }) => {
  let slow = true
  await page.route('**/proof.zip', async (route) => {
    if (slow) await new Promise((resolve) => setTimeout(resolve, 20_000))
    await route.continue().catch(() => {})
  })
  await page.goto(`/draws/${slug}/check`, { waitUntil: 'networkidle' })
  const check = new CheckPage(page)
  await check.allowDemonstration()
  await check.start.click()
  await expect(page.getByRole('progressbar', { name: 'Fetching the archive' })).toBeVisible()
  await expectAccessible(page, 'the check under way')
  await check.stop.click()
  await expect(page.getByText('You stopped the check before its end.')).toBeVisible()
  await expect(check.stop).toHaveCount(0)
  slow = false
  await check.run()
  await check.expectHeld()
})

test('the log is compared with what this browser saw of it, and a rewound one is shown to be so', async ({ page }) => {
  await page.goto(`/draws/${slug}/check`, { waitUntil: 'networkidle' })
  const check = new CheckPage(page)
  await check.allowDemonstration()
  const log = page.locator('section.part').filter({ has: page.getByRole('heading', { name: 'The site’s log' }) })
  await check.run()
  await check.expectHeld()
  await expect(log).toContainText(/first checkpoint|only grew|stands as it was/)
  await expect(log.locator('.notice')).toHaveCount(0)
  const kept = () => page.evaluate(() => localStorage.getItem('evenpenny-log-head') ?? '')
  await expect.poll(kept).toMatch(/^[^\n]+\/log\n\d+\n/)

  await page.reload({ waitUntil: 'networkidle' })
  await check.allowDemonstration()
  await check.run()
  await expect(log).toContainText(/only grew|stands as it was/)

  // As if this browser had seen a longer log before.
  const longer = (await kept()).replace(/\n\d+\n/, '\n999999999\n')
  await page.evaluate((note) => localStorage.setItem('evenpenny-log-head', note), longer)
  await check.run()
  await expect(log.locator('.notice')).toContainText('was wound back: it showed 999999999 entries before')
  await check.expectHeld()
  expect(await kept(), 'what was seen stays remembered').toBe(longer)
})

test('files can be dropped, and every state of the check is in bounds and accessible', async ({ browser }) => {
  test.setTimeout(4 * 60_000)
  const damaged = Buffer.from(archive.subarray(0, archive.length - 5)).toString('base64')
  for (const [width, colorScheme] of [
    [360, 'dark'],
    [1440, 'light'],
    [360, 'light'],
    [1440, 'dark'],
  ] as const) {
    const context = await browser.newContext({ viewport: { width, height: 900 }, colorScheme })
    const page = await context.newPage()
    const where = `${width} px, ${colorScheme}`
    await page.goto(`${stack().site}/check.html`)
    const check = new CheckPage(page)
    await expectAccessible(page, `the page before a check, ${where}`)
    const dropped = await page.evaluateHandle((base64) => {
      const bytes = Uint8Array.from(atob(base64), (character) => character.charCodeAt(0))
      const transfer = new DataTransfer()
      transfer.items.add(new File([bytes], 'dropped.zip'))
      transfer.items.add(new File(['{"kind":"receipt"}'], 'dropped.json'))
      transfer.items.add(new File(['?'], 'a-file-whose-name-is-rather-long-and-has-nowhere-to-break.txt'))
      return transfer
    }, damaged)
    await page.locator('.file-drop').dispatchEvent('drop', { dataTransfer: dropped })
    await expect(page.getByText('To be checked: dropped.zip')).toBeVisible()
    await check.run()
    await check.expectFailed(1, 'the archive', 'not-a-zip')
    await expect(page.locator('.check-receipts')).toContainText('dropped.json was not examined')
    await expectAccessible(page, `a check that fails, ${where}`)

    await check.give({ name: 'proof.zip', bytes: archive })
    await check.allowDemonstration()
    await check.run()
    await check.expectHeld()
    for (const step of [1, 4, 9]) await check.step(step).locator('summary').click()
    await page.locator('.check-picks > li').first().getByRole('button').click()
    await expect(page.locator('.ladder')).toBeVisible()
    await expectAccessible(page, `a check that holds, ${where}`)
    await context.close()
  }
})

/** The short proof of a leaf, made from the public list by this test's own tree (PROTOCOL sections 2 and 10). */
function receiptOf(members: Record<string, Uint8Array>, leaf: number) {
  interface Node {
    readonly tickets: number
    readonly hash: Buffer
  }
  const u64 = (value: number) => {
    const bytes = Buffer.alloc(8)
    bytes.writeBigUInt64BE(BigInt(value))
    return bytes
  }
  const hash = (...parts: Buffer[]) => createHash('sha256').update(Buffer.concat(parts)).digest()
  const rows = text(members['entries.csv']).trim().split('\n').slice(1)
  const entries = rows.map((row) => {
    const [tickets = '', commit = ''] = row.split(',')
    return { tickets: Number(tickets), commit }
  })
  let level: Node[] = entries.map(({ tickets, commit }) => ({
    tickets,
    hash: hash(Buffer.of(0), u64(tickets), Buffer.from(commit, 'hex')),
  }))
  const path: { hash: string; side: 'L' | 'R'; tickets: number }[] = []
  for (let at = leaf; level.length > 1; at = Math.floor(at / 2)) {
    const sibling = level[at ^ 1]
    if (sibling) {
      path.push({ hash: sibling.hash.toString('hex'), side: at % 2 === 1 ? 'L' : 'R', tickets: sibling.tickets })
    }
    const above: Node[] = []
    for (let i = 0; i < level.length; i += 2) {
      const [left, right] = [level[i], level[i + 1]]
      if (!left) continue
      if (!right) above.push(left)
      else {
        above.push({
          tickets: left.tickets + right.tickets,
          hash: hash(Buffer.of(1), u64(left.tickets), left.hash, u64(right.tickets), right.hash),
        })
      }
    }
    level = above
  }
  const entry = entries[leaf]
  if (!entry) throw new Error(`The list has no leaf ${leaf}.`)
  // Members in the order of RFC 8785.
  const receipt = JSON.stringify({
    entryCommit: entry.commit,
    format: 'evenpenny/1',
    kind: 'inclusion',
    leaf,
    path,
    seal: sha256(members['seal.json'] ?? new Uint8Array()),
    tickets: entry.tickets,
  })
  return { receipt, leaf, tickets: entry.tickets }
}
