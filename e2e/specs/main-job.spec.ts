import { execFile } from 'node:child_process'
import { createHash } from 'node:crypto'
import { mkdtemp, readFile, rm, writeFile } from 'node:fs/promises'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { unzipSync, zipSync } from 'fflate'
import { OfficePage } from '../pages/office-page.ts'
import { attachmentOf, mailsTo } from '../support/mails.ts'
import { signInOf, stack } from '../support/stack.ts'
import { expect, test } from '../support/test.ts'
import { minuteAfter, wallTime } from '../support/times.ts'

const TITLE = 'Harvest Supper Draw'
/** Tickets held, by the name that is on the sheet. The test computes every count from this. */
const ENTRANTS = Array.from({ length: 12 }, (_, index) => ({
  name: `Wenna Tregarth ${String.fromCharCode(65 + index)}`,
  tickets: 1 + ((index * 5) % 9),
  email: `wenna.${String.fromCharCode(97 + index)}@harvest-entrants.example`,
  label: `Wenna ${String.fromCharCode(65 + index)}., Nanvean`,
}))
const TOTAL = ENTRANTS.reduce((sum, entrant) => sum + entrant.tickets, 0)
const PRIZES = [
  { name: 'A hamper of the harvest', quantity: '1' },
  { name: 'A jar of heather honey', quantity: '2' },
]

const sheet = (rows: readonly (readonly string[])[]) => `${rows.map((row) => row.join(',')).join('\r\n')}\r\n`
const HEADER = ['name', 'tickets', 'email', 'label']
const GOOD = sheet([HEADER, ...ENTRANTS.map((e) => [e.name, String(e.tickets), e.email, `"${e.label}"`])])
const FAULTY = sheet([
  HEADER,
  ['Jory Pascoe', '3', '', ''],
  ['Loveday Pascoe', '2.5', '', ''],
  ['Hedra Pascoe', '0', '', ''],
])

interface Run {
  readonly code: number
  readonly output: string
}

const node = (args: readonly string[], cwd: string) =>
  new Promise<Run>((resolve) => {
    execFile(process.execPath, [...args], { cwd, timeout: 60_000 }, (error, stdout, stderr) => {
      resolve({ code: error ? Number(error.code ?? 1) : 0, output: stdout + stderr })
    })
  })

