/** Whole numbers with commas: 8,420. By own code, so that server and browser always agree. */
export function formatNumber(value: number | bigint): string {
  const digits = value.toString()
  const sign = digits.startsWith('-') ? '−' : ''
  return sign + digits.replace('-', '').replace(/\B(?=(\d{3})+(?!\d))/g, ',')
}

const SYMBOLS: Record<string, string> = { GBP: '£', EUR: '€', USD: '$', JPY: '¥' }
/** ISO 4217, list one: currencies whose minor unit is not a hundredth. */
const MINOR_DIGITS = new Map(
  Object.entries({
    0: 'BIF CLP DJF GNF ISK JPY KMF KRW PYG RWF UGX UYI VND VUV XAF XOF XPF',
    3: 'BHD IQD JOD KWD LYD OMR TND',
    4: 'CLF UYW',
  }).flatMap(([digits, currencies]) => currencies.split(' ').map((currency) => [currency, Number(digits)] as const)),
)

/** How many decimals an amount in this currency has. */
export const minorDigits = (currency: string): number => MINOR_DIGITS.get(currency) ?? 2

/** An amount in minor units as people write it: £25, £2.50, 1,200 NOK. */
export function formatMoney(amount: { readonly minor: number; readonly currency: string }): string {
  const places = minorDigits(amount.currency)
  const unit = 10 ** places
  const whole = Math.floor(amount.minor / unit)
  const rest = amount.minor % unit
  const figure = formatNumber(whole) + (rest === 0 ? '' : `.${rest.toString().padStart(places, '0')}`)
  const symbol = SYMBOLS[amount.currency]
  return symbol ? symbol + figure : `${figure} ${amount.currency}`
}

/** A size in bytes, rounded: 41 kB, 3.2 MB. */
export function formatBytes(bytes: number): string {
  if (bytes < 1000) return `${bytes} bytes`
  if (bytes < 1_000_000) return `${Math.round(bytes / 1000)} kB`
  return `${(bytes / 1_000_000).toFixed(1)} MB`
}

const WORDS = [
  'no',
  'one',
  'two',
  'three',
  'four',
  'five',
  'six',
  'seven',
  'eight',
  'nine',
  'ten',
  'eleven',
  'twelve',
  'thirteen',
  'fourteen',
  'fifteen',
  'sixteen',
  'seventeen',
  'eighteen',
  'nineteen',
  'twenty',
]
const ORDINALS = [
  'noughth',
  'first',
  'second',
  'third',
  'fourth',
  'fifth',
  'sixth',
  'seventh',
  'eighth',
  'ninth',
  'tenth',
  'eleventh',
  'twelfth',
  'thirteenth',
  'fourteenth',
  'fifteenth',
  'sixteenth',
  'seventeenth',
  'eighteenth',
  'nineteenth',
  'twentieth',
]

/** Small numbers as words (up to twenty), others in figures. Nought is "no". */
export function numberWord(value: number): string {
  return WORDS[value] ?? formatNumber(value)
}

/** first, second, … twentieth, 21st, 22nd. */
export function ordinal(value: number): string {
  const word = ORDINALS[value]
  if (word) return word
  const ending = value % 100 > 10 && value % 100 < 14 ? 'th' : (['th', 'st', 'nd', 'rd'][value % 10] ?? 'th')
  return formatNumber(value) + ending
}

/** "1 ticket", "8,420 tickets"; with `words`, "one ticket", "five prizes". */
export function countOf(value: number, one: string, many = `${one}s`, words = false): string {
  return `${words ? numberWord(value) : formatNumber(value)} ${value === 1 ? one : many}`
}

export function capitalise(sentence: string): string {
  return sentence.charAt(0).toUpperCase() + sentence.slice(1)
}
