import { createHash } from 'node:crypto'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { tossCoin } from '#shared/sampling/coin.ts'
import { derivedFlips } from '#shared/sampling/flips.ts'
import { CountTree } from '#shared/sampling/walk.ts'
import type {
  CoinLine,
  DrawCard,
  DrawPage,
  LogPage,
  OrganisationPage,
  PickPage,
  PickSummary,
  SealView,
} from '#shared/schemas/api/public.ts'

/** Invented people, places and prizes for the tests of the pages; the walks are real, tossed by the core. */

/** Bytes of the realm that the test runs in: a browser’s, in some tests. */
const hashed: Sha256 = (data) => new Uint8Array(sha256(data))

export const hex = (text: string) => createHash('sha256').update(text).digest('hex')

const ZONE = 'Europe/London'
const TRUST = { slug: 'larkmoor-bells', name: 'Larkmoor Tower Bells Trust' }

const GIVEN = [
  'Imre',
  'Saoirse',
  'Dilwyn',
  'Farida',
  'Jory',
  'Mirela',
  'Otis',
  'Yevgenia',
  'Callum',
  'Zadie',
  'Bram',
  'Eluned',
]
const FROM = ['Fallow Lane', 'Quillby', 'Sennow', 'Upper Larkmoor', 'the Maltings']
export const label = (leaf: number) => `${GIVEN[leaf % GIVEN.length]}, ${FROM[(leaf * 7) % FROM.length]}`

interface Prize {
  readonly id: string
  readonly name: string
  readonly quantity: number
  readonly donor: string | null
  readonly description: string | null
  readonly value: { minor: number; currency: string } | null
}

export const PRIZES: readonly Prize[] = [
  {
    id: 'p1',
    name: 'A day’s flight in a hot-air balloon for two',
    quantity: 1,
    donor: 'Greyfell Balloons',
    description: 'Any fair day before the end of September.',
    value: { minor: 39000, currency: 'GBP' },
  },
  {
    id: 'p2',
    name: 'A hand-thrown dinner service',
    quantity: 1,
    donor: 'the Quillby potters',
    description: null,
    value: { minor: 18000, currency: 'GBP' },
  },
  { id: 'p3', name: 'A month of bread from Sennow Mill', quantity: 3, donor: null, description: null, value: null },
]

/** Ticket counts of a list: fixed, but of every size. */
export function ticketCounts(entrants: number, most: number): number[] {
  return Array.from(
    { length: entrants },
    (_, leaf) => 1 + (Number.parseInt(hex(`tickets ${leaf}`).slice(0, 6), 16) % most),
  )
}

export interface Settled {
  readonly tickets: readonly number[]
  readonly picks: readonly PickSummary[]
}

/** Draws prizes and reserves over a list by the core's own walk. */
export function settle(
  tickets: readonly number[],
  prizes: readonly Prize[],
  reserves: number,
  key: string,
  rule: 'one-prize-each' | 'every-ticket' = 'one-prize-each',
): Settled {
  const tree = new CountTree(tickets)
  const awards: PickSummary['award'][] = [
    ...prizes.flatMap((prize, index) =>
      Array.from({ length: prize.quantity }, (_, item) => ({
        kind: 'prize' as const,
        prize: prize.id,
        name: prize.name,
        item: item + 1,
        of: prize.quantity,
        position: index + 1,
      })),
    ),
    ...Array.from({ length: reserves }, (_, index) => ({ kind: 'reserve' as const, reserve: index + 1 })),
  ]
  const picks: PickSummary[] = []
  for (const [pick, award] of awards.entries()) {
    if (tree.remaining === 0) break
    const walk = tree.walk(derivedFlips(hashed, hashed(new TextEncoder().encode(key)), pick))
    if (!walk) throw new Error('derived flips never run dry')
    picks.push({
      pick,
      award,
      leaf: walk.leaf,
      label: award.kind === 'prize' ? label(walk.leaf) : null,
      labelState: award.kind === 'prize' ? 'open' : 'not-called',
      ticketsIn: rule === 'every-ticket' ? tree.ticketsOf(walk.leaf) : tree.ticketsOf(walk.leaf),
      remaining: walk.remaining,
      coins: walk.coins.map((coin): CoinLine => [coin[0], coin[1], coin[2], coin[3]]),
    })
    tree.remove(walk.leaf, rule)
  }
  return { tickets, picks }
}

