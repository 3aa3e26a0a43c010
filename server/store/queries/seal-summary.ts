import { eq } from 'drizzle-orm'
import { toHex } from '#shared/bytes/hex.ts'
import { formatTime } from '#shared/bytes/time.ts'
import { beaconFor, roundTime } from '#shared/protocol/networks.ts'
import { termsDigest } from '#shared/protocol/seal.ts'
import type { getSealSummary as endpoint } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import type { Services } from '#server/services.ts'
import { problemsOfSealing } from '#server/store/draw-problems.ts'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import { instantOf, secondsOf } from '#server/time/instants.ts'
import { factsOf, prizeRowsOf, withEmailOf } from './office-draws.ts'
import { sealInForce, sealsOf } from './seals.ts'

/** What a seal would fix, before it is confirmed; null where there is no such draw. */
export async function getSealSummary(
  services: Pick<Services, 'db' | 'clock' | 'site' | 'signing' | 'sha256'>,
  drawId: string,
): Promise<ResponseOf<typeof endpoint> | null> {
  const { db, clock, site } = services
  const [found] = await db
    .select({ draw, organisation })
    .from(draw)
    .innerJoin(organisation, eq(organisation.id, draw.organisationId))
    .where(eq(draw.id, drawId))
  if (!found) return null
  const { draw: row, organisation: owner } = found
  const [prizes, withEmail, seals] = await Promise.all([
    prizeRowsOf(db, drawId),
    withEmailOf(db, drawId),
    sealsOf(db, drawId),
  ])
  const beacon = beaconFor(site.network, secondsOf(row.drawAt))
  const items = prizes.reduce((sum, { quantity }) => sum + quantity, 0)
  return {
    entrants: row.entrantCount,
    tickets: row.ticketCount,
    withoutEmail: row.entrantCount - withEmail,
    prizes: prizes.map(({ code, name, quantity }) => ({ id: code, name, quantity })),
    items,
    reserves: row.reserves,
    rule: row.rule,
    drawAt: instantOf(row.drawAt),
    beacon: { round: beacon.round, at: formatTime(roundTime(beacon, beacon.round)), network: site.networkName },
    keyFingerprint: services.signing.current.fingerprint,
    termsDigest: toHex(termsDigest(services.sha256, row.terms)),
    problems: problemsOfSealing(factsOf(row, owner, prizes), clock.now()),
    cautions: cautionsOf(
      row.entrantCount,
      row.ticketCount,
      withEmail,
      items + row.reserves,
      row.rule,
      site.networkName,
    ),
    replaces: sealInForce(seals)?.digest ?? null,
  }
}

const figure = (count: number) => count.toLocaleString('en-GB')

function cautionsOf(
  entrants: number,
  tickets: number,
  withEmail: number,
  picks: number,
  rule: 'one-prize-each' | 'every-ticket',
  network: 'quicknet' | 'development',
): string[] {
  const cautions: string[] = []
  const without = entrants - withEmail
  if (without > 0) {
    cautions.push(
      `${figure(without)} of ${figure(entrants)} entrants have no e-mail address: they get no receipt by mail. Tell them by letter or telephone.`,
    )
  }
  const most = rule === 'one-prize-each' ? entrants : tickets
  if (entrants > 0 && picks > most) {
    cautions.push(
      `There are more prizes and reserves (${figure(picks)}) than can be drawn (${figure(most)}): the draw will end early.`,
    )
  }
  if (network === 'development') {
    cautions.push(
      'This site uses the development chain, whose secret is public: its draws show nothing about fairness.',
    )
  }
  return cautions
}
