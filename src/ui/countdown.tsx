import { secondsBetween, spanParts, spanWords } from './format-time.ts'
import { useNow } from './use-now.ts'

interface CountdownProps {
  readonly to: string
  readonly serverNow: string
  /** Said, politely, at a few moments: "the draw". */
  readonly what: string
}

const SAID_AT = [3600, 600, 60]

/** The time left, as figures. Whole on the server; ticks after hydration; speaks at one hour, ten minutes and one. */
export function Countdown({ to, serverNow, what }: CountdownProps) {
  const now = useNow(serverNow)
  const left = Math.max(0, Math.floor(Date.parse(to) / 1000) - now)
  const atLoad = secondsBetween(serverNow, to)
  const crossed = SAID_AT.filter((mark) => left <= mark && atLoad > mark).at(-1)
  return (
    <>
      <p className="count" role="timer" aria-label={`Time to ${what}`}>
        {spanParts(left).map((part) => (
          <span key={part.unit.replace(/s$/, '')}>
            <b>{part.value}</b> {part.unit}{' '}
          </span>
        ))}
      </p>
      <p role="status" className="vh">
        {crossed === undefined ? '' : `${spanWords(crossed)} to ${what}.`}
      </p>
    </>
  )
}

interface TimeBarProps {
  readonly from: string
  readonly to: string
  readonly serverNow: string
}

/** How much of the time between two moments has gone, to scale. */
export function TimeBar({ from, to, serverNow }: TimeBarProps) {
  const now = useNow(serverNow)
  const start = Date.parse(from) / 1000
  const span = Date.parse(to) / 1000 - start
  const gone = span <= 0 ? 100 : Math.min(100, Math.max(0, ((now - start) / span) * 100))
  return (
    <svg className="time-bar" aria-hidden="true">
      <rect className="whole-time" width="100%" height="100%" />
      <rect className="gone" width={`${gone.toFixed(2)}%`} height="100%" />
    </svg>
  )
}