const sum = (values: readonly number[]) => values.reduce((total, value) => total + value, 0)

export function sealView(tickets: readonly number[], prizes: readonly Prize[], over: Partial<SealView> = {}): SealView {
  return {
    digest: hex('seal'),
    sealedAt: '2026-06-16T17:04:11Z',
    drawAt: '2026-06-19T18:30:00Z',
    revealBy: null,
    root: hex('root'),
    entrants: tickets.length,
    tickets: sum(tickets),
    rule: 'one-prize-each',
    reserves: 3,
    prizes: prizes.map(({ id, name, quantity }) => ({ id, name, quantity })),
    beacon: { round: 29_702_411, at: '2026-06-19T18:30:03Z', network: 'quicknet', chain: hex('chain') },
    seedCommit: hex('seed commit'),
    keyFingerprint: hex('key'),
    supersedes: null,
    reason: null,
    timestamp: { at: '2026-06-16T17:04:12Z', authority: 'Northgate Timestamps' },
    changes: null,
    ...over,
  }
}

const TERMS = `One ticket costs £2. Tickets are sold until noon on 16 June 2026 by the ringers and at Quillby post office.
One prize at most for each entrant. Entrants have to be 16 or over.
The prizes are drawn on 19 June 2026 at 19:30. Winners are told by e-mail or letter within three days.
A prize that is not claimed by 17 July 2026 passes to the next reserve.
Members of the trust’s committee and their households may not enter.
The trust keeps names and addresses until the return is filed, and then erases them.`

export function openDraw(over: Partial<DrawPage> = {}): DrawPage {
  return {
    slug: 'bell-ropes-2026',
    title: 'Bell Ropes Draw',
    goodCause: 'Eight new ropes for the ring at Larkmoor',
    organisation: { ...TRUST, registration: 'Charity 1180047', suspended: false },
    promoter: { name: 'Hester Vane', address: '3 Tower Cottages, Larkmoor' },
    licence: 'Small society lottery LM/0932, Larkmoor District Council',
    state: 'open',
    demo: false,
    timeZone: ZONE,
    now: '2026-06-10T09:12:00Z',
    terms: TERMS,
    ticketPrice: { minor: 200, currency: 'GBP' },
    minimumAge: 16,
    rule: 'one-prize-each',
    reserves: 3,
    prizes: [...PRIZES],
    openedAt: '2026-05-01T08:00:00Z',
    closesAt: '2026-06-16T11:00:00Z',
    closedAt: null,
    drawAt: '2026-06-19T18:30:00Z',
    drawnAt: null,
    witnesses: [
      {
        name: 'Dr Anselm Roe',
        role: 'clerk to Sennow parish',
        connection: 'none, no part in the trust.',
        statements: [],
      },
    ],
    seal: null,
    replacedSeals: [],
    receiptsOpened: null,
    waiting: null,
    result: null,
    spread: null,
    history: [{ index: 40, at: '2026-05-01T08:00:00Z', event: 'opened', note: null, digest: null }],
    ...over,
  }
}

const SMALL = ticketCounts(23, 12)

export function closedDraw(over: Partial<DrawPage> = {}): DrawPage {
  const open = openDraw()
  return {
    ...open,
    state: 'closed',
    now: '2026-06-16T12:00:00Z',
    closedAt: '2026-06-16T11:00:00Z',
    history: [...open.history, { index: 57, at: '2026-06-16T11:00:00Z', event: 'closed', note: null, digest: null }],
    ...over,
  }
}

