import type { DrawPage } from '#shared/schemas/api/public.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { lastEvent } from '../words.ts'

/** Everything that a reader must know before the rest: what this draw is not, and what happened to it. */
export function DrawNotices({ draw }: { readonly draw: DrawPage }) {
  const notices = [
    draw.demo ? (
      <Notice level={2} key="demo" title="A demonstration">
        <p>This draw shows how the site works. Its people, tickets and prizes are invented.</p>
      </Notice>
    ) : null,
    draw.seal?.beacon?.network === 'development' ? (
      <Notice level={2} key="chain" title="Made with the development chain">
        <p>
          The secret of the development chain is public, so anyone could have foretold this result. It shows that the
          arithmetic works, and nothing about chance.
        </p>
      </Notice>
    ) : null,
    draw.organisation.suspended ? (
      <Notice level={2} key="suspended" title={`${draw.organisation.name} is suspended`}>
        <p>
          The site has suspended this organisation. Its people can change nothing here. What it has sealed is still
          drawn, and what is published stays. Why is said on{' '}
          <Link to={`/organisations/${draw.organisation.slug}`}>the organisation’s page</Link>; with questions, write to
          the promoter.
        </p>
      </Notice>
    ) : null,
    endNotice(draw),
    movedNotice(draw),
  ].filter((notice) => notice !== null)
  if (notices.length === 0) return null
  return (
    <div className="row notices">
      <div className="stub" />
      <div className="body">{notices}</div>
    </div>
  )
}

function endNotice(draw: DrawPage) {
  if (draw.state !== 'cancelled' && draw.state !== 'failed') return null
  const event = lastEvent(draw, draw.state)
  const when = event ? `On ${formatMoment(event.at, draw.timeZone)}. ` : ''
  return (
    <Notice level={2} key="end" title={draw.state === 'cancelled' ? 'Why it was cancelled' : 'Why it failed'}>
      <p>
        {when}
        {event?.note ??
          (draw.state === 'cancelled'
            ? 'The promoter gave no reason that is public.'
            : 'The random number that the seal named could not be shown within seven days of its time. The seed stays closed.')}
      </p>
      <p>
        {draw.state === 'cancelled'
          ? 'Ask the promoter about money paid for tickets.'
          : 'Its entries were never weighed. A new draw may link to this one.'}
      </p>
    </Notice>
  )
}

function movedNotice(draw: DrawPage) {
  const settled = draw.state === 'cancelled' || draw.state === 'failed'
  if (settled) return null
  const before = draw.replacedSeals.at(-1)
  if (before && draw.seal) {
    const moved = before.drawAt !== draw.seal.drawAt
    return (
      <Notice level={2} key="moved" title={moved ? 'Postponed' : 'Corrected'}>
        <p>
          The seal of {formatMoment(before.sealedAt, draw.timeZone)} was replaced on{' '}
          {formatMoment(draw.seal.sealedAt, draw.timeZone)}
          {moved
            ? `, and the draw moved from ${formatMoment(before.drawAt, draw.timeZone)} to ${formatMoment(draw.seal.drawAt, draw.timeZone)}`
            : ''}
          . {draw.seal.reason ? `The promoter says why: “${draw.seal.reason}”` : ''}
        </p>
      </Notice>
    )
  }
  const postponed = lastEvent(draw, 'postponed')
  if (!postponed || draw.seal) return null
  return (
    <Notice level={2} key="moved" title="Postponed">
      <p>
        On {formatMoment(postponed.at, draw.timeZone)} the promoter changed the dates. The draw is now on{' '}
        {formatMoment(draw.drawAt, draw.timeZone)}. {postponed.note ? `The promoter says why: “${postponed.note}”` : ''}
      </p>
    </Notice>
  )
}
