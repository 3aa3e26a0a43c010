/**
 * Times of the record: `YYYY-MM-DDThh:mm:ssZ`, UTC, whole seconds, no leap second. Worked out by hand because the
 * core may not touch a clock or a locale; the calendar is the proleptic Gregorian one of ISO 8601.
 */

const FORM = /^(\d{4})-(\d{2})-(\d{2})T(\d{2}):(\d{2}):(\d{2})Z$/
const MONTH_DAYS = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31]
const DAY = 86_400
/** 0000-01-01T00:00:00Z and 9999-12-31T23:59:59Z in seconds since 1970. */
const FIRST = -62_167_219_200
const LAST = 253_402_300_799

/** Seconds since 1970-01-01T00:00:00Z, or null where the text is not a time of the record. */
export function parseTime(text: unknown): number | null {
  const parts = typeof text === 'string' ? FORM.exec(text) : null
  if (parts === null) return null
  const [year, month, day, hour, minute, second] = parts.slice(1).map(Number) as [
    number,
    number,
    number,
    number,
    number,
    number,
  ]
  if (month < 1 || month > 12 || day < 1 || day > daysInMonth(year, month)) return null
  if (hour > 23 || minute > 59 || second > 59) return null
  return daysSinceEpoch(year, month, day) * DAY + hour * 3600 + minute * 60 + second
}

/** The record's writing of a time. Requires whole seconds within the years 0000 to 9999; throws a RangeError else. */
export function formatTime(seconds: number): string {
  if (!Number.isInteger(seconds) || seconds < FIRST || seconds > LAST) throw new RangeError(`no such time: ${seconds}`)
  const days = Math.floor(seconds / DAY)
  const rest = seconds - days * DAY
  const [year, month, day] = civil(days)
  const clock = [Math.floor(rest / 3600), Math.floor(rest / 60) % 60, rest % 60].map((n) => pad(n, 2)).join(':')
  return `${pad(year, 4)}-${pad(month, 2)}-${pad(day, 2)}T${clock}Z`
}

function daysInMonth(year: number, month: number): number {
  const leap = year % 4 === 0 && (year % 100 !== 0 || year % 400 === 0)
  return month === 2 && leap ? 29 : (MONTH_DAYS[month - 1] as number)
}

// Years are counted from March, so that the leap day comes last; an era is 400 years, 146,097 days.
function daysSinceEpoch(year: number, month: number, day: number): number {
  const y = month <= 2 ? year - 1 : year
  const era = Math.floor(y / 400)
  const yearOfEra = y - era * 400
  const dayOfYear = Math.floor((153 * (month + (month > 2 ? -3 : 9)) + 2) / 5) + day - 1
  const dayOfEra = yearOfEra * 365 + Math.floor(yearOfEra / 4) - Math.floor(yearOfEra / 100) + dayOfYear
  return era * 146_097 + dayOfEra - 719_468
}

function civil(days: number): [number, number, number] {
  const shifted = days + 719_468
  const era = Math.floor(shifted / 146_097)
  const dayOfEra = shifted - era * 146_097
  const yearOfEra = Math.floor(
    (dayOfEra - Math.floor(dayOfEra / 1460) + Math.floor(dayOfEra / 36_524) - Math.floor(dayOfEra / 146_096)) / 365,
  )
  const dayOfYear = dayOfEra - (365 * yearOfEra + Math.floor(yearOfEra / 4) - Math.floor(yearOfEra / 100))
  const shiftedMonth = Math.floor((5 * dayOfYear + 2) / 153)
  const day = dayOfYear - Math.floor((153 * shiftedMonth + 2) / 5) + 1
  const month = shiftedMonth < 10 ? shiftedMonth + 3 : shiftedMonth - 9
  return [yearOfEra + era * 400 + (month <= 2 ? 1 : 0), month, day]
}

function pad(value: number, width: number): string {
  return String(value).padStart(width, '0')
}
