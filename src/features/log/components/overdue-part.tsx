import type { LogState } from '#shared/schemas/api/log.ts'
import { Digest } from '#src/ui/digest.tsx'
import { formatBrief } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'

/** Sealed draws whose time has come and that have no result: a draw that was sealed cannot vanish. */
export function OverduePart({ draws }: { readonly draws: LogState['overdue'] }) {
  return (
    <Part title="Overdue draws" note={<p>Sealed, past their time, and without a result.</p>}>
      {draws.length === 0 ? (
        <p className="measure">
          None. Every sealed draw whose time has come was drawn, or stands in the log as failed or cancelled.
        </p>
      ) : (
        <ul className="account">
          {draws.map((draw) => (
            <li key={draw.slug}>
              <time dateTime={draw.drawAt}>{formatBrief(draw.drawAt, 'UTC', 0)}</time>
              <div>
                <h3>
                  <Link to={`/draws/${draw.slug}`}>{draw.title}</Link>
                </h3>
                <p>
                  <Link to={`/organisations/${draw.organisation.slug}`}>{draw.organisation.name}</Link>. Its time has
                  come and it is not drawn. Its page says what it waits for.
                </p>
                <div className="exact">
                  <Digest value={draw.seal} what={`the seal of ${draw.title}`} label="Seal" />
                </div>
              </div>
            </li>
          ))}
        </ul>
      )}
    </Part>
  )
}
