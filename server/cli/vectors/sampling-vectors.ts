import { hexBytes } from '#shared/bytes/hex.ts'
import { tossCoin, type Flip } from '#shared/sampling/coin.ts'
import { bitText, multiLevel, parseTosses, peres, vonNeumann } from '#shared/sampling/extractors.ts'
import { derivedFlips } from '#shared/sampling/flips.ts'
import { expectMembers, expectSame, hash, numberOf, reading, textOf, WrongValue } from './wrong-value.ts'

export const COIN_FIELDS = ['a', 'b', 'flips', 'used', 'heads'] as const
export const EXTRACTOR_FIELDS = ['tosses', 'vonNeumann', 'multiLevel', 'peres'] as const
export const FLIPS_FIELDS = ['drawKey', 'pick', 'first600Flips'] as const

/** A coin: the flips it reads of those given, and how it falls (section 6). */
export function checkCoin(name: string, value: unknown): void {
  const m = expectMembers(name, value, COIN_FIELDS)
  const flips = textOf(name, 'flips', m.flips)
  if (!/^[01]*$/.test(flips)) throw new WrongValue(name, 'flips', 'flips are written as 0 and 1')
  let at = 0
  const stream = {
    next: (): Flip | -1 => {
      if (at >= flips.length) return -1
      at += 1
      return flips[at - 1] === '1' ? 1 : 0
    },
  }
  const fall = reading(name, 'a/b', () => tossCoin(numberOf(name, 'a', m.a), numberOf(name, 'b', m.b), stream))
  if (fall === null) throw new WrongValue(name, 'flips', 'the flips run out before the coin has fallen')
  expectSame(name, 'used', m.used, fall.flips)
  expectSame(name, 'heads', m.heads, fall.heads)
}

/** What three extractors make of tosses (section 4, and the two that came before Peres's). */
export function checkExtractor(name: string, value: unknown): void {
  const m = expectMembers(name, value, EXTRACTOR_FIELDS)
  const tosses = reading(name, 'tosses', () => parseTosses(textOf(name, 'tosses', m.tosses)))
  expectSame(name, 'vonNeumann', m.vonNeumann, bitText(vonNeumann(tosses)))
  expectSame(name, 'multiLevel', m.multiLevel, bitText(multiLevel(tosses)))
  expectSame(name, 'peres', m.peres, bitText(peres(tosses)))
}

/** The first 600 flips of a pick (section 5). */
export function checkFlips(name: string, value: unknown): void {
  const m = expectMembers(name, value, FLIPS_FIELDS)
  const key = reading(name, 'drawKey', () => hexBytes(textOf(name, 'drawKey', m.drawKey), 32))
  const stream = reading(name, 'pick', () => derivedFlips(hash, key, numberOf(name, 'pick', m.pick)))
  expectSame(name, 'first600Flips', m.first600Flips, Array.from({ length: 600 }, () => stream.next()).join(''))
}