export function sealedDraw(over: Partial<DrawPage> = {}): DrawPage {
  const closed = closedDraw()
  const seal = over.seal ?? sealView(SMALL, PRIZES)
  return {
    ...closed,
    state: 'sealed',
    now: '2026-06-17T17:04:00Z',
    seal,
    spread: { kind: 'leaves', tickets: [...SMALL], winners: [] },
    witnesses: closed.witnesses.map((witness) => ({
      ...witness,
      statements: [
        {
          about: 'seal' as const,
          verdict: 'confirmed' as const,
          words: null,
          at: '2026-06-16T18:20:00Z',
          digest: hex('statement seal'),
        },
      ],
    })),
    history: [...closed.history, { index: 58, at: seal.sealedAt, event: 'sealed', note: null, digest: seal.digest }],
    ...over,
  }
}

/** Expected flips of a coin: each flip goes on with chance a half, until the digits end. */
export function expectedFlips(coins: readonly CoinLine[]): { mean: number; atLeast: number[] } {
  const atLeast: number[] = []
  for (const [left, right] of coins) {
    if (left === 0 || right === 0) continue
    const total = BigInt(left + right)
    let r = BigInt(left)
    for (let flips = 1, chance = 1; flips <= 60 && r !== 0n; flips += 1, chance /= 2) {
      atLeast[flips] = (atLeast[flips] ?? 0) + chance
      r = (r * 2n) % total
    }
  }
  return { mean: sum(atLeast.filter((value) => value > 0)), atLeast }
}

export function flipsOf(picks: readonly PickSummary[]): NonNullable<DrawPage['result']>['flips'] {
  const coins = picks.flatMap((pick) => pick.coins)
  const withFlips = coins.filter((coin) => coin[2] !== '')
  const { mean, atLeast } = expectedFlips(coins)
  const most = Math.max(1, ...withFlips.map((coin) => coin[2].length))
  return {
    coins: coins.length,
    coinsWithFlips: withFlips.length,
    flips: sum(withFlips.map((coin) => coin[2].length)),
    expected: mean.toFixed(2),
    histogram: Array.from({ length: most }, (_, index) => ({
      flips: index + 1,
      coins: withFlips.filter((coin) => coin[2].length === index + 1).length,
      expected: ((atLeast[index + 1] ?? 0) - (atLeast[index + 2] ?? 0)).toFixed(1),
    })),
  }
}

interface DrawnOptions {
  readonly tickets?: readonly number[]
  readonly prizes?: readonly Prize[]
  readonly reserves?: number
  readonly shown?: number
  readonly rule?: 'one-prize-each' | 'every-ticket'
}

export function drawnDraw(over: Partial<DrawPage> = {}, options: DrawnOptions = {}): DrawPage {
  const { tickets = SMALL, prizes = PRIZES, reserves = 3, shown = 200, rule = 'one-prize-each' } = options
  const { picks } = settle(tickets, prizes, reserves, 'larkmoor', rule)
  const seal = sealView(tickets, prizes, { reserves, rule })
  const sealed = sealedDraw({ seal })
  const winners = [...new Set(picks.filter((pick) => pick.award.kind === 'prize').map((pick) => pick.leaf))]
  return {
    ...sealed,
    state: 'drawn',
    rule,
    reserves,
    prizes: [...prizes],
    now: '2026-06-19T18:31:00Z',
    drawnAt: '2026-06-19T18:30:07Z',
    witnesses: sealed.witnesses.map((witness) => ({
      ...witness,
      statements: [
        ...witness.statements,
        {
          about: 'result' as const,
          verdict: 'confirmed' as const,
          words: 'I tossed every coin again on my own computer.',
          at: '2026-06-19T18:52:00Z',
          digest: hex('statement result'),
        },
      ],
    })),
    result: {
      digest: hex('result'),
      drawnAt: '2026-06-19T18:30:07Z',
      drawKey: hex('draw key'),
      seed: hex('seed'),
      beacon: { round: 29_702_411, signature: hex('signature').padEnd(96, 'a7'), randomness: hex('randomness') },
      transcriptDigest: hex('transcript'),
      picks: picks.slice(0, shown),
      pickCount: picks.length,
      flips: flipsOf(picks),
      archive: { bytes: 41_302, sha256: hex('archive') },
    },
    spread:
      tickets.length <= 400
        ? { kind: 'leaves', tickets: [...tickets], winners }
        : {
            kind: 'counts',
            counts: [...new Set(tickets)]
              .sort((a, b) => a - b)
              .map((held) => ({ tickets: held, entrants: tickets.filter((count) => count === held).length })),
          },
    history: [
      ...sealed.history,
      { index: 71, at: '2026-06-19T18:30:07Z', event: 'drawn', note: null, digest: hex('result') },
    ],
    ...over,
  }
}

