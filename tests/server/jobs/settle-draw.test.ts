import { eq } from 'drizzle-orm'
import { simpleParser } from 'mailparser'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { prepareMail } from '#server/jobs/mail/prepare-mail.ts'
import { sendMail } from '#server/jobs/mail/send-mail.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { storeArchive } from '#server/jobs/store-archive.ts'
import { getDraw, getPick } from '#server/store/queries/draw-page.ts'
import { draw } from '#server/store/schema/draw.ts'
import { mail } from '#server/store/schema/operation.ts'
import { messageIdFor } from '#server/adapters/mail/mailer.ts'
import { makeOffice, makeSealed, type Office } from '#tests/support/draws.ts'
import { checkPublicArchive, receiptsOf } from '#tests/support/public-archive.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-03-02T10:00:00Z'))
let site: TestSite
let office: Office
beforeAll(async () => {
  site = await startTestSite({ clock })
  office = await makeOffice(site.services, { demo: true })
})
afterAll(() => site.close())

async function sealed(drawAt: string): Promise<{ id: string; slug: string }> {
  clock.set(new Date(Date.parse(drawAt) - 3600_000))
  const id = await makeSealed(site.services, office, { drawAtDate: new Date(drawAt) })
  const [row] = await site.services.db.select().from(draw).where(eq(draw.id, id))
  if (!row) throw new Error('no draw')
  return { id, slug: row.slug }
}

describe('settleDraw', () => {
  it('waits for its round, and says why on the public page', async () => {
    const { id, slug } = await sealed('2026-03-02T12:00:00Z')
    expect(await settleDraw(site.services, goOn, { draw: id })).toEqual({
      kind: 'too-early',
      at: new Date('2026-03-02T12:00:00Z'),
    })
    clock.set(new Date('2026-03-02T12:00:01Z'))
    site.beacon.behave({ mode: 'late', seconds: 30 })
    expect(await settleDraw(site.services, goOn, { draw: id })).toMatchObject({ kind: 'no-round' })
    expect((await getDraw(site.services, slug))?.waiting).toEqual({
      kind: 'beacon-not-yet',
      since: '2026-03-02T12:00:01Z',
    })
    clock.advance(5000)
    site.beacon.behave({ mode: 'down' })
    await settleDraw(site.services, goOn, { draw: id })
    expect((await getDraw(site.services, slug))?.waiting).toEqual({
      kind: 'beacon-unreachable',
      since: '2026-03-02T12:00:06Z',
    })
    // A relay that signs the round before with the chain's own key gives nothing that counts.
    site.beacon.behave({ mode: 'lie' })
    expect(await settleDraw(site.services, goOn, { draw: id })).toMatchObject({ kind: 'no-round' })
    site.beacon.behave({ mode: 'right' })
    expect(await settleDraw(site.services, goOn, { draw: id })).toEqual({ kind: 'drawn' })
    const page = await getDraw(site.services, slug)
    expect(page).toMatchObject({ state: 'drawn', waiting: null, drawnAt: '2026-03-02T12:00:06Z' })
    expect(page?.result?.picks.map(({ award, labelState }) => [award.kind, labelState])).toEqual([
      ['prize', 'open'],
      ['prize', 'open'],
      ['reserve', 'not-called'],
    ])
    expect(page?.history.map(({ event }) => event)).toEqual(['opened', 'closed', 'sealed', 'drawn'])
  })

  it('draws once, however many run at the same time', async () => {
    const { id } = await sealed('2026-03-03T12:00:00Z')
    clock.set(new Date('2026-03-03T12:00:00Z'))
    const outcomes = await Promise.all(Array.from({ length: 5 }, () => settleDraw(site.services, goOn, { draw: id })))
    expect(outcomes.filter(({ kind }) => kind === 'drawn')).toHaveLength(1)
    expect(await settleDraw(site.services, goOn, { draw: id })).toEqual({ kind: 'over' })
  })

  it('gives an archive that the check of section 11 accepts, and mails that tell each what is theirs', async () => {
    const { id, slug } = await sealed('2026-03-04T12:00:00Z')
    await prepareMail(site.services, goOn, { draw: id, about: 'seal' })
    await sendMail(site.services, goOn)
    clock.set(new Date('2026-03-04T12:00:02Z'))
    await settleDraw(site.services, goOn, { draw: id })
    expect(await storeArchive(site.services, goOn, { draw: id })).toBe('stored')
    expect(await storeArchive(site.services, goOn, { draw: id })).toBe('there-already')
    for (let i = 0; i < 2; i += 1) {
      await prepareMail(site.services, goOn, { draw: id, about: 'result' })
      await sendMail(site.services, goOn)
    }
    const rows = await site.services.db.select().from(mail).where(eq(mail.drawId, id))
    expect(rows).toHaveLength(4)
    for (const row of rows) {
      expect(row.state).toBe('sent')
      expect(row.messageId).toBe(messageIdFor([row.key], 'localhost'))
    }
    expect((await getDraw(site.services, slug))?.result?.archive?.bytes).toBeGreaterThan(1000)
    const pick = await getPick(site.services, { slug, pick: 1 })
    expect(pick).toMatchObject({ previous: { pick: 0 }, next: { pick: 2 }, pickCount: 3 })
    const receipts = await receiptsOf(site)
    expect(receipts).toHaveLength(2)
    const report = await checkPublicArchive(site, id, receipts)
    expect(report).toMatchObject({
      ok: true,
      result: { drawnAt: '2026-03-04T12:00:02Z' },
      verdict: { log: { origin: `${new URL(site.services.site.origin).host}/log` } },
    })
    const page = await getDraw(site.services, slug)
    const winners = (page?.result?.picks ?? []).slice(0, 2).map(({ label }) => label)
    const kinds = new Map(rows.map(({ kind, entrantId }) => [`${kind} ${entrantId}`, kind]))
    expect([...kinds.values()].filter((kind) => kind === 'won').length).toBe(
      winners.filter((label) => label === 'Ada Q.' || label === 'Cleo F.').length,
    )
    const texts = await Promise.all(
      site.mail.store.list('ada@people.example').map((one) => simpleParser(site.mail.store.raw(one))),
    )
    expect(texts).toHaveLength(2)
    expect(texts.some(({ text }) => text?.includes(page?.seal?.digest ?? '?'))).toBe(true)
  })
})
