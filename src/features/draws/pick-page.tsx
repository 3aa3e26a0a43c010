import { useSuspenseQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import type { PickPage } from '#shared/schemas/api/public.ts'
import { ChanceProduct } from '#src/features/ladder/chance.tsx'
import { Ladder, Winner } from '#src/features/ladder/ladder.tsx'
import { ReadingKey } from '#src/features/ladder/reading-key.tsx'
import { awardInSentence, awardWords } from '#src/lib/award-words.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { fraction, oneIn } from '#src/ui/chance-words.ts'
import { Digest } from '#src/ui/digest.tsx'
import { capitalise, countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatDate } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { pickQuery } from './api/get-pick.ts'
import { pickName } from './words.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => pickQuery(api, args.params.slug ?? '', args.params.pick ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const { slug = '', pick = '' } = useParams()
  const { data } = useSuspenseQuery(pickQuery(api, slug, pick))
  return <Pick page={data} />
}

/** One walk, coin by coin. */
export function Pick({ page }: { readonly page: PickPage }) {
  const { pick } = page
  const title = pickTitle(page)
  const coins = pick.coins
  return (
    <>
      <Head
        title={`${awardWords(pick.award)}, coin by coin: ${page.title}`}
        description={`${pickLead(page)} Every flip and every coin of it.`}
        path={`/draws/${page.slug}/picks/${pick.pick}`}
        type="article"
      />
      <Title
        title={title}
        lead={pickLead(page)}
        stub={
          <p className="stub-facts mt-0">
            <Link to={`/draws/${page.slug}`}>{page.title}</Link>
            <br />
            {page.organisation.name}
            <br />
            {formatDate(page.drawnAt, page.timeZone)}
            {page.demo ? (
              <>
                <br />A demonstration
              </>
            ) : null}
          </p>
        }
      />
      <Part title="How to read it">
        <p className="measure">
          Each bar is all the tickets still in, split where the list splits. A coin takes one side; that side opens out
          to the full width, and its thin lines are its tickets. To weigh a coin exactly, its chance is written in
          binary and fair flips are held against the digits.
        </p>
        <ReadingKey />
      </Part>
      <section className="ladder-part" aria-label="The walk, coin by coin">
        <Ladder
          coins={coins}
          endNote={countOf(pick.ticketsIn, 'ticket')}
          end={
            <Winner name={pickName(pick)}>
              <p>
                {formatNumber(pick.ticketsIn)} of the {countOf(pick.remaining, 'ticket')} won{' '}
                {awardInSentence(pick.award)}.
              </p>
            </Winner>
          }
        />
      </section>
      <Part title="The chance, multiplied out">
        <p className="measure">{productWords(page)}</p>
        <ChanceProduct coins={coins} ticketsIn={pick.ticketsIn} remaining={pick.remaining} />
      </Part>
      <CheckThese page={page} />
    </>
  )
}

function pickTitle({ pick }: PickPage): string {
  const { award } = pick
  if (award.kind === 'reserve') return `How reserve ${award.reserve} was found`
  return `How ${awardInSentence(award)}${award.of > 1 ? ',' : ''} found its winner`
}

function pickLead({ pick }: PickPage): string {
  const tickets = countOf(pick.remaining, 'ticket')
  const went = `${tickets} ${pick.remaining === 1 ? 'was' : 'were'} in.`
  if (pick.coins.length === 0) return `${went} Only one entrant was left, so no coin was needed.`
  const weighted =
    pick.coins.length === 1
      ? 'weighted by the tickets on its two sides,'
      : 'each weighted by the tickets on its two sides,'
  return `${went} ${capitalise(countOf(pick.coins.length, 'coin', 'coins', true))}, ${weighted} led to one entrant.`
}

function productWords({ pick }: PickPage): string {
  const whose = pick.label === null ? 'This entrant’s' : `${pick.label}:`
  const chance = `${whose} ${countOf(pick.ticketsIn, 'ticket')} of ${formatNumber(pick.remaining)}, ${oneIn(pick.ticketsIn, pick.remaining)} (${fraction(pick.ticketsIn, pick.remaining)}).`
  if (pick.coins.length < 2) return chance
  return `${chance} The ${countOf(pick.coins.length, 'coin', 'coins', true)} multiply to exactly that: each number below a line cancels the one above the line before it.`
}

function CheckThese({ page }: { readonly page: PickPage }) {
  const { pick } = page
  const flips = pick.coins.map((coin) => coin[2]).filter((text) => text !== '')
  const count = flips.join('').length
  return (
    <Part title="Check these coins">
      {count > 0 ? (
        <p className="measure">
          The flips of this pick, joined: <code className="flips-joined">{flips.join(' ')}</code>. {firstBits(count)}{' '}
          that the draw key gives for pick {pick.pick}.
        </p>
      ) : (
        <p className="measure">No flip was used for this pick.</p>
      )}
      <div className="note mt-unit">
        {page.drawKey ? <Digest label="Draw key" value={page.drawKey} what="the draw key" /> : null}
        <Digest label="Seal" value={page.sealDigest} what="the seal" />
      </div>
      <p className="buttons mt-unit-2">
        <ButtonLink to={`/draws/${page.slug}/check`}>How to check them</ButtonLink>
        {page.previous ? (
          <ButtonLink quiet to={`/draws/${page.slug}/picks/${page.previous.pick}`}>
            Before: {awardWords(page.previous.award).toLowerCase()}
          </ButtonLink>
        ) : null}
        {page.next ? (
          <ButtonLink quiet to={`/draws/${page.slug}/picks/${page.next.pick}`}>
            Next: {awardWords(page.next.award).toLowerCase()}
          </ButtonLink>
        ) : null}
      </p>
    </Part>
  )
}

function firstBits(count: number): string {
  return count === 1 ? 'It is the first bit' : `They are the first ${formatNumber(count)} bits`
}
