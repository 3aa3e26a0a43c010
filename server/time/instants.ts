import { formatTime, parseTime } from '#shared/bytes/time.ts'

/** The record's writing of a time; parts of a second are cut off. */
export const instantOf = (date: Date): string => formatTime(Math.floor(date.getTime() / 1000))
export const instantOrNull = (date: Date | null): string | null => (date === null ? null : instantOf(date))

/** The same instant without its parts of a second. */
export const wholeSecond = (date: Date): Date => new Date(Math.floor(date.getTime() / 1000) * 1000)

export const secondsOf = (date: Date): number => Math.floor(date.getTime() / 1000)

/** Throws for anything but a time of the record. */
export function dateOf(instant: string): Date {
  const seconds = parseTime(instant)
  if (seconds === null) throw new RangeError(`not a time: ${instant}`)
  return new Date(seconds * 1000)
}
