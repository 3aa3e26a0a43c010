import { describe, expect, it } from 'vitest'
import { barWords, coinWords, walkSides, walkSize } from '#src/features/ladder/words.ts'
import { fraction, oneIn } from '#src/ui/chance-words.ts'

const words = (left: number, right: number, flips: string, side: 'H' | 'T') => {
  const { account, verdict } = coinWords([left, right, flips, side])
  return `${account} ${verdict}`.replace(/\u00a0/g, ' ')
}

describe('the words of a coin', () => {
  it('say which flip settled it against which digit', () => {
    expect(words(116, 41, '0', 'H')).toBe('The first flip, 0, is lower than the digit, 1. Heads, so left.')
    expect(words(1, 2, '1', 'T')).toBe('The first flip, 1, is higher than the digit, 0. Tails, so right.')
    expect(words(3, 5, '00', 'H')).toBe(
      'The first flip equalled its digit. The second, 0, is lower than its digit, 1. Heads, so left.',
    )
    expect(words(1, 2, '011', 'T')).toBe(
      'The first two flips equalled their digits. The third, 1, is higher than its digit, 0. Tails, so right.',
    )
  })
  it('say that the digits ran out', () => {
    expect(words(3, 5, '011', 'T')).toBe(
      'The first two flips equalled their digits. The third, 1, equals its digit, and the chance has no digit left to beat. Tails, so right.',
    )
    expect(words(1, 1, '1', 'T')).toBe(
      'The first flip, 1, equals the digit, and the chance has no digit left to beat. Tails, so right.',
    )
  })
  it('say that no flip was needed where one side is empty', () => {
    expect(words(0, 12, '', 'T')).toBe(
      'Nobody is left on the left side, so this coin takes no flip. The walk goes right.',
    )
    expect(words(12, 0, '', 'H')).toBe(
      'Nobody is left on the right side, so this coin takes no flip. The walk goes left.',
    )
  })
})

describe('a bar, aloud', () => {
  it('gives both counts and the side', () => {
    expect(barWords([1, 8_419, '1', 'T'])).toBe(
      '1 ticket on the left, 8,419 on the right; the coin came up tails, so right',
    )
    expect(barWords([0, 7, '', 'T'])).toBe('0 tickets on the left, 7 on the right; the walk goes right')
  })
})

describe('a walk in words', () => {
  it('counts coins and flips', () => {
    expect(walkSize([])).toBe('No coin needed')
    expect(walkSize([[0, 1, '', 'T']])).toBe('One coin, no flip')
    expect(walkSize([[1, 1, '0', 'H']])).toBe('One coin, 1 flip')
    expect(
      walkSize([
        [1, 2, '011', 'T'],
        [0, 2, '', 'T'],
      ]),
    ).toBe('Two coins, 3 flips')
    expect(
      walkSides([
        [1, 2, '011', 'T'],
        [2, 1, '0', 'H'],
      ]),
    ).toBe('tails, heads')
  })
})

describe('a chance in words', () => {
  it('says about only where it rounds', () => {
    expect(oneIn(1, 154)).toBe('1 in 154')
    expect(oneIn(5, 8420)).toBe('1 in 1,684')
    expect(oneIn(12, 154)).toBe('about 1 in 13')
    expect(oneIn(20, 36)).toBe('about 1 in 1.8')
    expect(oneIn(2, 4)).toBe('1 in 2')
    expect(oneIn(4, 4)).toBe('certain')
    expect(oneIn(0, 4)).toBe('none')
  })
  it('rounds exactly where floating point would not', () => {
    // 9007199254740991 / 2 = 4503599627370495.5 rounds up.
    expect(oneIn(2, Number.MAX_SAFE_INTEGER)).toBe('about 1 in 4,503,599,627,370,496')
  })
  it('gives the exact figure as it stands, not reduced', () => {
    expect(fraction(5, 8420)).toBe('5/8420')
  })
})
