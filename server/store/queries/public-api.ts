import { and, asc, between, eq, isNotNull } from 'drizzle-orm'
import type { z } from 'zod'
import { parseTranscriptLine } from '#shared/protocol/transcript.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import type { DrawCard, DrawPage } from '#shared/schemas/api/public.ts'
import type { drawDetailV1, drawV1, resultV1, sealV1, transcriptV1 } from '#shared/schemas/api/v1.ts'
import type { DrawState } from '#shared/schemas/values.ts'
import type { Services } from '#server/services.ts'
import type { Database } from '#server/store/database.ts'
import { offsetOf, type Page } from '#server/store/page.ts'
import { draw } from '#server/store/schema/draw.ts'
import { result, transcriptLine } from '#server/store/schema/result.ts'
import { seal } from '#server/store/schema/seal.ts'
import { instantOf } from '#server/time/instants.ts'
import { searchDraws } from './draw-cards.ts'
import { getDraw } from './draw-page.ts'
import { picksOf } from './picks.ts'
import { presentSeal, sealInForce, sealOf, sealsOf } from './seals.ts'

/** What the public API of version 1 answers. Nothing here is about who asks. */

type Out<T extends z.ZodType> = z.input<T>
type Reading = Pick<Services, 'db' | 'clock' | 'site'>

const PICKS_EACH = 100

/** The public draws that hold the words, as a page of 20. */
export async function listDraws(
  { db, site }: Reading,
  input: { readonly q: string; readonly state: DrawState | 'all'; readonly page: number },
): Promise<Page<Out<typeof drawV1>>> {
  const found = await searchDraws(db, input)
  return { ...found, items: found.items.map((card) => cardOf(site.origin, card)) }
}

const cardOf = (origin: string, card: Omit<DrawCard, 'firstPrize'>): Out<typeof drawV1> => ({
  ...card,
  state: publicState(card.state),
  page: `${origin}/draws/${card.slug}`,
})

function publicState(state: DrawState): Exclude<DrawState, 'draft'> {
  if (state === 'draft') throw new Error('A draft is not public.')
  return state
}

/** One draw; null for a draft, or where there is none. */
export async function drawDetail(services: Reading, slug: string): Promise<Out<typeof drawDetailV1> | null> {
  const page = await getDraw(services, slug)
  if (!page) return null
  const { origin } = services.site
  const card = { ...page, entrants: page.seal?.entrants ?? null, tickets: page.seal?.tickets ?? null }
  return {
    ...cardOf(origin, { ...card, prizes: page.prizes.reduce((sum, { quantity }) => sum + quantity, 0) }),
    promoter: page.promoter,
    licence: page.licence,
    ticketPrice: page.ticketPrice,
    minimumAge: page.minimumAge,
    rule: page.rule,
    reserves: page.reserves,
    prizeList: page.prizes.map(({ id, name, quantity, donor }) => ({ id, name, quantity, donor })),
    terms: page.terms,
    seal: page.seal?.digest ?? null,
    replacedSeals: page.replacedSeals.map(({ digest }) => digest),
    result: page.result?.digest ?? null,
    history: page.history,
    files: filesOf(page).map((name) => `${origin}/draws/${slug}/${name}`),
  }
}

/** The public files as they are now. */
const filesOf = ({ seal: sealed, result: settled }: DrawPage): string[] => [
  ...(sealed ? ['seal.json', 'seal.sig', 'entries.csv', 'terms.txt', 'site-key.pem'] : []),
  ...(settled ? ['result.json', 'result.sig', 'transcript.jsonl', 'labels.jsonl'] : []),
  ...(settled?.archive ? ['proof.zip'] : []),
]

/** The seal in force of a public draw; null before there is one. */
export async function sealInForceOf(db: Database, slug: string): Promise<Out<typeof sealV1> | null> {
  const [found] = await db
    .select({ id: draw.id })
    .from(draw)
    .where(and(eq(draw.slug, slug), isNotNull(draw.openedAt)))
  const inForce = found ? sealInForce(await sealsOf(db, found.id)) : null
  return inForce ? sealByDigest(db, inForce.digest) : null
}

/** A seal, replaced or in force; null where there is none with this digest. */
export async function sealByDigest(db: Database, digest: string): Promise<Out<typeof sealV1> | null> {
  const [found] = await db
    .select({ row: seal, draw: { slug: draw.slug } })
    .from(seal)
    .innerJoin(draw, eq(draw.id, seal.drawId))
    .where(and(eq(seal.digest, digest), isNotNull(draw.openedAt)))
  if (!found) return null
  const { row } = found
  return {
    ...presentSeal(row),
    signature: toHex(row.signature),
    signed: new TextDecoder().decode(row.bytes),
    // The title as it was sealed: the one on the page could be put right later, and this answer never changes.
    draw: { slug: found.draw.slug, title: sealOf(row).title },
  }
}

/** The result of a draw with a page of its picks; null before there is one. */
export async function resultPage(
  db: Database,
  input: { readonly slug: string; readonly page: number },
): Promise<Out<typeof resultV1> | null> {
  const found = await settledOf(db, input.slug)
  if (!found) return null
  const { result: row, seal: sealed } = found
  const parsed = sealOf(sealed)
  const from = offsetOf(input.page, PICKS_EACH)
  const picks = await picksOf(db, { drawId: row.drawId, seal: parsed, from, to: from + PICKS_EACH - 1 })
  const { beacon } = parsed.sources
  return {
    digest: row.digest,
    signature: toHex(row.signature),
    draw: { slug: input.slug, title: parsed.title },
    seal: sealed.digest,
    drawnAt: instantOf(row.drawnAt),
    drawKey: row.drawKey,
    seed: row.seed,
    beacon:
      beacon === null || row.beaconSignature === null || row.beaconRandomness === null
        ? null
        : { round: beacon.round, signature: row.beaconSignature, randomness: row.beaconRandomness },
    transcriptDigest: row.transcriptDigest,
    picks: { items: picks, total: row.picks, page: input.page, pageSize: PICKS_EACH },
  }
}

/** A page of the transcript; null before the draw, and past the last page. */
export async function transcriptPage(
  db: Database,
  input: { readonly slug: string; readonly page: number },
): Promise<Out<typeof transcriptV1> | null> {
  const found = await settledOf(db, input.slug)
  const from = offsetOf(input.page, PICKS_EACH)
  if (!found || from >= found.result.picks) return null
  const lines = await db
    .select({ line: transcriptLine.line })
    .from(transcriptLine)
    .where(
      and(eq(transcriptLine.drawId, found.result.drawId), between(transcriptLine.pick, from, from + PICKS_EACH - 1)),
    )
    .orderBy(asc(transcriptLine.pick))
  const items = lines.map(({ line }) => {
    const { pick, leaf, coins } = unwrap(parseTranscriptLine(utf8(line)))
    return { pick, leaf, coins: coins.map(([left, right, flips, side]) => ({ left, right, flips, side })) }
  })
  return { items, total: found.result.picks, page: input.page, pageSize: PICKS_EACH }
}

async function settledOf(db: Database, slug: string) {
  const [found] = await db
    .select({ result, seal })
    .from(result)
    .innerJoin(draw, eq(draw.id, result.drawId))
    .innerJoin(seal, eq(seal.id, result.sealId))
    .where(and(eq(draw.slug, slug), isNotNull(draw.openedAt)))
  return found ?? null
}
