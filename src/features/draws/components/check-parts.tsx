import type { DrawPage } from '#shared/schemas/api/public.ts'
import { useApp } from '#src/lib/app-context.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { CopyButton } from '#src/ui/copy-button.tsx'
import { formatBytes } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import { checkCommand } from '../check-command.ts'

export function CheckPart({ draw }: { readonly draw: DrawPage }) {
  const { result, seal } = draw
  if (!result || !seal) return null
  const command = checkCommand(seal)
  return (
    <Part title="Check it yourself">
      <ul className="ways">
        <li>
          <div>
            <h3>Here, in this browser</h3>
            <p className="measure">Does every step on your own device, and opens each to its figures.</p>
          </div>
          <ButtonLink to={`/draws/${draw.slug}/check`}>Check every coin</ButtonLink>
        </li>
        <li>
          <div>
            <h3>Coin by coin</h3>
            <p className="measure">Each walk has its own page: every bar to scale, every flip and what it settled.</p>
          </div>
          <ButtonLink to={`/draws/${draw.slug}/picks/0`} quiet>
            See the first walk
          </ButtonLink>
        </li>
        <li>
          <div>
            <h3>On your own computer</h3>
            <p className="measure">
              The proof archive holds the seal, the list, every coin and a check that runs without this site.
            </p>
            <code className="command" tabIndex={0}>
              {command}
            </code>
            <p className="mt-unit">
              <CopyButton value={command} what="the command" text="Copy the command" />{' '}
              <Link to={`/draws/${draw.slug}/check`}>What the check does</Link>
            </p>
          </div>
          {result.archive ? (
            <ButtonLink plain download to={`/draws/${draw.slug}/proof.zip`}>
              Download the archive, {formatBytes(result.archive.bytes)}
            </ButtonLink>
          ) : (
            <p className="note">The archive is being put together.</p>
          )}
        </li>
      </ul>
      <div className="mt-unit-2">
        <Notice>
          <p>
            No check can show that every ticket sold was entered. Only the entrants can: each has a receipt that proves
            their tickets are in the sealed list.
          </p>
        </Notice>
      </div>
    </Part>
  )
}

export function CautionsPart({ draw }: { readonly draw: DrawPage }) {
  const { origin } = useApp()
  const paid = draw.ticketPrice !== null && draw.ticketPrice.minor > 0
  return (
    <Part title="Cautions">
      <ul className="dashes measure">
        <li>
          {paid
            ? 'A draw with paid tickets is a lottery in many places: it may need a licence or registration, and may be limited in prices, prizes and who may enter. Evenpenny does not say that this one is lawful. Ask the local authority or take licensed advice.'
            : 'A free draw has rules in many places too. Evenpenny does not say that this one is lawful. Ask the local authority or take licensed advice.'}
        </li>
        <li>Nobody will ask a winner for a fee. If someone does, tell the promoter.</li>
        {draw.minimumAge !== null && draw.minimumAge > 0 ? (
          <li>Entrants have to be {draw.minimumAge} or over, as the promoter states.</li>
        ) : null}
        {draw.licence || draw.organisation.registration ? (
          <li>
            Registration and licence numbers on this page are the promoter’s statements. Compare them with the
            authority’s own register.
          </li>
        ) : null}
      </ul>
      <p className="note mt-unit-2 print-only">
        Printed from the page as it stood on {formatMoment(draw.now, draw.timeZone)}. The page, and the check of every
        coin: {origin}/draws/{draw.slug}
      </p>
    </Part>
  )
}
