import { money } from '#shared/schemas/values.ts'
import { formatMoney, formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'

/** One field of an audit entry, in words. null: there was nothing before, or is nothing after. */
export interface Change {
  readonly field: string
  readonly before: string | null
  readonly after: string | null
}

const FIELDS: Record<string, string> = {
  slug: 'Address of the page',
  label: 'Announced as',
  email: 'E-mail address',
  phone: 'Telephone',
  numbers: 'Ticket numbers',
  closesAt: 'Closing time',
  drawAt: 'Draw time',
  digest: 'Seal',
  code: 'Prize',
}

const VALUES: Record<string, string> = {
  'one-prize-each': 'One prize each',
  'every-ticket': 'Every ticket can win once',
}

/** Longest text shown whole; of longer ones the passage around the first difference is. */
const WHOLE = 240
const AROUND = 100

/** The fields that an audit entry changed, in the order in which it has them. Lists of things with a code: one each. */
export function changesOf(before: unknown, after: unknown, timeZone: string): readonly Change[] {
  const [old, now] = [fieldsOf(before), fieldsOf(after)]
  const names = [...new Set([...old.keys(), ...now.keys()])]
  return names.flatMap((name): Change[] => {
    const [was, is] = [old.get(name), now.get(name)]
    if (same(was, is)) return []
    const texts = passages(valueWords(was, timeZone), valueWords(is, timeZone))
    return [{ field: fieldWords(name), ...texts }]
  })
}

function fieldsOf(value: unknown): ReadonlyMap<string, unknown> {
  if (Array.isArray(value)) {
    return new Map(
      value.map((item, index) => {
        const code = isRecord(item) && typeof item.code === 'string' ? item.code : String(index + 1)
        return [`${code}`, isRecord(item) ? withoutCode(item) : item]
      }),
    )
  }
  return new Map(isRecord(value) ? Object.entries(value) : [])
}

const isRecord = (value: unknown): value is Record<string, unknown> =>
  typeof value === 'object' && value !== null && !Array.isArray(value)

const withoutCode = ({ code: _, ...rest }: Record<string, unknown>) => rest

const same = (a: unknown, b: unknown) => JSON.stringify(a ?? null) === JSON.stringify(b ?? null)

/** `promoterName` as "Promoter name"; `p3` as "Prize 3". */
export function fieldWords(name: string): string {
  const known = FIELDS[name]
  if (known) return known
  const prize = /^p(\d+)$/.exec(name)
  if (prize) return `Prize ${prize[1]}`
  const words = name.replace(/([a-z])([A-Z])/g, '$1 $2').toLowerCase()
  return words.charAt(0).toUpperCase() + words.slice(1)
}

function valueWords(value: unknown, timeZone: string): string | null {
  if (value === undefined || value === null || value === '') return null
  if (typeof value === 'boolean') return value ? 'Yes' : 'No'
  if (typeof value === 'number') return formatNumber(value)
  if (typeof value === 'string') {
    if (/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d(?:\.\d+)?Z$/.test(value)) return formatMoment(value, timeZone)
    // Typed as the clock on the wall shows it: in its own zone already.
    if (/^\d{4}-\d\d-\d\dT\d\d:\d\d$/.test(value)) return formatMoment(`${value}:00Z`, 'UTC')
    return VALUES[value] ?? value
  }
  const amount = money.safeParse(value)
  if (amount.success) return formatMoney(amount.data)
  if (Array.isArray(value)) return value.map((item) => valueWords(item, timeZone) ?? 'none').join('; ')
  if (isRecord(value)) {
    return Object.entries(value)
      .map(([name, part]) => `${fieldWords(name).toLowerCase()} ${valueWords(part, timeZone) ?? 'none'}`)
      .join(', ')
  }
  return String(value)
}

function passages(before: string | null, after: string | null): Pick<Change, 'before' | 'after'> {
  if ((before?.length ?? 0) <= WHOLE && (after?.length ?? 0) <= WHOLE) return { before, after }
  let at = 0
  while (before && after && at < before.length && before[at] === after[at]) at++
  return { before: passage(before, at), after: passage(after, at) }
}

function passage(text: string | null, at: number): string | null {
  if (text === null || text.length <= WHOLE) return text
  const from = Math.max(0, at - AROUND)
  const to = Math.min(text.length, from + WHOLE)
  return `${from > 0 ? '… ' : ''}${text.slice(from, to)}${to < text.length ? ' …' : ''}`
}
