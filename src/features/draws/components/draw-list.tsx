import type { DrawCard } from '#shared/schemas/api/public.ts'
import { countOf } from '#src/ui/format-number.ts'
import { Link } from '#src/ui/link.tsx'
import { StateTicket } from '#src/ui/state-ticket.tsx'
import { cardWords } from '../words.ts'

interface DrawListProps {
  readonly draws: readonly DrawCard[]
  /** Leaves the organisation's name out, on its own page. */
  readonly ownPage?: boolean
}

export function DrawList({ draws, ownPage = false }: DrawListProps) {
  return (
    <ol className="draw-list">
      {draws.map((draw) => (
        <li key={draw.slug}>
          <div>
            {ownPage ? null : <p className="note">{draw.organisation.name}</p>}
            <h3 className="what">
              <Link to={`/draws/${draw.slug}`}>{draw.title}</Link>
            </h3>
            <p>{cardWords(draw)}</p>
            <p className="note mt-0">
              {draw.firstPrize && draw.prizes > 0 ? (
                <span className="block">
                  {draw.prizes === 1 ? 'The prize' : `First of ${countOf(draw.prizes, 'prize')}`}: {draw.firstPrize}
                </span>
              ) : null}
              In aid of: {draw.goodCause}
            </p>
          </div>
          <div>
            <StateTicket state={draw.state} />
            {draw.demo ? <p className="note mt-0">A demonstration</p> : null}
          </div>
        </li>
      ))}
    </ol>
  )
}
