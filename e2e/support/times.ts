/** A moment as a wall clock in a time zone shows it, as a datetime-local field takes it: `2026-12-11T19:30`. */
export function wallTime(moment: Date, timeZone: string): string {
  const parts = new Intl.DateTimeFormat('en-GB', {
    timeZone,
    year: 'numeric',
    month: '2-digit',
    day: '2-digit',
    hour: '2-digit',
    minute: '2-digit',
    hourCycle: 'h23',
  }).formatToParts(moment)
  const part = (type: string) => parts.find((each) => each.type === type)?.value ?? ''
  return `${part('year')}-${part('month')}-${part('day')}T${part('hour')}:${part('minute')}`
}

/** The first whole minute at least so many seconds from now. */
export function minuteAfter(seconds: number): Date {
  return new Date(Math.ceil((Date.now() + seconds * 1000) / 60_000) * 60_000)
}
