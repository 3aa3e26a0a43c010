import { presentOdds } from '#server/store/queries/present-odds.ts'
import { chosenCounts } from '#shared/odds/chosen-counts.ts'
import { runOdds } from '#shared/odds/odds.ts'
import { listOfCounts, listOfGroups } from '#shared/odds/ticket-groups.ts'
import type { OddsView } from '#shared/schemas/api/odds.ts'
import type { ApiClient, CallInput, Endpoint, ResponseOf } from '#shared/schemas/endpoint.ts'
import { Problem } from '#shared/schemas/problem.ts'
import { siteKeysFixture } from './site-keys-fixture.ts'
import { allDraws, cardOf, logPage, organisationPage, pickPageOf, steepPick } from './fixtures.ts'
import { drawLogOf, logStateFixture } from './log-fixtures.ts'
import type { DrawPage } from '#shared/schemas/api/public.ts'

type Params = Record<string, unknown>

/** Twelve entrants of an open draw, and what one more would get. */
const SO_FAR = [1, 1, 2, 2, 2, 3, 5, 5, 8, 10, 10, 20]

/** The odds of a fixture, by the code that works them out for the site. */
export function oddsOf(draw: DrawPage, asked?: number): OddsView {
  const { seal, spread } = draw
  const terms = {
    rule: seal?.rule ?? draw.rule,
    reserves: seal?.reserves ?? draw.reserves,
    prizes: (seal?.prizes ?? draw.prizes).reduce((sum, { quantity }) => sum + quantity, 0),
  }
  const list =
    !seal || !spread
      ? listOfCounts(SO_FAR)
      : spread.kind === 'leaves'
        ? listOfCounts(spread.tickets)
        : listOfGroups(spread.counts)
  const basis = seal ? ('sealed' as const) : ('joining' as const)
  const about = { basis, entrants: list.entrants, tickets: list.tickets, ...terms }
  const chosen = seal ? chosenCounts : () => [1, 5, 20]
  return presentOdds(about, runOdds(list, terms), { chosen, asked })
}

function missing(detail: string): Problem {
  return new Problem({ type: 'about:blank', title: 'Not found', status: 404, detail })
}

/** Answers the public endpoints out of the fixtures, each parsed by its own schema as the server's answers are. */
export function fixtureClient(draws: readonly DrawPage[] = allDraws()): ApiClient {
  const find = (params: Params) => {
    const draw = draws.find((candidate) => candidate.slug === params.slug)
    if (!draw) throw missing('No public draw has this address.')
    return draw
  }
  const answers: Record<string, (params: Params, query: Params) => unknown> = {
    getHome: () => ({
      upcoming: draws
        .filter((draw) => draw.state === 'sealed')
        .slice(0, 2)
        .map(cardOf),
      recent: draws
        .filter((draw) => draw.state === 'drawn')
        .slice(0, 2)
        .map(cardOf),
      open: draws.filter((draw) => draw.state === 'open').map(cardOf),
    }),
    searchDraws: (_, query) => {
      const q = String(query.q ?? '').toLowerCase()
      const found = draws.filter(
        (draw) =>
          `${draw.title} ${draw.organisation.name}`.toLowerCase().includes(q) &&
          (!query.state || query.state === 'all' || draw.state === query.state),
      )
      return { items: found.map(cardOf), total: found.length, page: Number(query.page ?? 1), pageSize: 20 }
    },
    getDraw: (params) => find(params),
    getDrawOdds: (params, query) => oddsOf(find(params), query.tickets as number | undefined),
    getPick: (params) => {
      if (params.slug === 'steep-2026') return steepPick()
      const page = pickPageOf(find(params), Number(params.pick))
      if (!page) throw missing('This draw has no such pick.')
      return page
    },
    getStatistics: () => ({
      at: '2026-06-17T17:00:00Z',
      draws: 12,
      picks: 140,
      order: { mean: 0.4857, z: -0.59, p: 0.5552 },
    }),
    listOrganisations: () => {
      const { slug, name, about, registration, demo, suspended, draws: own } = organisationPage()
      return {
        items: [{ slug, name, about, registration, demo, suspended, draws: own.length }],
        total: 1,
        page: 1,
        pageSize: 20,
      }
    },
    getOrganisation: (params) => {
      if (params.slug !== 'larkmoor-bells') throw missing('No organisation has this address.')
      return organisationPage()
    },
    getLog: (_, query) => logPage(Number(query.page ?? 1)),
    getSiteKeys: () => siteKeysFixture(),
    getLogState: () => logStateFixture(),
    getDrawLog: (params) => drawLogOf(find(params)),
  }
  return {
    async call<E extends Endpoint>(endpoint: E, input: CallInput<E> = {}): Promise<ResponseOf<E>> {
      const answer = answers[endpoint.name]
      if (!answer) throw missing(`${endpoint.name} is not in the fixtures.`)
      const params = endpoint.params.safeParse(input.params ?? {})
      if (!params.success) throw missing('There is no such address.')
      return endpoint.response.parse(answer(params.data as Params, (input.query ?? {}) as Params)) as ResponseOf<E>
    },
  }
}
