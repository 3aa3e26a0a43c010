import { useSuspenseQuery } from '@tanstack/react-query'
import type { LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { countOf } from '#src/ui/format-number.ts'
import { Part, Title } from '#src/ui/page.tsx'
import { Link } from '#src/ui/link.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { ENTRANTS, exampleWalk } from '#src/features/ladder/example.ts'
import { Ladder, Winner } from '#src/features/ladder/ladder.tsx'
import { DrawList } from '#src/features/draws/components/draw-list.tsx'
import { homeQuery } from './api/get-home.ts'

export async function loader(args: LoaderFunctionArgs) {
  await load(args, homeQuery)
  return null
}

const TITLE = 'Prize draws that anyone can check'
const LEAD =
  'Charities, school associations and clubs settle their draws here: the list is sealed in public first, then coins weighted by tickets find the winners, and every coin stays on show.'

export function Component() {
  const { api } = useApp()
  const { data } = useSuspenseQuery(homeQuery(api))
  return (
    <>
      <Head title="Evenpenny" description={LEAD} path="/" />
      <Title title={TITLE} lead={LEAD}>
        <p className="buttons mt-unit-2">
          <ButtonLink to="/how-it-works">How it works</ButtonLink>
          <ButtonLink to="/draws" quiet>
            See the draws
          </ButtonLink>
        </p>
      </Title>
      <Idea />
      {data.upcoming.length > 0 ? (
        <Part title="Soon to be drawn" note={<p>Sealed: nobody can change the list or foresee the result.</p>}>
          <DrawList draws={data.upcoming} />
        </Part>
      ) : null}
      {data.recent.length > 0 ? (
        <Part title="Lately drawn">
          <DrawList draws={data.recent} />
        </Part>
      ) : null}
      {data.open.length > 0 ? (
        <Part title="Open for entries" note={<p>Tickets come from each promoter, not from this site.</p>}>
          <DrawList draws={data.open} />
        </Part>
      ) : null}
      <Part title="Find a draw">
        <SearchForm action="/draws" label="Title, organisation, place or cause" query="" />
      </Part>
    </>
  )
}

function Idea() {
  const walk = exampleWalk()
  const winner = ENTRANTS[walk.leaf] ?? ENTRANTS[0]
  return (
    <>
      <Part title="The idea">
        <p className="measure">
          Split the list in two and toss a coin that falls left exactly as often as the tickets on the left deserve.
          Split the side that won, and toss again, until one entrant is left. Here are{' '}
          {countOf(walk.remaining, 'ticket', 'tickets', true)} of {countOf(ENTRANTS.length, 'person', 'people', true)}.{' '}
          <Link to="/how-it-works">How to read it, flip by flip</Link>
        </p>
      </Part>
      <section className="ladder-part" aria-label="A small draw, coin by coin">
        <Ladder
          coins={walk.coins}
          endNote={countOf(winner.tickets, 'ticket')}
          end={
            <Winner name={winner.name}>
              <p>
                {winner.tickets} of the {walk.remaining} tickets won. The flips of a real draw come out of a public
                random number that did not exist when its list was sealed, and of a secret sealed with it.
              </p>
            </Winner>
          }
        />
      </section>
    </>
  )
}
