import type { listImports } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { Time } from '#src/ui/time.tsx'
import { importWords } from './import-words.ts'

interface EarlierImportsProps {
  readonly imports: ResponseOf<typeof listImports>
  readonly timeZone: string
  readonly href: (id: string) => string
}

export function EarlierImports({ imports, timeZone, href }: EarlierImportsProps) {
  if (imports.length === 0) return null
  return (
    <Part title="Sheets so far" note="Newest first">
      <ul className="account">
        {imports.map((view) => (
          <li key={view.id}>
            <Time at={view.createdAt} timeZone={timeZone} as="brief" />
            <div>
              <p>
                <Link to={href(view.id)}>{view.fileName}</Link>
                {view.createdBy ? `, by ${view.createdBy}` : ''}
              </p>
              <p className="exact">{importWords(view)}</p>
            </div>
          </li>
        ))}
      </ul>
    </Part>
  )
}