test('a volunteer holds a draw, and a stranger checks it', async ({ page, browser }) => {
  test.setTimeout(9 * 60_000)
  const promoter = signInOf('promoter')
  const office = new OfficePage(page)
  await office.signIn(promoter.email, promoter.password)
  const organisation = /\/office\/([a-z0-9-]+)/.exec(new URL(page.url()).pathname)?.[1] ?? ''
  expect(organisation).not.toBe('')
  const listed = await page.request.get(`/api/office/organisations/${organisation}/draws`)
  const zone = ((await listed.json()) as { organisation: { timeZone: string } }).organisation.timeZone

  // The draw has to be sealed at least two minutes before it is drawn: leave what the steps before take.
  const drawAt = minuteAfter(185)
  await office.makeDraw(organisation, {
    title: TITLE,
    goodCause: 'A new roof for the reading room at Nanvean',
    promoterName: 'Keren Rosewarne',
    promoterAddress: 'The Reading Room, Nanvean',
    ticketPrice: '2.50',
    terms: 'Tickets at £2.50 from any committee member.\n\nWinners are told by mail and can claim for 28 days.',
    closesAt: wallTime(new Date(drawAt.getTime() - 60_000), zone),
    drawAt: wallTime(drawAt, zone),
    reserves: '2',
  })
  await office.setPrizes(PRIZES)
  await office.open()

  // A faulty sheet: every fault by its row, and nothing stored.
  await page.goto(`${office.drawAddress()}/import`)
  const choose = page.locator('input[type=file]')
  const upload = page.getByRole('button', { name: 'Upload it, and look through it' })
  // The button waits for the page's code.
  await expect(upload).toBeEnabled()
  await choose.setInputFiles({ name: 'faulty.csv', mimeType: 'text/csv', buffer: Buffer.from(FAULTY) })
  await upload.click()
  await expect(page.getByText(/Row 3/)).toBeVisible()
  await expect(page.getByText(/Row 4/)).toBeVisible()
  await expect(page.getByRole('button', { name: /into the list/ })).toHaveCount(0)
  await page.goto(`${office.drawAddress()}/entrants`)
  await expect(page.getByText('Jory Pascoe')).toHaveCount(0)

  // The right sheet.
  await page.goto(`${office.drawAddress()}/import`)
  await expect(upload).toBeEnabled()
  await choose.setInputFiles({ name: 'entrants.csv', mimeType: 'text/csv', buffer: Buffer.from(GOOD) })
  await upload.click()
  await page.getByRole('button', { name: /12 entrants into the list/ }).click()
  await expect(page.locator('.tally')).toContainText(String(TOTAL), { timeout: 30_000 })
  await office.goTo('Entrants')
  for (const entrant of [ENTRANTS[0], ENTRANTS[11]]) {
    await expect(page.getByRole('row', { name: new RegExp(entrant?.name ?? '') })).toContainText(
      String(entrant?.tickets),
    )
  }

  await office.close()
  await office.seal()
  const sealedBy = Date.now()
  expect(sealedBy, 'sealed at least two minutes before the draw').toBeLessThan(drawAt.getTime() - 120_000)

  // A stranger, with no session, sees the seal at once, and the result appears by itself.
  const stranger = await browser.newContext({ acceptDownloads: true })
  const publicPage = await stranger.newPage()
  const faults: string[] = []
  publicPage.on('console', (message) => {
    if (message.type() === 'error') faults.push(message.text())
  })
  publicPage.on('pageerror', (error) => faults.push(String(error)))
  await publicPage.goto(`${stack().site}/draws`)
  await publicPage.getByRole('link', { name: TITLE }).first().click()
  await expect(publicPage.getByRole('heading', { level: 1, name: TITLE })).toBeVisible()
  await expect(publicPage.getByText('Sealed').first()).toBeVisible()
  await expect(publicPage.getByText(new RegExp(`\\b${TOTAL}\\b`)).first()).toBeVisible()
  const slug = new URL(publicPage.url()).pathname.split('/')[2] ?? ''
  const seal = await publicPage.request.get(`${stack().site}/draws/${slug}/seal.json`)
  const sealText = await seal.text()
  const sealDigest = createHash('sha256').update(sealText).digest('hex')
  await expect(publicPage.locator('body')).toContainText(sealDigest.slice(0, 4))
  expect((await publicPage.request.get(`${stack().site}/draws/${slug}/result.json`)).status()).toBe(404)
  expect((JSON.parse(sealText) as { entries: unknown }).entries).toMatchObject({ count: 12, tickets: TOTAL })

  // Each entrant has their receipt, and the whole digest of the seal.
  const receiptMails = async () =>
    (await mailsTo(ENTRANTS[11]?.email ?? '')).filter(({ attachments }) => attachments.length > 0)
  await expect.poll(async () => (await receiptMails()).length, { timeout: 60_000 }).toBe(1)
  const [receiptMail] = await receiptMails()
  expect(receiptMail?.text.replace(/\s/g, '')).toContain(sealDigest)
  const receipt = receiptMail ? await attachmentOf(receiptMail, 0) : new Uint8Array()
  expect(JSON.parse(new TextDecoder().decode(receipt))).toMatchObject({
    kind: 'receipt',
    seal: sealDigest,
    tickets: ENTRANTS[11]?.tickets,
  })

  // Nobody presses anything.
  await expect(publicPage.getByRole('heading', { name: 'Who won' })).toBeVisible({ timeout: 6 * 60_000 })
  expect(Date.now()).toBeGreaterThanOrEqual(drawAt.getTime())
  const proof = await waitForProof(`${stack().site}/draws/${slug}/proof.zip`)
  expect(faults).toEqual([])

  // The page says what the archive says.
  const members = unzipSync(proof)
  const text = (name: string) => new TextDecoder().decode(members[name])
  const result = JSON.parse(text('result.json')) as { picks: { leaf: number; award: object }[]; seal: string }
  expect(result.seal).toBe(sealDigest)
  expect(result.picks).toHaveLength(5)
  const labels = new Map(
    text('labels.jsonl')
      .trimEnd()
      .split('\n')
      .map((line) => JSON.parse(line) as { leaf: number; label: string })
      .map((line) => [line.leaf, line.label]),
  )
  const winners = result.picks.filter(({ award }) => 'prize' in award).map(({ leaf }) => labels.get(leaf))
  expect(new Set(winners).size).toBe(3)
  for (const winner of winners)
    await expect(publicPage.getByText(winner ?? 'nobody', { exact: true }).first()).toBeVisible()
  for (const reserve of result.picks.slice(3)) expect(labels.has(reserve.leaf), 'a reserve is not named').toBe(false)

  // The pick page shows the very coins of the transcript.
  const transcript = text('transcript.jsonl').split('\n')
  const coins = (JSON.parse(transcript[0] ?? '') as { coins: [number, number, string, string][] }).coins
  await publicPage.goto(`${stack().site}/draws/${slug}/picks/0`)
  await expect(publicPage.getByText(winners[0] ?? 'nobody').first()).toBeVisible()
  await expect(publicPage.getByRole('heading', { name: /^Coin \d+$/ })).toHaveCount(coins.length)

  // The stranger checks every coin with the check that came along, and a receipt with it.
  const folder = await mkdtemp(join(tmpdir(), 'evenpenny-stranger-'))
  try {
    await writeFile(join(folder, 'proof.zip'), proof)
    await writeFile(join(folder, 'receipt.json'), receipt)
    for (const name of ['check.mjs', 'bls12-381.mjs']) await writeFile(join(folder, name), members[name] ?? '')
    const fingerprint = (JSON.parse(sealText) as { key: string }).key
    const check = ['check.mjs', '--test-beacon', '--key', fingerprint]
    const good = await node([...check, 'proof.zip', 'receipt.json'], folder)
    expect(good.output).toContain('arithmetic holds')
    expect(good.code).toBe(0)
    const refused = await node(['check.mjs', 'proof.zip'], folder)
    expect(refused.code, 'the development chain passes only under a flag').toBe(1)
    const changed = { ...members, 'entries.csv': tampered(members['entries.csv'] ?? new Uint8Array()) }
    await writeFile(join(folder, 'changed.zip'), zipSync(changed, { level: 0 }))
    const bad = await node([...check, 'changed.zip'], folder)
    expect(bad.code).toBe(1)
    expect(bad.output).toMatch(/FAILED at step 1/)
    expect(await readFile(join(folder, 'proof.zip'))).toEqual(Buffer.from(proof))
  } finally {
    await rm(folder, { recursive: true, force: true })
  }

  // Winners and the others are told once: after the mail of their entry, and the one with their receipt.
  const winner = ENTRANTS.find(({ label }) => label === winners[0])
  await expect.poll(async () => (await mailsTo(winner?.email ?? '')).length, { timeout: 60_000 }).toBe(3)
  expect((await mailsTo(winner?.email ?? ''))[0]?.text).toContain('A hamper of the harvest')
  const other = ENTRANTS.find(({ label }) => !winners.includes(label))
  await expect.poll(async () => (await mailsTo(other?.email ?? '')).length, { timeout: 60_000 }).toBe(3)
  expect((await mailsTo(other?.email ?? ''))[0]?.text).not.toContain('You have won')
  await stranger.close()
})

async function waitForProof(address: string): Promise<Uint8Array> {
  await expect.poll(async () => (await fetch(address, { method: 'HEAD' })).status, { timeout: 60_000 }).toBe(200)
  return new Uint8Array(await (await fetch(address)).arrayBuffer())
}

/** One ticket more for the first entrant. */
function tampered(csv: Uint8Array): Uint8Array {
  const lines = new TextDecoder().decode(csv).split('\n')
  const [tickets, commit] = (lines[1] ?? '').split(',')
  lines[1] = `${Number(tickets) + 1},${commit}`
  return new TextEncoder().encode(lines.join('\n'))
}
