import { describe, expect, it } from 'vitest'
import { moneyText, parseMoney } from '#src/features/office/money.ts'
import { changesOf, fieldWords } from '#src/features/office/draw/changes.ts'
import { roadOf } from '#src/features/office/draw/road.ts'
import { drawInterval } from '#src/features/office/api/queries.ts'
import { formatMoney, minorDigits } from '#src/ui/format-number.ts'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { officeDraw } from '#tests/support/office/fixtures.ts'

describe('parseMoney', () => {
  it.each([
    ['2.50', 'GBP', 250],
    ['2.5', 'GBP', 250],
    [' £1,250 ', 'GBP', 125_000],
    ['GBP 3', 'GBP', 300],
    ['0', 'GBP', 0],
    ['500', 'JPY', 500],
    ['1.234', 'KWD', 1234],
    ['0.07', 'EUR', 7],
    // A float would make 1.15 × 100 into 114.99999999999999.
    ['1.15', 'GBP', 115],
  ])('reads %j of %s as %d minor units', (text, currency, minor) => {
    expect(parseMoney(text, currency)).toEqual({ minor, currency })
  })
  it.each(['2.505', '1,25', '1,2500', '-3', '2.', '.5', 'two', '£', '1e3', '90071992547409.93'])('refuses %j', (text) =>
    expect(parseMoney(text, 'GBP')).toBeUndefined(),
  )
  it('refuses decimals where the currency has none', () => expect(parseMoney('500.0', 'JPY')).toBeUndefined())
  it('takes nothing for nothing', () => expect(parseMoney('  ', 'GBP')).toBeNull())
  it('reads back what it writes, in every number of decimals', () => {
    for (const [currency, minor] of [
      ['GBP', 5],
      ['JPY', 5],
      ['KWD', 5],
      ['GBP', 123_456_789],
      ['CLF', 12_345],
    ] as const) {
      const amount = { minor, currency }
      expect(parseMoney(moneyText(amount), currency)).toEqual(amount)
    }
    expect(moneyText({ minor: 5, currency: 'GBP' })).toBe('0.05')
  })
  it('agrees with what the pages show', () => {
    // ISO 4217, list one (from memory): the dong has no minor unit, the rial of Oman a thousandth.
    expect(formatMoney({ minor: 1000, currency: 'VND' })).toBe('1,000 VND')
    expect(formatMoney({ minor: 1500, currency: 'OMR' })).toBe('1.500 OMR')
  })
  it('has the decimals that ECMA-402 takes from ISO 4217', () => {
    // Intl's own data has none for currencies whose coins have gone; ISO 4217 keeps their minor units.
    for (const currency of [
      'GBP',
      'EUR',
      'USD',
      'JPY',
      'KRW',
      'ISK',
      'CLP',
      'VND',
      'XOF',
      'BHD',
      'KWD',
      'TND',
      'CLF',
    ]) {
      const options = new Intl.NumberFormat('en', { style: 'currency', currency }).resolvedOptions()
      expect([currency, minorDigits(currency)]).toEqual([currency, options.maximumFractionDigits])
    }
  })
})

describe('roadOf', () => {
  const marks = (changes: Partial<OfficeDraw>) => roadOf(officeDraw(changes)).map(({ mark }) => mark)
  const empty = { entrants: 0, tickets: 0, withEmail: 0 }
  it.each([
    ['draft', ['now', 'ahead', 'ahead', 'ahead', 'ahead']],
    ['open', ['done', 'done', 'now', 'ahead', 'ahead']],
    ['closed', ['done', 'done', 'done', 'now', 'ahead']],
    ['sealed', ['done', 'done', 'done', 'done', 'now']],
    ['drawn', ['done', 'done', 'done', 'done', 'done']],
    ['concluded', ['done', 'done', 'done', 'done', 'done']],
  ] as const)('marks the steps of a draw that is %s', (state, expected) => expect(marks({ state })).toEqual(expected))
  it('has nothing to do now in a draw that has ended without a result', () => {
    expect(marks({ state: 'cancelled' })).not.toContain('now')
    expect(marks({ state: 'failed' })).not.toContain('now')
    expect(marks({ state: 'cancelled' })[3]).toBe('ahead')
  })
  it('does not call a closed list done that is empty', () => {
    expect(marks({ state: 'closed', counts: empty })).toEqual(['done', 'done', 'now', 'ahead', 'ahead'])
  })
})

