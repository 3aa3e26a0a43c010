import { useSuspenseQuery } from '@tanstack/react-query'
import { useState } from 'react'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { ticketsAsked } from '#src/lib/tickets-asked.ts'
import { Announcer } from '#src/ui/announcer.tsx'
import { drawLogQuery } from './api/get-draw-log.ts'
import { drawQuery } from './api/get-draw.ts'
import { hasOdds, oddsQuery } from './api/get-odds.ts'
import { ExactFiguresPart, SettledPart, SpreadPart, WitnessesPart } from './components/after-parts.tsx'
import { EnterPart, FixesPart, PrizesPart, TermsPart } from './components/before-parts.tsx'
import { CautionsPart, CheckPart } from './components/check-parts.tsx'
import { CountdownPart } from './components/countdown-part.tsx'
import { DrawTitle } from './components/draw-title.tsx'
import { HistoryPart } from './components/history-part.tsx'
import { DrawNotices } from './components/notices.tsx'
import { OddsPart } from './components/odds-part.tsx'
import { AreYouInPart, EarlierSealsPart, SealPart } from './components/seal-part.tsx'
import { SharePart } from './components/share-part.tsx'
import { PrizesToCome, ReservesPart, WinnersPart } from './components/winners-part.tsx'
import { drawLead } from './words.ts'

export async function loader(args: LoaderFunctionArgs) {
  const draw = await load(args, (api) => drawQuery(api, args.params.slug ?? ''))
  await load(args, (api) => drawLogQuery(api, draw))
  await loadOdds(args, draw)
  return null
}

/** The page stands without its odds: whatever is wrong with them is no reason to hide a draw. */
async function loadOdds(args: LoaderFunctionArgs, draw: DrawPage): Promise<void> {
  if (!hasOdds(draw)) return
  const asked = ticketsAsked(new URL(args.request.url).searchParams.get('tickets'))
  await load(args, (api) => oddsQuery(api, draw, asked === 'wrong' ? null : asked)).catch(() => null)
}

export function Component() {
  const { api } = useApp()
  const { slug = '' } = useParams()
  const { data: draw } = useSuspenseQuery(drawQuery(api, slug))
  return <Draw key={slug} draw={draw} />
}

/** One draw in whatever state it is. */
export function Draw({ draw }: { readonly draw: DrawPage }) {
  // A reader who saw the countdown keeps its page when the result arrives: parts change in place or come at the end.
  const [first] = useState(draw.state)
  const drawn = draw.result !== null
  const arrived = drawn && first === 'sealed'
  return (
    <>
      <Head
        title={`${draw.title}: ${draw.organisation.name}`}
        description={`${drawLead(draw)} In aid of: ${draw.goodCause}.`}
        path={`/draws/${draw.slug}`}
        type="article"
      />
      <Announcer words={announcement(draw, first)} />
      <DrawTitle draw={draw} />
      <DrawNotices draw={draw} />
      {draw.state === 'open' || draw.state === 'draft' ? <Open draw={draw} /> : null}
      {draw.state === 'closed' ? <Closed draw={draw} /> : null}
      {draw.state === 'sealed' || arrived ? <Sealed draw={draw} /> : null}
      {drawn ? <Drawn draw={draw} arrived={arrived} /> : null}
      {draw.state === 'cancelled' || draw.state === 'failed' ? <Ended draw={draw} /> : null}
      <HistoryPart draw={draw} />
      <SharePart draw={draw} />
      <CautionsPart draw={draw} />
    </>
  )
}

function announcement(draw: DrawPage, first: DrawPage['state']): string {
  if (first !== 'sealed') return ''
  if (draw.result) return 'The draw is settled. The winners are on this page.'
  if (draw.state === 'failed') return 'The draw has failed. The page says why.'
  if (draw.waiting?.kind === 'beacon-unreachable') return 'The beacon cannot be reached. The draw waits for it.'
  return ''
}

interface PartsProps {
  readonly draw: DrawPage
}

function Open({ draw }: PartsProps) {
  return (
    <>
      <EnterPart draw={draw} />
      <PrizesPart draw={draw} />
      <OddsPart draw={draw} />
      <TermsPart draw={draw} />
    </>
  )
}

function Closed({ draw }: PartsProps) {
  return (
    <>
      <PrizesPart draw={draw} />
      <OddsPart draw={draw} />
      <TermsPart draw={draw} />
    </>
  )
}

function Sealed({ draw }: PartsProps) {
  return (
    <>
      <CountdownPart draw={draw} />
      {draw.result ? <WinnersPart draw={draw} arrived /> : <PrizesToCome draw={draw} />}
      <SealPart draw={draw} />
      <FixesPart draw={draw} />
      <OddsPart draw={draw} />
      <AreYouInPart draw={draw} />
      <EarlierSealsPart draw={draw} />
      <PrizesPart draw={draw} />
      <WitnessesPart draw={draw} />
      <TermsPart draw={draw} />
    </>
  )
}

function Drawn({ draw, arrived }: PartsProps & { readonly arrived: boolean }) {
  return (
    <>
      {arrived ? null : <WinnersPart draw={draw} arrived={false} />}
      <ReservesPart draw={draw} />
      <SpreadPart draw={draw} />
      {arrived ? null : <OddsPart draw={draw} />}
      <SettledPart draw={draw} />
      {arrived ? null : <AreYouInPart draw={draw} />}
      <ExactFiguresPart draw={draw} />
      <CheckPart draw={draw} />
      {arrived ? null : (
        <>
          <WitnessesPart draw={draw} />
          <PrizesPart draw={draw} />
          <EarlierSealsPart draw={draw} />
          <TermsPart draw={draw} />
        </>
      )}
    </>
  )
}

function Ended({ draw }: PartsProps) {
  return (
    <>
      {draw.seal ? <SealPart draw={draw} /> : null}
      <EarlierSealsPart draw={draw} />
      <PrizesPart draw={draw} />
      <WitnessesPart draw={draw} />
      <TermsPart draw={draw} />
    </>
  )
}
