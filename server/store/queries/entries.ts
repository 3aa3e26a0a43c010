import { desc, eq } from 'drizzle-orm'
import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { announcedAs } from '#shared/entrants/announcement.ts'
import { receiptBytes } from '#shared/protocol/receipt.ts'
import type { CorrectionView, EntryView } from '#shared/schemas/api/entry.ts'
import { correctionRefusal } from '#server/commands/entries/ask-correction.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { draw } from '#server/store/schema/draw.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'
import { correctionRequest } from '#server/store/schema/entry.ts'
import { organisation } from '#server/store/schema/people.ts'
import { instantOf, instantOrNull } from '#server/time/instants.ts'
import type { EntryAccess } from './entry-access.ts'
import { entryResult } from './entry-picks.ts'
import { receiptOf, sealedEntryOf } from './entry-receipt.ts'
import { sealInForce, type SealRow, sealsOf } from './seals.ts'

type Reading = Pick<Services, 'db' | 'clock' | 'sha256' | 'secrets'>

/** An entrant's own entry, as it stands; null once their details were erased. */
export async function getEntry(services: Reading, access: EntryAccess): Promise<EntryView | null> {
  const { db, clock } = services
  const [row] = await db
    .select({ draw, organisation, entrant, person: entrantPerson })
    .from(entrantPerson)
    .innerJoin(entrant, eq(entrant.id, entrantPerson.entrantId))
    .innerJoin(draw, eq(draw.id, entrant.drawId))
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .where(eq(entrantPerson.entrantId, access.entrantId))
  if (!row) return null
  const { draw: its, organisation: owner, entrant: listed, person } = row
  const now = clock.now()
  const [seals, items, result] = await Promise.all([
    sealsOf(db, its.id),
    correctionsOf(db, access.entrantId),
    entryResult(db, access),
  ])
  const seal = sealInForce(seals)
  const sealed = seal ? await sealedEntryOf(db, seal.id, access.entrantId) : null
  const shown = sealed ? { ...sealed.person, tickets: sealed.tickets } : { ...person, tickets: listed.tickets }
  const chosen = { name: person.name, label: person.givenLabel ?? person.label, code: listed.code }
  return {
    draw: {
      slug: its.slug,
      title: its.title,
      goodCause: its.goodCause,
      organisation: { slug: owner.slug, name: owner.name, suspended: owner.state === 'suspended' },
      promoter: { name: its.promoterName, address: its.promoterAddress },
      licence: its.licence,
      state: its.state,
      demo: its.demo,
      timeZone: its.timeZone,
      now: instantOf(now),
      closesAt: instantOf(its.closesAt),
      drawAt: instantOf(its.drawAt),
      drawnAt: instantOrNull(its.drawnAt),
      rule: its.rule,
      terms: seal?.terms ?? its.terms,
      entrants: seal?.entrants ?? its.entrantCount,
      tickets: seal?.tickets ?? its.ticketCount,
    },
    name: shown.name,
    label: shown.label,
    code: listed.code,
    tickets: shown.tickets,
    numbers: shown.numbers === '' ? null : shown.numbers,
    contact: contactOf(sealed?.person.contact ?? null, person),
    announcement: {
      choice: person.announced,
      words: {
        label: chosen.label,
        initials: announcedAs('initials', chosen),
        code: announcedAs('code', chosen),
      },
      open: its.state === 'open',
    },
    corrections: { items, refusal: correctionRefusal(its, now) },
    sealed: seal && sealed ? await sealedPart(services, seals, seal, sealed) : null,
    result,
  }
}

async function sealedPart(
  services: Reading,
  seals: readonly SealRow[],
  seal: SealRow,
  sealed: NonNullable<Awaited<ReturnType<typeof sealedEntryOf>>>,
): Promise<EntryView['sealed']> {
  const receipt = await receiptOf(services, seal, sealed)
  return {
    digest: seal.digest,
    sealedAt: instantOf(seal.sealedAt),
    leaf: sealed.person.leaf,
    keyFingerprint: seal.keyFingerprint,
    receipt: receipt ? decodeUtf8(receiptBytes(receipt)) : null,
    replaced: seals
      .filter((earlier) => earlier !== seal)
      .map(({ digest, sealedAt }) => ({
        digest,
        sealedAt: instantOf(sealedAt),
        reason: seals.find(({ supersedes }) => supersedes === digest)?.reason ?? null,
      })),
  }
}

function contactOf(sealed: string | null, person: { readonly email: string | null; readonly phone: string | null }) {
  const contact = sealed ?? [person.email, person.phone].filter((part) => part !== null).join(', ')
  return contact === '' ? null : contact
}

async function correctionsOf(db: Database, entrantId: number): Promise<CorrectionView[]> {
  const rows = await db
    .select()
    .from(correctionRequest)
    .where(eq(correctionRequest.entrantId, entrantId))
    .orderBy(desc(correctionRequest.id))
    .limit(50)
  return rows.map(presentCorrection)
}

export const presentCorrection = (row: typeof correctionRequest.$inferSelect): CorrectionView => ({
  id: String(row.id),
  words: row.words,
  askedAt: instantOf(row.askedAt),
  afterSeal: row.afterSeal,
  state: row.state,
  answer: row.answer,
  answeredAt: instantOrNull(row.answeredAt),
})
