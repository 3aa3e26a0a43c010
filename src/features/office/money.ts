import { minorDigits } from '#src/ui/format-number.ts'

/** How an amount is typed: `2.50`. Empty where there is none. */
export function moneyText(amount: { readonly minor: number; readonly currency: string } | null): string {
  if (!amount) return ''
  const digits = minorDigits(amount.currency)
  const padded = String(amount.minor).padStart(digits + 1, '0')
  return digits === 0 ? padded : `${padded.slice(0, -digits)}.${padded.slice(-digits)}`
}

/**
 * An amount as typed, exactly, in minor units: `2.50`, `2`, `£2.50`, `1,250`. null for nothing typed; undefined for what
 * is no amount, has too many decimals or is larger than can be kept.
 */
export function parseMoney(text: string, currency: string): { minor: number; currency: string } | null | undefined {
  const bare = text
    .trim()
    .replace(/^(?:[£$€]|[A-Za-z]{3}\s?)/, '')
    .replace(/\s/g, '')
  if (bare === '') return text.trim() === '' ? null : undefined
  const match = /^(\d{1,3}(?:,\d{3})+|\d+)(?:\.(\d+))?$/.exec(bare)
  if (!match) return undefined
  const digits = minorDigits(currency)
  const decimals = match[2] ?? ''
  if (decimals.length > digits) return undefined
  const minor = Number((match[1] as string).replaceAll(',', '') + decimals.padEnd(digits, '0'))
  return Number.isSafeInteger(minor) ? { minor, currency } : undefined
}
