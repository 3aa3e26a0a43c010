import type { DrawPage } from '#shared/schemas/api/public.ts'
import { Countdown, TimeBar } from '#src/ui/countdown.tsx'
import { formatBrief, formatClock, zoneName } from '#src/ui/format-time.ts'
import { formatNumber } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'

/**
 * The time to the draw. It keeps its height when the result arrives, so that nothing below moves under a reader's
 * eyes.
 */
export function CountdownPart({ draw }: { readonly draw: DrawPage }) {
  const { seal } = draw
  if (!seal) return null
  const from = seal.sealedAt
  return (
    <Part title="Time to the draw" note={<p>{zoneName(draw.timeZone)} time</p>}>
      {draw.result ? (
        <p className="count">
          <span>
            <b>Drawn</b>
          </span>
        </p>
      ) : (
        <Countdown to={seal.drawAt} serverNow={draw.now} what="the draw" />
      )}
      <div className="mt-unit-2">
        <TimeBar from={from} to={seal.drawAt} serverNow={draw.now} />
        <p className="time-ends">
          <span>
            Sealed
            <br />
            {formatBrief(from, draw.timeZone)}
          </span>
          <span>
            To be drawn
            <br />
            {formatBrief(seal.drawAt, draw.timeZone)}
          </span>
        </p>
      </div>
      <p className="waiting-line measure">{waitingWords(draw)}</p>
      <noscript>
        <p className="note">The figures are those of the moment when the page was loaded. Load it again to see more.</p>
      </noscript>
    </Part>
  )
}

/** What the draw waits for, or that it is done; about as long in every case. */
export function waitingWords(draw: DrawPage): string {
  const round = draw.seal?.beacon ? `round ${formatNumber(draw.seal.beacon.round)}` : 'the round'
  if (draw.result) {
    return `The prizes were settled at ${formatClock(draw.result.drawnAt, draw.timeZone, true)}. The winners stand below, each with every coin that led to them.`
  }
  switch (draw.waiting?.kind) {
    case 'beacon-not-yet':
      return `It is time. The beacon has not published ${round} yet. The draw waits for it: nothing else may stand in.`
    case 'beacon-unreachable':
      return `It is time, but no relay of the beacon can be reached. The draw waits for ${round}: nothing else may stand in.`
    case 'settling':
      return 'The random number is here and checked. The coins are being tossed; the result follows in a moment.'
    case undefined:
      return 'Nobody presses a button. At that time the site fetches the random number, tosses the coins and shows the winners here.'
  }
}