describe('drawInterval', () => {
  const job = (state: OfficeDraw['jobs'][number]['state']) => ({
    id: '1',
    kind: 'seal',
    state,
    at: '2026-09-20T10:00:00Z',
    tries: 1,
    error: null,
  })
  it('looks often while a job runs or the draw is near, and never once all is settled', () => {
    expect(drawInterval(officeDraw({ jobs: [job('running')] }))).toBe(2_000)
    expect(drawInterval(officeDraw({ jobs: [job('waiting')] }))).toBe(2_000)
    expect(drawInterval(officeDraw({ jobs: [{ ...job('waiting'), at: '2026-09-20T10:00:01Z' }] }))).toBe(15_000)
    expect(drawInterval(officeDraw({ state: 'sealed', drawAt: '2026-09-20T10:00:59Z' }))).toBe(2_000)
    expect(drawInterval(officeDraw({ state: 'sealed', drawAt: '2026-09-20T10:01:01Z' }))).toBe(15_000)
    expect(drawInterval(officeDraw({ state: 'drawn' }))).toBe(false)
    const mail = { ...officeDraw().mail, result: { queued: 1, sent: 0, failed: 0 } }
    expect(drawInterval(officeDraw({ state: 'drawn', mail }))).toBe(2_000)
  })
})

describe('changesOf', () => {
  const of = (before: unknown, after: unknown) => changesOf(before, after, 'Europe/London')
  it('tells only what differs, in words', () => {
    expect(
      of(
        { name: 'Ines', tickets: 1200, email: null, closesAt: '2026-07-02T17:00:00.000Z' },
        { name: 'Ines', tickets: 12, email: 'i@x.example', closesAt: '2026-12-02T17:00:00.000Z' },
      ),
    ).toEqual([
      { field: 'Tickets', before: '1,200', after: '12' },
      { field: 'E-mail address', before: null, after: 'i@x.example' },
      // Summer time in July, none in December.
      { field: 'Closing time', before: 'Thursday 2 July 2026 at 18:00', after: 'Wednesday 2 December 2026 at 17:00' },
    ])
  })
  it('reads amounts and rules as people do', () => {
    expect(
      of({ value: { minor: 250, currency: 'GBP' }, rule: 'one-prize-each' }, { value: null, rule: 'every-ticket' }),
    ).toEqual([
      { field: 'Value', before: '£2.50', after: null },
      { field: 'Rule', before: 'One prize each', after: 'Every ticket can win once' },
    ])
  })
  it('tells a time typed in the zone of the organisation as it was typed', () => {
    expect(of({ drawAt: '2026-07-02T17:00' }, { drawAt: '2026-07-02T18:30' })).toEqual([
      { field: 'Draw time', before: 'Thursday 2 July 2026 at 17:00', after: 'Thursday 2 July 2026 at 18:30' },
    ])
  })
  it('follows prizes by their codes, not by their places', () => {
    const boat = { code: 'p1', name: 'Boat', quantity: 1 }
    const jam = { code: 'p2', name: 'Jam', quantity: 4 }
    expect(of([boat, jam], [jam, { ...boat, quantity: 2 }])).toEqual([
      { field: 'Prize 1', before: 'name Boat, quantity 1', after: 'name Boat, quantity 2' },
    ])
    expect(of([boat], [])).toEqual([{ field: 'Prize 1', before: 'name Boat, quantity 1', after: null }])
  })
  it('shows of long texts the passage that differs', () => {
    const long = 'a'.repeat(1000)
    const [change] = of({ terms: `${long}old${long}` }, { terms: `${long}new${long}` })
    expect(change?.before).toMatch(/^… a+olda+ …$/)
    expect(change?.after).toMatch(/^… a+newa+ …$/)
    expect(change?.after?.length).toBeLessThan(260)
  })
  it('has nothing to tell where nothing was kept', () => {
    expect(of(null, null)).toEqual([])
    expect(of({ a: 1 }, { a: 1 })).toEqual([])
  })
  it('names fields that it does not know', () => expect(fieldWords('promoterName')).toBe('Promoter name'))
})