/** Thousands of entrants, hundreds of picks: long ladders, slivers, one entrant with very many tickets. */
export function largeDraw(): DrawPage {
  const tickets = ticketCounts(5000, 40)
  tickets[0] = 9000
  return drawnDraw(
    {
      slug: 'quillby-fair-2026',
      title: 'Quillby School Summer Fair Grand Draw',
      organisation: { slug: 'quillby-school', name: 'Friends of Quillby School', registration: null, suspended: false },
      goodCause: 'A shaded yard for the infants',
      witnesses: [],
    },
    {
      tickets,
      prizes: [
        { id: 'p1', name: 'A family bicycle', quantity: 1, donor: null, description: null, value: null },
        {
          id: 'p2',
          name: 'A book token',
          quantity: 240,
          donor: null,
          description: null,
          value: { minor: 1000, currency: 'GBP' },
        },
      ],
      reserves: 5,
    },
  )
}

export function correctedDraw(): DrawPage {
  const old = sealView(SMALL, PRIZES, {
    digest: hex('first seal'),
    sealedAt: '2026-06-15T17:00:00Z',
    drawAt: '2026-06-17T18:30:00Z',
  })
  const seal = sealView(SMALL, PRIZES, {
    supersedes: old.digest,
    reason: 'Stub book 9 had not been entered when the list was sealed.',
  })
  const sealed = sealedDraw({ seal, replacedSeals: [old] })
  return {
    ...sealed,
    history: [
      ...closedDraw().history,
      { index: 58, at: old.sealedAt, event: 'sealed', note: null, digest: old.digest },
      { index: 60, at: seal.sealedAt, event: 'replaced', note: seal.reason, digest: seal.digest },
    ],
  }
}

export function endedDraw(state: 'cancelled' | 'failed'): DrawPage {
  const sealed = sealedDraw()
  return {
    ...sealed,
    state,
    now: '2026-06-27T09:00:00Z',
    history: [
      ...sealed.history,
      {
        index: 90,
        at: '2026-06-26T18:30:03Z',
        event: state,
        note: state === 'cancelled' ? 'The hall burned down and the prizes with it. Every ticket is refunded.' : null,
        digest: null,
      },
    ],
  }
}

/** Two entrants left, one of them with nothing more: coins that take no flip. */
export function certainDraw(): DrawPage {
  return drawnDraw(
    { slug: 'tiny-2026', title: 'Committee Draw' },
    { tickets: [4, 1, 7], prizes: [PRIZES[0] as Prize, PRIZES[1] as Prize], reserves: 4 },
  )
}

export function pickPageOf(draw: DrawPage, number: number): PickPage | null {
  const pick = draw.result?.picks[number]
  if (!draw.result || !draw.seal || !pick) return null
  const beside = (at: number) => {
    const other = draw.result?.picks[at]
    return other ? { pick: other.pick, award: other.award } : null
  }
  return {
    slug: draw.slug,
    title: draw.title,
    organisation: { slug: draw.organisation.slug, name: draw.organisation.name },
    timeZone: draw.timeZone,
    drawnAt: draw.result.drawnAt,
    demo: draw.demo,
    sealDigest: draw.seal.digest,
    drawKey: draw.result.drawKey,
    pick,
    pickCount: draw.result.pickCount,
    previous: beside(number - 1),
    next: beside(number + 1),
  }
}

