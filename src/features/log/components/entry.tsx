import type { LogPage } from '#shared/schemas/api/public.ts'
import { eventMeaning, eventTitle } from '#src/lib/event-words.ts'
import { Digest } from '#src/ui/digest.tsx'
import { formatNumber } from '#src/ui/format-number.ts'
import { formatBrief } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'

interface EntryProps {
  readonly line: LogPage['items'][number]
  /** Whether the address asks for this very entry. */
  readonly asked: boolean
}

/** One line of the log. */
export function Entry({ line, asked }: EntryProps) {
  return (
    <li id={`entry-${line.index}`} aria-current={asked ? 'true' : undefined}>
      <time dateTime={line.at}>{formatBrief(line.at, 'UTC', 0)}</time>
      <div>
        <h3>{eventTitle(line)}</h3>
        <p>
          {line.draw ? <Link to={`/draws/${line.draw.slug}`}>{line.draw.title}</Link> : null}
          {line.draw && line.organisation ? ', ' : ''}
          {line.organisation ? (
            <Link to={`/organisations/${line.organisation.slug}`}>{line.organisation.name}</Link>
          ) : null}
          {line.draw || line.organisation ? '. ' : ''}
          {eventMeaning(line)}
        </p>
        {line.note ? <p className="mt-0">“{line.note}”</p> : null}
        <div className="exact">
          <Link to={`/log?at=${line.index}#entry-${line.index}`}>Entry {formatNumber(line.index)}</Link>
          {asked ? ', the one that you asked for' : ''}
          {line.digest ? <Digest value={line.digest} what={`the digest of entry ${line.index}`} /> : null}
        </div>
      </div>
    </li>
  )
}
