import { useQuery } from '@tanstack/react-query'
import type { SiteKeys } from '#shared/schemas/api/site-keys.ts'
import { useApp } from '#src/lib/app-context.ts'
import { digestGroups } from '#src/ui/digest.tsx'
import { CopyButton } from '#src/ui/copy-button.tsx'
import { formatDay } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { siteKeysQuery } from './api/get-site-keys.ts'

type Key = SiteKeys['keys'][number]

/** The site's key to compare with, and those that it signed with before. */
export function KeysPart() {
  const { api } = useApp()
  const { data } = useQuery(siteKeysQuery(api))
  const [current, ...earlier] = data?.keys ?? []
  if (!current) return null
  return (
    <Part title="The site’s key" note={<p>Compare all 64 digits.</p>} id="keys">
      <div className="measure">
        <p>
          Every seal and every result is signed by this site. A key inside an archive proves nothing alone: compare its
          fingerprint with this one, with a poster or with a ticket, and give it to the check.
        </p>
      </div>
      <p className="hex mt-unit">{digestGroups(current.fingerprint).join(' ')}</p>
      <div className="note mt-unit">
        It signs since {formatDay(current.since, 'UTC')}.{' '}
        <CopyButton value={current.fingerprint} what="the fingerprint of the site’s key" text="Copy the fingerprint" />
      </div>
      {earlier.length > 0 ? (
        <div className="mt-unit-2">
          <p>It signed with these before. A draw that was sealed with one of them is checked with that one.</p>
          <ul className="dashes">
            {earlier.map((key) => (
              <Earlier key={key.fingerprint} value={key} />
            ))}
          </ul>
        </div>
      ) : null}
      <p className="note mt-unit-2">
        The same for programs, with the keys themselves and the log’s key for witnesses:{' '}
        <Link plain to="/site-keys.json">
          site-keys.json
        </Link>
        .
      </p>
    </Part>
  )
}

function Earlier({ value }: { readonly value: Key }) {
  return (
    <li>
      From {formatDay(value.since, 'UTC')}
      {value.until ? ` to ${formatDay(value.until, 'UTC')}` : ''}:
      <span className="hex fine block">{digestGroups(value.fingerprint).join(' ')}</span>
    </li>
  )
}
