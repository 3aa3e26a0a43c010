import { useQuery, useSuspenseQuery } from '@tanstack/react-query'
import { useParams, useSearchParams, type LoaderFunctionArgs } from 'react-router'
import type { EntryView } from '#shared/schemas/api/entry.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { fraction, oneIn, oneInChance } from '#src/ui/chance-words.ts'
import { formatNumber } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Facts, Title } from '#src/ui/page.tsx'
import { StateTicket } from '#src/ui/state-ticket.tsx'
import { entryOddsQuery, entryPicksQuery, entryQuery, entryWalkQuery } from './api/queries.ts'
import { AnnouncementPart, CorrectionPart, TermsPart } from './components/before-parts.tsx'
import { ReceiptPart } from './components/receipt-part.tsx'
import { BranchPart, PicksPart } from './components/result-parts.tsx'
import { entryLead, entryTitle } from './words.ts'

export { ErrorBoundary } from './unknown-entry.tsx'

/** Which pick's branch is shown, and which page of picks: as asked, else the first prize won, else the first pick. */
function shownOf(entry: EntryView, search: URLSearchParams): { readonly pick: number; readonly page: number } {
  const whole = (name: string, least: number) => {
    const text = search.get(name) ?? ''
    return /^\d{1,6}$/.test(text) && Number(text) >= least ? Number(text) : null
  }
  const last = (entry.result?.pickCount ?? 1) - 1
  const won = entry.result?.won.find(({ award }) => award.kind === 'prize')?.pick ?? 0
  return { pick: Math.min(whole('pick', 0) ?? won, last), page: whole('page', 1) ?? 1 }
}

export async function loader(args: LoaderFunctionArgs) {
  const token = args.params.token ?? ''
  const entry = await load(args, (api) => entryQuery(api, token))
  // The page stands without its odds: whatever is wrong with them is no reason to hide an entry.
  if (entry.sealed) await load(args, (api) => entryOddsQuery(api, entry)).catch(() => null)
  if (!entry.result) return null
  const { pick, page } = shownOf(entry, new URL(args.request.url).searchParams)
  await load(args, (api) => entryPicksQuery(api, token, page))
  await load(args, (api) => entryPicksQuery(api, token, 1))
  await load(args, (api) => entryWalkQuery(api, token, pick))
  return null
}

/** An entrant's private page: their entry, their receipt, and what happened to their tickets. */
export function Component() {
  const { api } = useApp()
  const { token = '' } = useParams()
  const { data: entry } = useSuspenseQuery(entryQuery(api, token))
  return (
    <>
      <Head title={`Your entry: ${entry.draw.title}`} description="A private page of one entrant." />
      <Announcer words={entry.result ? 'The draw is settled. This page says what happened to your tickets.' : ''} />
      {entry.result ? <Drawn entry={entry} token={token} /> : <Before entry={entry} token={token} />}
    </>
  )
}

interface SheetProps {
  readonly entry: EntryView
  readonly token: string
}

function Before({ entry, token }: SheetProps) {
  const over = entry.draw.state === 'cancelled' || entry.draw.state === 'failed'
  return (
    <>
      <EntryTitle entry={entry} lead={entryLead(entry, null)} />
      <ReceiptPart entry={entry} token={token} />
      {over ? null : <AnnouncementPart entry={entry} token={token} />}
      <CorrectionPart entry={entry} token={token} />
      <TermsPart entry={entry} />
    </>
  )
}

function Drawn({ entry, token }: SheetProps) {
  const { api } = useApp()
  const [search] = useSearchParams()
  const { pick, page } = shownOf(entry, search)
  const { data: first } = useSuspenseQuery(entryPicksQuery(api, token, 1))
  const { data: picks } = useSuspenseQuery(entryPicksQuery(api, token, page))
  const { data: walk } = useSuspenseQuery(entryWalkQuery(api, token, pick))
  const href = (to: { readonly pick: number; readonly page: number }) => {
    const query = new URLSearchParams({ pick: String(to.pick), ...(to.page > 1 ? { page: String(to.page) } : {}) })
    return `/entry/${token}?${query}`
  }
  return (
    <>
      <EntryTitle entry={entry} lead={entryLead(entry, first.items[0] ?? null)} />
      <BranchPart entry={entry} walk={walk} />
      <PicksPart entry={entry} picks={picks} shown={pick} href={href} />
      <ReceiptPart entry={entry} token={token} />
      <CorrectionPart entry={entry} token={token} />
      <TermsPart entry={entry} />
    </>
  )
}

function EntryTitle({ entry, lead }: { readonly entry: EntryView; readonly lead: string }) {
  const { draw } = entry
  const suspended = draw.organisation.suspended
  return (
    <>
      <div className="row private">
        <div className="stub" />
        <p className="body">Only people with this link can see this page. It is never shown in a search.</p>
      </div>
      <Title
        above={`Your entry, as “${entry.label}”`}
        title={entryTitle(entry)}
        lead={lead}
        stub={
          <>
            <p className="stub-facts mt-0">
              <Link to={`/draws/${draw.slug}`}>{draw.title}</Link>
              <br />
              {draw.organisation.name}
              {draw.demo ? (
                <>
                  <br />A demonstration
                </>
              ) : null}
            </p>
            <p className="mt-unit">
              <StateTicket state={draw.state} />
            </p>
          </>
        }
      >
        <Facts
          items={[
            ['Name', entry.name],
            ['Your tickets', ticketWords(entry)],
            entry.sealed ? ['Your chance', <Chance key="chance" entry={entry} />] : null,
            ['Reached by', entry.contact ?? 'Letter or telephone: no address stands in the list'],
            ['In aid of', draw.goodCause],
            ['Promoter', `${draw.promoter.name}, ${draw.promoter.address}`],
            draw.licence ? ['Registered', `${draw.licence}, as the promoter states`] : null,
            [
              'Your code',
              <span key="code" className="mono">
                {entry.code}
              </span>,
            ],
          ]}
        />
        {suspended ? (
          <div className="mt-unit-2">
            <Notice title={`${draw.organisation.name} is suspended`}>
              <p>
                Its people can change nothing on this site. What it has sealed is still drawn, and your proof stays.
              </p>
            </Notice>
          </div>
        ) : null}
      </Title>
    </>
  )
}

const ticketWords = ({ tickets, numbers }: EntryView): string =>
  numbers === null
    ? formatNumber(tickets)
    : `${formatNumber(tickets)}, with the ${tickets === 1 ? 'number' : 'numbers'} ${numbers}`

/** The first pick exactly, and the chance of anything at all where that is worked out. */
function Chance({ entry }: { readonly entry: EntryView }) {
  const { api } = useApp()
  const { data: odds } = useQuery(entryOddsQuery(api, entry))
  const { tickets, draw } = entry
  const asked = odds?.asked
  return (
    <>
      {oneIn(tickets, draw.tickets)} for the first prize ({fraction(tickets, draw.tickets)})
      {asked && odds.prizes > 1
        ? `; ${oneInChance(asked.prize)} for any of the ${formatNumber(odds.prizes)} (${asked.prize.exact ? fraction(asked.prize.exact.over, asked.prize.exact.under) : asked.prize.decimal})`
        : ''}
    </>
  )
}
