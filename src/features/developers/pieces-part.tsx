import { useApp } from '#src/lib/app-context.ts'
import { cardFrame, cardPicture } from '#src/lib/card-snippets.ts'
import { Part } from '#src/ui/page.tsx'
import { Path } from './path.tsx'

const EXAMPLE = { slug: 'its-name', title: 'Its title', organisation: { name: 'its organisation' } }

/** What other sites can put into their pages. Every draw's own page has these with its name filled in. */
export function PiecesPart() {
  const { origin } = useApp()
  return (
    <Part title="Pieces for other sites">
      <p className="measure">
        A result card, as a frame or as a picture. Neither runs a script or sets a cookie; both show the draw as it
        stands, never older than a minute. The page of each draw has these lines with its name in them.
      </p>
      <code className="command" tabIndex={0}>
        {`${cardFrame(origin, EXAMPLE)}\n\n${cardPicture(origin, EXAMPLE)}`}
      </code>
      <ul className="figures files mt-unit">
        <li>
          <Path path="/draws/…/qr.svg" />
          <span>A QR code that leads to the draw. The same for an organisation: /organisations/…/qr.svg</span>
        </li>
        <li>
          <Path path="/organisations/…/feed.atom" />
          <span>An Atom feed (RFC 4287): draws opened, sealed, postponed, cancelled, drawn.</span>
        </li>
      </ul>
    </Part>
  )
}
