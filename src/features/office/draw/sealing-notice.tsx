import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Notice } from '#src/ui/notice.tsx'
import { isBeingMade } from './sealing.ts'

/** That a seal is under way, what it waits for, and what becomes of it; nothing where none is. */
export function SealingNotice({ draw }: { readonly draw: OfficeDraw }) {
  const { sealing } = draw
  const title = draw.state === 'sealed' ? 'The new seal is being made' : 'The list is being sealed'
  if (isBeingMade(draw)) {
    return (
      <Notice title={title}>
        <p role="status">
          A long list takes a moment: a commitment is made for each of its {formatNumber(draw.counts.entrants)}{' '}
          entrants. This page shows the seal as soon as it stands; you can leave it meanwhile.
        </p>
      </Notice>
    )
  }
  if (!sealing) return null
  const stands =
    sealing.replaces === null ? '' : ' Until then the seal before it stands, and the draw would be held at its time.'
  return (
    <Notice title={title}>
      <p role="status">
        The seal is made and signed. It counts, and is published, as soon as an outside authority has put a timestamp on
        it, so that anybody can see that it came before the draw.{stands}
      </p>
      {sealing.tries > 0 ? (
        <p className="mt-unit">
          {countOf(sealing.tries, 'try', 'tries')} so far gave no timestamp. The site goes on by itself until{' '}
          {formatMoment(sealing.until, draw.timeZone, true)}; if none comes by then, this seal is discarded, and the
          list can be sealed again for a later draw time. What the authority said last: {sealing.detail}
        </p>
      ) : null}
    </Notice>
  )
}
