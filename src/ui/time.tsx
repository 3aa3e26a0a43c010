import { formatBrief, formatClock, formatDate, formatDay, formatMoment } from './format-time.ts'

type Shape = 'moment' | 'day' | 'date' | 'clock' | 'brief' | 'exact'

interface TimeProps {
  readonly at: string
  /** IANA time zone of the organisation. */
  readonly timeZone: string
  readonly as?: Shape
  readonly thisYear?: number
}

/** A time in words, in the organisation's time zone; the machine-readable instant stays with it. */
export function Time({ at, timeZone, as = 'moment', thisYear }: TimeProps) {
  return <time dateTime={at}>{words(at, timeZone, as, thisYear)}</time>
}

function words(at: string, timeZone: string, shape: Shape, thisYear?: number): string {
  switch (shape) {
    case 'moment':
      return formatMoment(at, timeZone)
    case 'exact':
      return formatMoment(at, timeZone, true)
    case 'day':
      return formatDay(at, timeZone)
    case 'date':
      return formatDate(at, timeZone)
    case 'clock':
      return formatClock(at, timeZone)
    case 'brief':
      return formatBrief(at, timeZone, thisYear)
  }
}