/** A pick whose coins have long rows of flips and slivers: 1 ticket against millions. */
export function steepPick(): PickPage {
  const coins: CoinLine[] = []
  const add = (left: number, right: number, flips: string) => {
    let at = 0
    const fall = tossCoin(left, left + right, { next: () => (flips[at++] === '1' ? 1 : 0) })
    if (!fall) throw new Error('flips')
    coins.push([left, right, fall.flips, fall.heads ? 'H' : 'T'])
  }
  add(3, 1_048_573, '1')
  add(1_048_570, 3, '11111111111111111000')
  add(524_288, 524_282, '1000000000000000001')
  add(0, 524_282, '')
  add(524_281, 1, '0')
  const page = pickPageOf(drawnDraw(), 0)
  if (!page) throw new Error('no pick')
  const first = coins[0] as CoinLine
  return {
    ...page,
    slug: 'steep-2026',
    pick: {
      ...page.pick,
      label: 'Wolfgang-Amadeus Featherstonehaugh-Cholmondeley, Upper Larkmoor',
      coins,
      ticketsIn: 524_281,
      remaining: first[0] + first[1],
    },
  }
}

export function cardOf(draw: DrawPage): DrawCard {
  return {
    slug: draw.slug,
    title: draw.title,
    organisation: { slug: draw.organisation.slug, name: draw.organisation.name },
    goodCause: draw.goodCause,
    state: draw.state,
    demo: draw.demo,
    timeZone: draw.timeZone,
    closesAt: draw.closesAt,
    drawAt: draw.drawAt,
    drawnAt: draw.drawnAt,
    entrants: draw.seal?.entrants ?? null,
    tickets: draw.seal?.tickets ?? null,
    prizes: draw.prizes.reduce((total, prize) => total + prize.quantity, 0),
    firstPrize: draw.prizes[0]?.name ?? null,
  }
}

export function allDraws(): readonly DrawPage[] {
  return [
    openDraw({ slug: 'open-2026', title: 'Ringers’ Autumn Draw' }),
    closedDraw({ slug: 'closed-2026' }),
    sealedDraw({ slug: 'sealed-2026' }),
    sealedDraw({
      slug: 'waiting-2026',
      now: '2026-06-19T18:31:10Z',
      waiting: { kind: 'beacon-unreachable', since: '2026-06-19T18:30:20Z' },
    }),
    drawnDraw(),
    { ...correctedDraw(), slug: 'corrected-2026' },
    { ...endedDraw('cancelled'), slug: 'cancelled-2026' },
    { ...endedDraw('failed'), slug: 'failed-2026' },
    {
      ...drawnDraw({ demo: true }),
      slug: 'demo-2026',
      seal: sealView(SMALL, PRIZES, {
        beacon: { round: 4_411_902, at: '2026-06-19T18:30:03Z', network: 'development', chain: hex('development') },
      }),
      organisation: { ...TRUST, registration: null, suspended: true },
    },
    largeDraw(),
    certainDraw(),
    drawnDraw(
      { slug: 'every-ticket-2026', title: 'Every Ticket Draw' },
      { tickets: ticketCounts(90, 60), rule: 'every-ticket' },
    ),
  ]
}

export function organisationPage(): OrganisationPage {
  return {
    ...TRUST,
    registration: 'Charity 1180047',
    about: 'Keeps the eight bells of Larkmoor tower ringing, and teaches anyone who wants to learn.',
    address: 'The Tower, Larkmoor',
    demo: false,
    suspended: false,
    suspension: null,
    draws: allDraws().slice(0, 5).map(cardOf),
  }
}

export function logPage(page: number): LogPage {
  const items = allDraws()
    .flatMap((draw) =>
      draw.history.map((line) => ({
        ...line,
        draw: { slug: draw.slug, title: draw.title },
        organisation: { slug: draw.organisation.slug, name: draw.organisation.name },
      })),
    )
    .map((line, index) => ({ ...line, index: 200 - index }))
  return { items: items.slice(0, 20), total: 130, page, pageSize: 50 }
}
