import { useApp } from '#src/lib/app-context.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { Path } from './path.tsx'

const CALLS: readonly (readonly [path: string, what: string])[] = [
  ['/draws', 'Every public draw, 20 to a page. q searches, state narrows.'],
  ['/draws/{slug}', 'One draw: times, prizes, terms, history, digests of its seals and result.'],
  ['/draws/{slug}/seal', 'The seal in force, with the very bytes that were signed and their signature.'],
  ['/seals/{seal}', 'A seal by its digest, replaced ones too. Never changes.'],
  [
    '/seals/{seal}/leaves/{leaf}',
    'The short proof that a leaf stands in the sealed list. Names nobody. Never changes.',
  ],
  ['/draws/{slug}/result', 'The result, its picks 100 to a page, with the labels that are open today.'],
  ['/draws/{slug}/transcript', 'Every coin of every pick, 100 picks to a page. Never changes.'],
  ['/log/…', 'The site’s log: its checkpoint, its entries, proofs of inclusion and consistency.'],
]

/** How programs read the site. */
export function ApiPart() {
  const { origin } = useApp()
  return (
    <Part title="Public JSON" note={<p>/api/v1</p>}>
      <p className="measure">
        What the pages show, for programs. It needs no key, only reads, and may be called from the page of any site. The{' '}
        <Link plain to="/api/v1/openapi.json">
          OpenAPI 3.1 description
        </Link>{' '}
        has every field with examples.
      </p>
      <ul className="figures files mt-unit">
        {CALLS.map(([path, what]) => (
          <li key={path}>
            <Path path={path} />
            <span>{what}</span>
          </li>
        ))}
      </ul>
      <h3 className="mt-unit">For example</h3>
      <code className="command" tabIndex={0}>
        {[
          '# Draws that are sealed and wait for their hour',
          `curl '${origin}/api/v1/draws?state=sealed'`,
          '',
          '# The signed bytes of a seal, hashed: they give its digest',
          `curl -s ${origin}/api/v1/draws/its-name/seal | jq -j .signed | sha256sum`,
          '',
          '# A short proof, as a file that the check takes',
          `curl -o proof.json ${origin}/api/v1/seals/DIGEST/leaves/0`,
          '',
          '# Only when something has changed',
          `curl -H 'If-None-Match: W/"TAG"' ${origin}/api/v1/draws/its-name`,
        ].join('\n')}
      </code>
      <div className="measure mt-unit">
        <p>
          <b>Forms.</b> Times are UTC in whole seconds, digests and signatures lower-case hexadecimal, ticket counts
          whole numbers up to 2⁵³ − 1. What goes wrong comes as problem details (RFC 9457): <code>detail</code> says
          what to do.
        </p>
        <p>
          <b>Limits.</b> There is no quota. Lists come in pages. Each answer has an entity tag: send it back and fetch
          only what has changed. What is marked immutable need never be fetched twice. For a whole list of entries or a
          whole transcript take the files, not page after page.
        </p>
        <p>
          <b>What stays.</b> Within version 1, fields and calls may be added; none is taken away or given another
          meaning. Ignore what you do not know. Labels of winners can be taken down at their wish: ask again before you
          show them.
        </p>
      </div>
    </Part>
  )
}
