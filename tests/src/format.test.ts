import { describe, expect, it } from 'vitest'
import { formatBytes, formatMoney, formatNumber, numberWord, ordinal } from '#src/ui/format-number.ts'
import { formatBrief, formatMoment, spanParts, spanWords, wallClock, zoneName } from '#src/ui/format-time.ts'
import { shortDigest } from '#src/ui/digest.tsx'
import { reeds } from '#src/ui/seal-edge.tsx'
import { groupCounts } from '#src/ui/spread-chart.tsx'

describe('numbers', () => {
  it('take commas, words and ordinals', () => {
    expect([0, 999, 1000, 1_048_576, -1234].map(formatNumber)).toEqual(['0', '999', '1,000', '1,048,576', '−1,234'])
    expect([0, 1, 20, 21].map(numberWord)).toEqual(['no', 'one', 'twenty', '21'])
    expect([1, 3, 20, 21, 22, 111, 113, 123].map(ordinal)).toEqual([
      'first',
      'third',
      'twentieth',
      '21st',
      '22nd',
      '111th',
      '113th',
      '123rd',
    ])
  })
  it('write money in its own minor units', () => {
    expect(formatMoney({ minor: 250, currency: 'GBP' })).toBe('£2.50')
    expect(formatMoney({ minor: 2500, currency: 'EUR' })).toBe('€25')
    expect(formatMoney({ minor: 1205, currency: 'NOK' })).toBe('12.05 NOK')
    expect(formatMoney({ minor: 1200, currency: 'JPY' })).toBe('¥1,200')
    expect(formatMoney({ minor: 1005, currency: 'KWD' })).toBe('1.005 KWD')
  })
  it('write sizes', () => {
    expect([999, 41_302, 3_240_000].map(formatBytes)).toEqual(['999 bytes', '41 kB', '3.2 MB'])
  })
})

describe('times', () => {
  it('stand in the organisation’s time zone, summer time and all', () => {
    expect(formatMoment('2026-06-19T18:30:00Z', 'Europe/London')).toBe('Friday 19 June 2026 at 19:30')
    expect(formatMoment('2026-12-11T19:30:00Z', 'Europe/London')).toBe('Friday 11 December 2026 at 19:30')
    // The clock in London goes back at 01:00 UTC on 25 October 2026: the same wall time twice.
    expect(formatMoment('2026-10-25T00:30:00Z', 'Europe/London')).toBe('Sunday 25 October 2026 at 01:30')
    expect(formatMoment('2026-10-25T01:30:00Z', 'Europe/London')).toBe('Sunday 25 October 2026 at 01:30')
    expect(formatMoment('2026-12-31T20:00:00Z', 'Pacific/Auckland')).toBe('Friday 1 January 2027 at 09:00')
    expect(formatMoment('2026-06-19T00:00:05Z', 'UTC', true)).toBe('Friday 19 June 2026 at 00:00:05')
  })
  it('know weekdays by the calendar of the zone', () => {
    expect(wallClock('2026-02-28T23:30:00Z', 'Asia/Kolkata')).toMatchObject({
      day: 1,
      month: 3,
      weekday: 'Sunday',
      minute: 0,
    })
  })
  it('are brief in lists, with the year where it is another', () => {
    expect(formatBrief('2026-06-19T18:30:00Z', 'Europe/London', 2026)).toBe('19 Jun 19:30')
    expect(formatBrief('2025-06-19T18:30:00Z', 'Europe/London', 2026)).toBe('19 Jun 2025 19:30')
    expect(zoneName('America/Argentina/Buenos_Aires')).toBe('Buenos Aires')
  })
  it('count down in days, hours and minutes, then minutes and seconds', () => {
    expect(spanParts(2 * 86_400 + 3600 + 26 * 60 + 59)).toEqual([
      { value: 2, unit: 'days' },
      { value: 1, unit: 'hour' },
      { value: 26, unit: 'minutes' },
    ])
    expect(spanParts(61)).toEqual([
      { value: 1, unit: 'minute' },
      { value: 1, unit: 'second' },
    ])
    expect(spanParts(-5)).toEqual([
      { value: 0, unit: 'minutes' },
      { value: 0, unit: 'seconds' },
    ])
    expect(spanWords(3600)).toBe('1 hour')
    expect(spanWords(600)).toBe('10 minutes')
  })
})

describe('digests', () => {
  it('are short by their two ends', () => {
    const digest = `${'01234567'.repeat(7)}89abcdef`
    expect(shortDigest(digest)).toBe('0123 4567 … 89ab cdef')
  })
  it('give 64 reeds, clockwise from the top, 5 + 1.75 × digit long', () => {
    const all = reeds('0123456789abcdef'.repeat(4))
    expect(all).toHaveLength(64)
    const length = (index: number) => {
      const reed = all[index]
      return reed ? Math.hypot(reed.x2 - reed.x1, reed.y2 - reed.y1) : 0
    }
    for (let digit = 0; digit < 16; digit += 1) expect(length(digit)).toBeCloseTo(5 + 1.75 * digit, 1)
    const first = all[0]
    const quarter = all[16]
    expect(first && first.x1 > 110 && first.y1 < 12).toBe(true)
    expect(quarter && quarter.x1 > 208 && quarter.y1 > 110).toBe(true)
  })
})

describe('groups of ticket counts', () => {
  it('keep every entrant, in at most twenty equal groups', () => {
    const counts = [1, 2, 40, 41, 9000].map((tickets, index) => ({ tickets, entrants: index + 1 }))
    const groups = groupCounts(counts)
    expect(groups.length).toBeLessThanOrEqual(20)
    expect(groups.reduce((sum, group) => sum + group.entrants, 0)).toBe(15)
    expect(groups[0]).toMatchObject({ from: 1, entrants: 10 })
    expect(groups.at(-1)).toMatchObject({ to: 9000, entrants: 5 })
  })
  it('stay single where they fit', () => {
    expect(
      groupCounts([
        { tickets: 3, entrants: 2 },
        { tickets: 5, entrants: 1 },
      ]),
    ).toEqual([
      { from: 3, to: 3, entrants: 2 },
      { from: 4, to: 4, entrants: 0 },
      { from: 5, to: 5, entrants: 1 },
    ])
  })
})
