import type { DrawPage } from '#shared/schemas/api/public.ts'
import { useApp } from '#src/lib/app-context.ts'
import { cardFrame, cardPicture } from '#src/lib/card-snippets.ts'
import { CopyButton } from '#src/ui/copy-button.tsx'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'

/** What other sites can show of a draw: they always show it as it stands. */
export function SharePart({ draw }: { readonly draw: DrawPage }) {
  const { origin } = useApp()
  const frame = cardFrame(origin, draw)
  const picture = cardPicture(origin, draw)
  return (
    <Part title="Show this draw on your site">
      <p className="measure">
        A small card shows where the draw stands and, once it is drawn, who won. It runs no script and follows the
        reader’s light or dark setting. Copy one of these into your page:
      </p>
      <h3 className="mt-unit">As a frame</h3>
      <code className="command" tabIndex={0}>
        {frame}
      </code>
      <p className="mt-unit">
        <CopyButton value={frame} what="the frame" text="Copy the frame" />{' '}
        <Link plain to={`/embed/draws/${draw.slug}`}>
          See the card
        </Link>
      </p>
      <h3 className="mt-unit">As a picture</h3>
      <code className="command" tabIndex={0}>
        {picture}
      </code>
      <p className="mt-unit">
        <CopyButton value={picture} what="the picture" text="Copy the picture" />{' '}
        <Link plain to={`/draws/${draw.slug}/card.svg`}>
          See the picture
        </Link>
      </p>
      <p className="measure mt-unit">
        For print: the{' '}
        <Link plain to={`/draws/${draw.slug}/qr.svg`}>
          QR code of this page
        </Link>
        , as a drawing that stays sharp at every size.
      </p>
    </Part>
  )
}
