import { Temporal } from '@js-temporal/polyfill'

export type LocalTimeResult =
  | { readonly ok: true; readonly date: Date }
  | { readonly ok: false; readonly message: string }

/**
 * The instant of a wall-clock time (`2026-12-11T19:30`) in a time zone. A time that a clock change skips or doubles is
 * refused: nobody should have to guess which of two a draw meant.
 */
export function instantFromLocal(local: string, timeZone: string): LocalTimeResult {
  let plain: Temporal.PlainDateTime
  try {
    plain = Temporal.PlainDateTime.from(local, { overflow: 'reject' })
  } catch {
    return { ok: false, message: 'There is no such date. Type a date and a time, for example 11 December 2026, 19:30.' }
  }
  try {
    return { ok: true, date: new Date(plain.toZonedDateTime(timeZone, { disambiguation: 'reject' }).epochMilliseconds) }
  } catch {
    const earlier = plain.toZonedDateTime(timeZone, { disambiguation: 'earlier' })
    const skipped = earlier.toPlainDateTime().equals(plain) === false
    const what = skipped ? 'is skipped' : 'comes twice'
    return {
      ok: false,
      message: `The clocks change that night in ${timeZone}, and ${plain.toPlainTime().toString({ smallestUnit: 'minute' })} ${what}. Choose a time an hour earlier or later.`,
    }
  }
}

/** The wall-clock time of an instant in a time zone, as a form shows it. */
export function localFromInstant(date: Date, timeZone: string): string {
  return Temporal.Instant.fromEpochMilliseconds(date.getTime())
    .toZonedDateTimeISO(timeZone)
    .toPlainDateTime()
    .toString({ smallestUnit: 'minute' })
}

/** Whether a time zone of this name is known (IANA). */
export function isTimeZone(name: string): boolean {
  try {
    Temporal.Now.zonedDateTimeISO(name)
    return /^[A-Za-z]/.test(name)
  } catch {
    return false
  }
}

/** A date and time as people read it, with its zone: `Friday, 11 December 2026, 19:30 (Europe/London)`. */
export function localWords(date: Date, timeZone: string): string {
  const words = new Intl.DateTimeFormat('en-GB', {
    timeZone,
    weekday: 'long',
    day: 'numeric',
    month: 'long',
    year: 'numeric',
    hour: '2-digit',
    minute: '2-digit',
  }).format(date)
  return `${words.replace(' at ', ', ')} (${timeZone})`
}
