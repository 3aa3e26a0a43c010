/**
 * Times in words. Intl gives only the numbers of the wall clock in a time zone; the words are ours, so that the server
 * and every browser write the same.
 */
const WEEKDAYS = ['Sunday', 'Monday', 'Tuesday', 'Wednesday', 'Thursday', 'Friday', 'Saturday']
const MONTHS = [
  'January',
  'February',
  'March',
  'April',
  'May',
  'June',
  'July',
  'August',
  'September',
  'October',
  'November',
  'December',
]

export interface WallClock {
  readonly year: number
  /** 1 to 12. */
  readonly month: number
  readonly day: number
  readonly hour: number
  readonly minute: number
  readonly second: number
  readonly weekday: string
  readonly monthName: string
}

const formats = new Map<string, Intl.DateTimeFormat>()

/** What a clock on a wall in this IANA time zone shows at an instant. Throws a RangeError for an unknown zone. */
export function wallClock(instant: string, timeZone: string): WallClock {
  let format = formats.get(timeZone)
  if (!format) {
    format = new Intl.DateTimeFormat('en-GB', {
      timeZone,
      hourCycle: 'h23',
      year: 'numeric',
      month: 'numeric',
      day: 'numeric',
      hour: 'numeric',
      minute: 'numeric',
      second: 'numeric',
    })
    formats.set(timeZone, format)
  }
  const parts = new Map(format.formatToParts(new Date(instant)).map((part) => [part.type, Number(part.value)]))
  const number = (type: Intl.DateTimeFormatPartTypes) => parts.get(type) ?? 0
  const [year, month, day] = [number('year'), number('month'), number('day')]
  return {
    year,
    month,
    day,
    hour: number('hour') % 24,
    minute: number('minute'),
    second: number('second'),
    weekday: WEEKDAYS[new Date(Date.UTC(year, month - 1, day)).getUTCDay()] as string,
    monthName: MONTHS[month - 1] as string,
  }
}

const two = (value: number) => value.toString().padStart(2, '0')

/** 19:30 */
export function formatClock(instant: string, timeZone: string, seconds = false): string {
  const at = wallClock(instant, timeZone)
  return `${two(at.hour)}:${two(at.minute)}${seconds ? `:${two(at.second)}` : ''}`
}

/** Friday 11 December 2026 */
export function formatDay(instant: string, timeZone: string): string {
  const at = wallClock(instant, timeZone)
  return `${at.weekday} ${at.day} ${at.monthName} ${at.year}`
}

/** 11 December 2026 */
export function formatDate(instant: string, timeZone: string): string {
  const at = wallClock(instant, timeZone)
  return `${at.day} ${at.monthName} ${at.year}`
}

/** Friday 11 December 2026 at 19:30 */
export function formatMoment(instant: string, timeZone: string, seconds = false): string {
  return `${formatDay(instant, timeZone)} at ${formatClock(instant, timeZone, seconds)}`
}

/** 11 Dec 19:30, for lists in time order; the year where it is not the reader's. */
export function formatBrief(instant: string, timeZone: string, thisYear?: number): string {
  const at = wallClock(instant, timeZone)
  const year = thisYear === undefined || thisYear === at.year ? '' : ` ${at.year}`
  return `${at.day} ${at.monthName.slice(0, 3)}${year} ${two(at.hour)}:${two(at.minute)}`
}

/** "London" of Europe/London, for "London time". */
export function zoneName(timeZone: string): string {
  return timeZone === 'UTC' || timeZone === 'Etc/UTC'
    ? 'UTC'
    : (timeZone.split('/').at(-1) ?? timeZone).replace(/_/g, ' ')
}

/** Whole seconds between two instants, negative once `to` has passed. */
export function secondsBetween(from: string, to: string): number {
  return Math.round((Date.parse(to) - Date.parse(from)) / 1000)
}

export interface SpanPart {
  readonly value: number
  readonly unit: string
}

/** A span in at most three units: 2 days 1 hour 26 minutes; within the last hour, minutes and seconds. */
export function spanParts(seconds: number): readonly SpanPart[] {
  const left = Math.max(0, Math.floor(seconds))
  const days = Math.floor(left / 86_400)
  const hours = Math.floor((left % 86_400) / 3600)
  const minutes = Math.floor((left % 3600) / 60)
  const unit = (value: number, name: string): SpanPart => ({ value, unit: value === 1 ? name : `${name}s` })
  if (days > 0) return [unit(days, 'day'), unit(hours, 'hour'), unit(minutes, 'minute')]
  if (hours > 0) return [unit(hours, 'hour'), unit(minutes, 'minute')]
  return [unit(minutes, 'minute'), unit(left % 60, 'second')]
}

export function spanWords(seconds: number): string {
  return spanParts(seconds)
    .filter(
      (part, index, all) => part.value > 0 || (index === all.length - 1 && all.every((other) => other.value === 0)),
    )
    .map((part) => `${part.value} ${part.unit}`)
    .join(' ')
}
