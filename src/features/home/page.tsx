import { useSuspenseQuery } from '@tanstack/react-query'
import type { LoaderFunctionArgs } from 'react-router'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { Part, Title } from '#src/ui/page.tsx'
import { Link } from '#src/ui/link.tsx'
import { SearchForm } from '#src/ui/search-form.tsx'
import { Bar } from '#src/features/ladder/bar.tsx'
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
      <Part title="The idea">
        <div className="measure">
          <p>
            Split the list in two and toss a coin for it: a coin that falls left exactly as often as the tickets on the
            left deserve. Here are three tickets against five. Then split the side that won, and toss again, until one
            entrant is left.
          </p>
        </div>
        <div className="mt-unit-2 mb-unit-2">
          <Bar coin={[3, 5, '00', 'H']} />
        </div>
        <p className="measure">
          The flips come out of a public random number that did not exist when the list was sealed, and of a secret that
          was sealed with it. So nobody could steer them, and anybody can toss every coin again.{' '}
          <Link to="/how-it-works">Follow one from start to end</Link>.
        </p>
      </Part>
      <Part title="Find a draw">
        <SearchForm action="/draws" label="Title, organisation, place or cause" query="" />
      </Part>
    </>
  )
}
