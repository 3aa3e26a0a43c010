import { describe, expect, it } from 'vitest'
import { instantFromLocal, isTimeZone, localFromInstant, localWords } from '#server/time/local-time.ts'

describe('instantFromLocal', () => {
  // Offsets of the IANA time zone database: London is UTC in winter and UTC+1 in summer, Kathmandu UTC+5:45 all year.
  it.each([
    ['2026-12-11T19:30', 'Europe/London', '2026-12-11T19:30:00.000Z'],
    ['2026-07-11T19:30', 'Europe/London', '2026-07-11T18:30:00.000Z'],
    ['2026-07-11T19:30', 'Asia/Kathmandu', '2026-07-11T13:45:00.000Z'],
  ])('reads %s in %s', (local, zone, instant) => {
    const result = instantFromLocal(local, zone)
    expect(result.ok && result.date.toISOString()).toBe(instant)
    if (result.ok) expect(localFromInstant(result.date, zone)).toBe(local)
  })
  it.each([
    ['2026-03-29T01:00', 'is skipped'],
    ['2026-03-29T01:59', 'is skipped'],
    ['2026-10-25T01:00', 'comes twice'],
    ['2026-10-25T01:59', 'comes twice'],
  ])('refuses %s, which %s in London', (local, words) => {
    const result = instantFromLocal(local, 'Europe/London')
    expect(result).toEqual({
      ok: false,
      message: `The clocks change that night in Europe/London, and ${local.slice(11)} ${words}. Choose a time an hour earlier or later.`,
    })
  })
  it('takes the minutes on either side of a change', () => {
    expect(instantFromLocal('2026-03-29T00:59', 'Europe/London').ok).toBe(true)
    expect(instantFromLocal('2026-03-29T02:00', 'Europe/London').ok).toBe(true)
    expect(instantFromLocal('2026-10-25T02:00', 'Europe/London').ok).toBe(true)
  })
  it.each(['2026-02-29T12:00', '2026-13-01T12:00', '2026-01-01T24:30'])('refuses %s, which is no date', (local) => {
    expect(instantFromLocal(local, 'UTC')).toMatchObject({
      ok: false,
      message: expect.stringContaining('no such date'),
    })
  })
})

it('knows a time zone by its name only', () => {
  expect(['Europe/London', 'UTC'].map(isTimeZone)).toEqual([true, true])
  expect(['Europe/Atlantis', '', '+01:00'].map(isTimeZone)).toEqual([false, false, false])
})

it('writes a time as people read it', () => {
  expect(localWords(new Date('2026-12-11T19:30:00Z'), 'Europe/London')).toBe(
    'Friday, 11 December 2026, 19:30 (Europe/London)',
  )
})
