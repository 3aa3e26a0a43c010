import { and, eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { settableClock } from '#server/adapters/clock/clock.ts'
import { CommandError } from '#server/commands/command-error.ts'
import { cancelDraw } from '#server/commands/draws/cancel-draw.ts'
import { closeDraw, closeDueDraw } from '#server/commands/draws/close-draw.ts'
import { createDraw } from '#server/commands/draws/create-draw.ts'
import { openDraw } from '#server/commands/draws/open-draw.ts'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import { putPrizes } from '#server/commands/draws/put-prizes.ts'
import { blindingKeyContext, seedContext } from '#server/commands/draws/put-seal.ts'
import { reopenDraw } from '#server/commands/draws/reopen-draw.ts'
import { sealDraw } from '#server/commands/draws/seal-draw.ts'
import { updateDraw } from '#server/commands/draws/update-draw.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { jobHandlers } from '#server/jobs/handlers.ts'
import { readSealedLeaves } from '#server/store/queries/sealed-leaves.ts'
import { sealInForce, sealOf, sealsOf } from '#server/store/queries/seals.ts'
import { draw, prize } from '#server/store/schema/draw.ts'
import { slugFrom } from '#server/commands/draws/draw-values.ts'
import { type DrawFacts, problemsOfSealing } from '#server/store/draw-problems.ts'
import { auditDetail, auditEvent, logEvent, logNote } from '#server/store/schema/record.ts'
import { sealedLeafPerson, sealSecret } from '#server/store/schema/seal.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { buildSumTree } from '#shared/merkle/sum-tree.ts'
import { commitEntrant, deriveSalts } from '#shared/protocol/commitments.ts'
import { noteDigest, parseLogLeaf } from '#shared/protocol/log-leaf.ts'
import { parseSeal, seedCommitment } from '#shared/protocol/seal.ts'
import { verifySignature } from '#shared/protocol/signature.ts'
import {
  drawValues,
  makeClosed,
  makeDraft,
  makeOpen,
  makeOffice,
  makeSealed,
  type Office,
  versionOf,
} from '#tests/support/draws.ts'
import { startTestSite, type TestSite } from '#tests/support/site.ts'

const clock = settableClock(new Date('2026-05-01T09:00:00Z'))
let site: TestSite
let office: Office
beforeAll(async () => {
  site = await startTestSite({ clock })
  office = await makeOffice(site.services, { demo: true })
})
afterAll(() => site.close())

/** What a command says when it refuses. */
async function refusal(action: Promise<unknown>): Promise<CommandError> {
  try {
    await action
  } catch (error) {
    if (error instanceof CommandError) return error
    throw error
  }
  throw new Error('The command let this pass.')
}
const rowOf = async (id: string) => (await site.services.db.select().from(draw).where(eq(draw.id, id)))[0]
const local = (date: Date) => localFromInstant(date, 'Europe/London')
const inHours = (hours: number) => new Date(clock.now().getTime() + hours * 3600_000)
const jobs = async (drawId: string, name: string) =>
  (
    await site.services.pool.query<{ state: string; start_after: Date; about: string | null }>(
      `select state, start_after, data ->> 'about' as about from pgboss.job where name = $1 and data ->> 'draw' = $2 order by created_on`,
      [name, drawId],
    )
  ).rows

describe('a draft', () => {
  it('gets an address from its title, and another one where that is taken', async () => {
    const make = () =>
      createDraw(site.services, office.promoter, {
        organisation: office.organisation,
        draw: drawValues(site.services, { title: 'Fête d’été, 2026' }),
      })
    const [first, second] = [await make(), await make()]
    expect([first.slug, second.slug]).toEqual(['fete-d-ete-2026', 'fete-d-ete-2026-2'])
    const chosen = createDraw(site.services, office.promoter, {
      organisation: office.organisation,
      draw: drawValues(site.services, { slug: first.slug }),
    })
    expect((await refusal(chosen)).fields).toEqual([
      { field: 'slug', message: 'Another draw has this address. Choose another one.' },
    ])
  })
  it.each([
    // The last Sundays of March and October 2026: Europe/London changes at 01:00 UTC.
    ['2026-03-29T01:30', 'is skipped'],
    ['2026-10-25T01:30', 'comes twice'],
  ])('refuses the local time %s, which %s', async (drawAt, words) => {
    const made = createDraw(site.services, office.promoter, {
      organisation: office.organisation,
      draw: { ...drawValues(site.services), closesAt: '2026-03-28T12:00', drawAt },
    })
    const { code, fields } = await refusal(made)
    expect(code).toBe('invalid')
    expect(fields).toMatchObject([{ field: 'drawAt', message: expect.stringContaining(words) }])
  })
  it('is changed only from the version that the form was filled from', async () => {
    const id = await makeDraft(site.services, office)
    const version = await versionOf(site.services, id)
    const values = drawValues(site.services, { title: 'Summer hamper draw' })
    await updateDraw(site.services, office.promoter, { draw: id, version, values })
    expect((await refusal(updateDraw(site.services, office.promoter, { draw: id, version, values }))).code).toBe(
      'changed',
    )
    expect(await rowOf(id)).toMatchObject({ title: 'Summer hamper draw', version: version + 1 })
    const [event] = await site.services.db
      .select()
      .from(auditEvent)
      .innerJoin(auditDetail, eq(auditDetail.eventId, auditEvent.id))
      .where(and(eq(auditEvent.drawId, id), eq(auditEvent.action, 'draw.update')))
    expect(event?.audit_detail).toMatchObject({
      actorName: 'Odile Brandt',
      before: { title: 'Winter hamper draw' },
      after: { title: 'Summer hamper draw' },
    })
  })
  it.each([
    ['Großes Ütliberg-Fest, 2. Ziehung', 'gro-es-utliberg-fest-2-ziehung'],
    [
      'The Upper Valley and Lower Moor Grand Midwinter Prize Draw for the Hall Roof',
      'the-upper-valley-and-lower-moor-grand-midwinter-prize-draw',
    ],
    ['x'.repeat(80), 'x'.repeat(60)],
    ['…', 'draw'],
  ])('has an address made of its title %s, in whole words', (title, slug) => {
    expect(slugFrom(title)).toBe(slug)
  })
  it('keeps the codes of its prizes while they are moved about, and never gives one twice', async () => {
    const id = await makeDraft(site.services, office)
    const put = async (prizes: { id?: string; name: string }[]) =>
      putPrizes(site.services, office.promoter, {
        draw: id,
        version: await versionOf(site.services, id),
        prizes: prizes.map((given) => ({ quantity: 1, donor: null, description: null, value: null, ...given })),
      })
    const codes = async () =>
      (await site.services.db.select().from(prize).where(eq(prize.drawId, id)).orderBy(prize.position)).map(
        ({ code, name }) => `${code} ${name}`,
      )
    await put([{ id: 'p1', name: 'Hamper' }, { name: 'Cake' }, { name: 'Jam' }])
    await put([{ id: 'p3', name: 'Jam' }, { id: 'p1', name: 'Big hamper' }, { name: 'Tea' }])
    expect(await codes()).toEqual(['p3 Jam', 'p1 Big hamper', 'p4 Tea'])
    expect((await refusal(put([{ id: 'p2', name: 'Cake' }]))).code).toBe('changed')
    expect(
      (
        await refusal(
          put([
            { id: 'p1', name: 'A' },
            { id: 'p1', name: 'B' },
          ]),
        )
      ).fields,
    ).toMatchObject([{ field: 'prizes/1/id' }])
    expect(await codes()).toHaveLength(3)
  })
  it('opens only with a prize and a closing time ahead', async () => {
    const id = await makeDraft(site.services, office)
    await putPrizes(site.services, office.promoter, {
      draw: id,
      version: await versionOf(site.services, id),
      prizes: [],
    })
    const open = async () =>
      openDraw(site.services, office.promoter, { draw: id, version: await versionOf(site.services, id) })
    expect((await refusal(open())).message).toBe('There are no prizes. Add at least one.')
    const { drawId } = { drawId: await makeDraft(site.services, office, { drawAtDate: inHours(0.4) }) }
    const late = openDraw(site.services, office.promoter, {
      draw: drawId,
      version: await versionOf(site.services, drawId),
    })
    expect((await refusal(late)).message).toBe('The closing time has passed. Choose a later one.')
  })
})

describe('an open draw', () => {
  it('is logged, and closed by its job when the time has come, not before', async () => {
    const id = await makeDraft(site.services, office)
    await openDraw(site.services, office.promoter, { draw: id, version: await versionOf(site.services, id) })
    const closesAt = (await rowOf(id))?.closesAt
    expect((await jobs(id, 'close')).map(({ start_after }) => start_after)).toEqual([closesAt])
    expect(await closeDueDraw(site.services, { draw: id })).toEqual({ kind: 'later', at: closesAt })
    clock.advance(30 * 60_000)
    expect(await closeDueDraw(site.services, { draw: id })).toEqual({ kind: 'closed' })
    expect(await closeDueDraw(site.services, { draw: id })).toEqual({ kind: 'nothing' })
    const events = await site.services.db.select().from(logEvent).where(eq(logEvent.drawId, id)).orderBy(logEvent.index)
    expect(events.map((row) => unwrap(parseLogLeaf(row.leaf)))).toMatchObject([
      { event: 'opened', draw: (await rowOf(id))?.slug, organisation: office.organisation, note: null },
      { event: 'closed', digest: null },
    ])
  })
  it('reopens with a public reason, whose digest is in the log', async () => {
    const id = await makeClosed(site.services, office)
    const closesAt = local(inHours(0.9))
    const version = await versionOf(site.services, id)
    const reason = 'Eleven counterfoils were found\nin a drawer.'
    await reopenDraw(site.services, office.promoter, { draw: id, version, reason, closesAt })
    expect(await rowOf(id)).toMatchObject({ state: 'open', closedAt: null })
    const [noted] = await site.services.db
      .select()
      .from(logEvent)
      .innerJoin(logNote, eq(logNote.logIndex, logEvent.index))
      .where(eq(logEvent.drawId, id))
    const words = 'Eleven counterfoils were found in a drawer.'
    expect(noted?.log_note.text).toBe(words)
    expect(noted?.log_event.note).toBe(
      toHex(noteDigest(site.services.sha256, hexBytes(noted?.log_note.salt ?? ''), words)),
    )
  })
})

describe('sealing', () => {
  const seal = async (id: string, changes: Partial<{ entrants: number; tickets: number; version: number }> = {}) => {
    const row = await rowOf(id)
    if (!row) throw new Error('no draw')
    return sealDraw(site.services, office.promoter, {
      draw: id,
      version: row.version,
      entrants: row.entrantCount,
      tickets: row.ticketCount,
      ...changes,
    })
  }
  it('makes a seal that its own key, tree and commitments bear out', async () => {
    const { services } = site
    const id = await makeSealed(services, office)
    const row = sealInForce(await sealsOf(services.db, id))
    if (!row) throw new Error('no seal')
    const parsed = unwrap(parseSeal(row.bytes, { allowDevelopmentChain: true }))
    expect(verifySignature(services.signing.current.publicKey, row.bytes, row.signature)).toBe(true)
    expect(parsed).toMatchObject({
      draw: (await rowOf(id))?.slug,
      organisation: { name: 'Quarry Lane Choir', registration: 'CH 4471' },
      key: services.signing.current.fingerprint,
      entries: { count: 4, tickets: 11 },
      prizes: [{ id: 'p1', name: 'Hamper', quantity: 2 }],
      revealBy: null,
      supersedes: null,
      reason: null,
    })
    const leaves = await readSealedLeaves(services.db, row)
    const tree = buildSumTree(services.sha256, leaves.tickets, leaves.entryCommits)
    expect([toHex(tree.root), tree.total]).toEqual([parsed.entries.root, 11])
    const [secret] = await services.db.select().from(sealSecret).where(eq(sealSecret.sealId, row.id))
    if (!secret?.seed || !secret.blindingKey) throw new Error('no secrets')
    const seed = services.secrets.open(secret.seed, seedContext(row.digest))
    expect(toHex(seedCommitment(services.sha256, seed))).toBe(parsed.sources.seedCommit)
    expect(() => services.secrets.open(secret.seed as Uint8Array, blindingKeyContext(row.digest))).toThrow(
      /does not open/,
    )
    const blindingKey = services.secrets.open(secret.blindingKey, blindingKeyContext(row.digest))
    const people = await services.db
      .select()
      .from(sealedLeafPerson)
      .where(eq(sealedLeafPerson.sealId, row.id))
      .orderBy(sealedLeafPerson.leaf)
    expect(people.map(({ reference }) => reference)).toEqual([...people.map(({ reference }) => reference)].sort())
    for (const { leaf, label, name, contact, numbers, reference } of people) {
      const salts = deriveSalts(services.sha256, blindingKey, reference)
      const { entryCommit } = commitEntrant(services.sha256, salts, label, { contact, name, numbers, reference })
      expect(toHex(leaves.entryCommits.subarray(leaf * 32, leaf * 32 + 32))).toBe(toHex(entryCommit))
    }
    expect(people.find(({ name }) => name === 'Ada Quill')).toMatchObject({
      label: 'Ada Q.',
      contact: 'ada@people.example',
      numbers: '1-5',
    })
    expect((await jobs(id, 'settle')).map(({ start_after }) => start_after)).toEqual([row.beaconRoundAt])
    expect((await jobs(id, 'prepare-mail')).filter(({ about }) => about === 'seal')).toHaveLength(1)
    const [logged] = await services.db
      .select()
      .from(logEvent)
      .where(and(eq(logEvent.drawId, id), eq(logEvent.event, 'sealed')))
    expect(unwrap(parseLogLeaf(logged?.leaf ?? new Uint8Array()))).toMatchObject({
      digest: row.digest,
      supersedes: null,
    })
  })
  it('is refused for an empty list', async () => {
    const id = await makeClosed(site.services, office, { entrants: [] })
    expect((await refusal(seal(id))).message).toBe('The list is empty. Add an entrant or import a file, then seal it.')
  })
  it('is refused without prizes, which nobody can take away once the draw is open', async () => {
    const facts: DrawFacts = {
      state: 'closed',
      organisationState: 'approved',
      closesAt: clock.now(),
      drawAt: inHours(1),
      entrants: 4,
      tickets: 11,
      prizes: [],
      reserves: 1,
    }
    expect(problemsOfSealing(facts, clock.now())).toEqual(['There are no prizes. Add at least one.'])
    expect(problemsOfSealing({ ...facts, prizes: [{ quantity: 2 }] }, clock.now())).toEqual([])
    for (const make of [makeOpen, makeClosed]) {
      const id = await make(site.services, office)
      const version = await versionOf(site.services, id)
      const taken = putPrizes(site.services, office.promoter, { draw: id, version, prizes: [] })
      expect((await refusal(taken)).message).toMatch(/^This draw is (open|closed): you cannot change its prizes now\.$/)
    }
  })
  it('is refused for a draw time that is past or too near for the beacon', async () => {
    const id = await makeClosed(site.services, office)
    const drawAt = (await rowOf(id))?.drawAt ?? new Date()
    const start = clock.now()
    clock.set(new Date(drawAt.getTime() - 125_000))
    expect((await refusal(seal(id))).message).toContain('too near')
    clock.set(drawAt)
    expect((await refusal(seal(id))).message).toContain('has passed')
    clock.set(start)
    expect(await seal(id)).toEqual({ kind: 'sealed' })
  })
  it('is refused where the list is not the one that was confirmed, and where it is open', async () => {
    const id = await makeClosed(site.services, office)
    expect(await refusal(seal(id, { tickets: 12 }))).toMatchObject({
      code: 'changed',
      message: expect.stringContaining('4 entrants and 11 tickets'),
    })
    const open = await makeDraft(site.services, office)
    await openDraw(site.services, office.promoter, { draw: open, version: await versionOf(site.services, open) })
    expect((await refusal(seal(open))).code).toBe('refused')
    expect(await sealsOf(site.services.db, id)).toEqual([])
  })
  it('of a long list is the worker’s, and a promoter sees why where it fails', async () => {
    const entrants = Array.from({ length: 2001 }, (_, index) => `Person ${index},1,,`)
    const id = await makeClosed(site.services, office, { entrants })
    expect(await seal(id)).toEqual({ kind: 'sealing' })
    expect((await rowOf(id))?.state).toBe('closed')
    expect((await refusal(seal(id))).message).toContain('is being sealed at this moment')
    const handlers = jobHandlers(site.services, goOn)
    const version = await versionOf(site.services, id)
    const data = { draw: id, actor: office.promoter.id, version, entrants: 2001, tickets: 2001 }
    expect(await handlers.seal({ ...data, tickets: 2000 })).toMatchObject({
      kind: 'given-up',
      reason: expect.stringContaining('not the one'),
    })
    expect(await handlers.seal(data)).toEqual({ kind: 'done' })
    expect(await rowOf(id)).toMatchObject({ state: 'sealed' })
    expect(sealInForce(await sealsOf(site.services.db, id))).toMatchObject({ entrants: 2001, tickets: 2001 })
    // Run again, as after a crash behind the commit: refused, nothing changes.
    expect((await handlers.seal(data)).kind).toBe('given-up')
  }, 60_000)
})

describe('postponing', () => {
  const postpone = async (id: string, drawAt: Date, closesAt?: Date) =>
    postponeDraw(site.services, office.promoter, {
      draw: id,
      version: await versionOf(site.services, id),
      reason: 'The hall was flooded.',
      drawAt: local(drawAt),
      ...(closesAt ? { closesAt: local(closesAt) } : {}),
    })
  it('before the seal moves the dates', async () => {
    const id = await makeDraft(site.services, office)
    await openDraw(site.services, office.promoter, { draw: id, version: await versionOf(site.services, id) })
    await postpone(id, inHours(48), inHours(47))
    expect(await rowOf(id)).toMatchObject({ state: 'open', drawAt: inHours(48), closesAt: inHours(47) })
    expect(await jobs(id, 'close')).toHaveLength(2)
    expect((await refusal(postpone(id, inHours(2)))).fields).toMatchObject([{ field: 'drawAt' }])
  })
  it('after the seal makes a new one with new secrets, and destroys the old seed unopened', async () => {
    const { services } = site
    const id = await makeSealed(services, office)
    const before = sealInForce(await sealsOf(services.db, id))
    await postpone(id, inHours(72))
    const seals = await sealsOf(services.db, id)
    const now = sealInForce(seals)
    if (!before || !now) throw new Error('no seal')
    expect(seals).toHaveLength(2)
    expect(now).toMatchObject({ supersedes: before.digest, reason: 'The hall was flooded.', drawAt: inHours(72) })
    expect(now.seedCommit).not.toBe(before.seedCommit)
    const secrets = await services.db.select().from(sealSecret).where(eq(sealSecret.sealId, before.id))
    expect(secrets).toMatchObject([{ seed: null, seedErasedAt: clock.now() }])
    const references = async (sealId: number) =>
      (await services.db.select().from(sealedLeafPerson).where(eq(sealedLeafPerson.sealId, sealId))).map(
        ({ reference }) => reference,
      )
    const old = new Set(await references(before.id))
    expect((await references(now.id)).filter((reference) => old.has(reference))).toEqual([])
    expect((await rowOf(id))?.drawAt).toEqual(inHours(72))
    expect(sealOf(now).sources.beacon?.round).toBeGreaterThan(sealOf(before).sources.beacon?.round ?? 0)
  })
  it('and cancelling are refused from the round on', async () => {
    const id = await makeSealed(site.services, office)
    const roundAt = sealInForce(await sealsOf(site.services.db, id))?.beaconRoundAt ?? new Date()
    clock.set(roundAt)
    expect((await refusal(postpone(id, inHours(48)))).message).toContain('nobody can stop, postpone or replace')
    const version = await versionOf(site.services, id)
    const input = { draw: id, version, reason: 'We changed our minds.', title: 'Winter hamper draw' }
    expect((await refusal(cancelDraw(site.services, office.promoter, input))).message).toContain('nobody can stop')
    clock.set(new Date(roundAt.getTime() - 1000))
    await cancelDraw(site.services, office.promoter, input)
    expect((await rowOf(id))?.state).toBe('cancelled')
  })
})

describe('cancelling', () => {
  it('wants the title as it stands, destroys the seed and tells the public why', async () => {
    const id = await makeSealed(site.services, office)
    const version = await versionOf(site.services, id)
    const reason = 'The prizes were stolen.'
    const wrong = cancelDraw(site.services, office.promoter, { draw: id, version, reason, title: 'Hamper' })
    expect((await refusal(wrong)).fields).toMatchObject([{ field: 'title' }])
    await cancelDraw(site.services, office.promoter, { draw: id, version, reason, title: 'Winter hamper draw' })
    const seal = sealInForce(await sealsOf(site.services.db, id))
    const [secret] = await site.services.db
      .select()
      .from(sealSecret)
      .where(eq(sealSecret.sealId, seal?.id ?? 0))
    expect(secret?.seed).toBeNull()
    expect((await jobs(id, 'prepare-mail')).filter(({ about }) => about === 'notice')).toHaveLength(1)
    const again = cancelDraw(site.services, office.promoter, {
      draw: id,
      version: version + 1,
      reason,
      title: 'Winter hamper draw',
    })
    expect((await refusal(again)).message).toBe('This draw is cancelled: you cannot cancel it now.')
  })
  it('of a draft leaves no trace in the public log', async () => {
    const id = await makeDraft(site.services, office)
    const input = {
      draw: id,
      version: await versionOf(site.services, id),
      reason: 'A mistake.',
      title: 'Winter hamper draw',
    }
    await cancelDraw(site.services, office.promoter, input)
    expect(await site.services.db.select().from(logEvent).where(eq(logEvent.drawId, id))).toEqual([])
  })
})

describe('two commands at once', () => {
  it('never cross: one wins, the other is told', async () => {
    const id = await makeDraft(site.services, office)
    await openDraw(site.services, office.promoter, { draw: id, version: await versionOf(site.services, id) })
    const version = await versionOf(site.services, id)
    const outcomes = await Promise.allSettled([
      closeDraw(site.services, office.promoter, { draw: id, version }),
      closeDraw(site.services, office.promoter, { draw: id, version }),
      closeDueDraw(site.services, { draw: id }),
    ])
    expect(outcomes.filter(({ status }) => status === 'rejected')).toHaveLength(1)
    const closed = await site.services.db
      .select()
      .from(logEvent)
      .where(and(eq(logEvent.drawId, id), eq(logEvent.event, 'closed')))
    expect(closed).toHaveLength(1)
  })
})
