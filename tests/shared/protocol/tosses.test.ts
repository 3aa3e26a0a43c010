import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { drawKey, packBits, peres as referencePeres } from '#tests/reference/record.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { bitText } from '#shared/sampling/extractors.ts'
import { deriveDrawKey, tossDigest } from '#shared/protocol/draw-key.ts'
import { checkTosses, needsAnotherRound, tossBits } from '#shared/protocol/tosses.ts'

const plan = { minimumBits: 8, roundLength: 8, witnesses: ['witness'] }
const code = (rounds: readonly string[], walkFlips: number | null = null, minimumBits = 8): string => {
  const result = checkTosses({ ...plan, minimumBits }, rounds, walkFlips)
  return result.ok ? `ok ${result.value.length}` : result.error.code
}
// Four unequal pairs: 4 bits by the pairing; what ψ adds comes from second order.
const MIXED = 'HTHTTHTH'
const FLAT = 'HHHHHHHH'
const bitsOf = (round: string): number => referencePeres(round).length

describe('rounds of tosses', () => {
  test('stop as soon as the minimum is reached, and never one later', () => {
    const each = bitsOf(MIXED)
    expect([each, bitsOf(FLAT)]).toEqual([4, 0])
    expect(code([MIXED])).toBe('too-few-bits')
    expect(code([MIXED, MIXED])).toBe('ok 8')
    expect(code([MIXED, MIXED, MIXED])).toBe('too-many-rounds')
    expect(code([MIXED, MIXED, FLAT])).toBe('too-many-rounds')
    expect(code([FLAT, MIXED, FLAT, MIXED])).toBe('ok 8')
    expect(code([])).toBe('too-few-bits')
  })
  test('in a tossed draw the walks may need more than the minimum', () => {
    expect(code([MIXED, MIXED], 8)).toBe('ok 8')
    expect(code([MIXED, MIXED], 9)).toBe('too-few-bits')
    expect(code([MIXED, MIXED, MIXED], 9)).toBe('ok 12')
    expect(code([MIXED, MIXED, MIXED], 8)).toBe('too-many-rounds')
    expect(code([MIXED], 0, 1)).toBe('ok 4')
    expect(code([MIXED, MIXED], 4, 1)).toBe('too-many-rounds')
  })
  test.each([
    ['a toss too few', [MIXED.slice(1)], 'round-length'],
    ['a toss too many', [`${MIXED}H`], 'round-length'],
    ['a stopped last round', [MIXED, 'HTHT'], 'round-length'],
    ['small letters', ['hthtthth'], 'toss-letter'],
    ['a toss struck out', ['HTHT-HTH'], 'toss-letter'],
    ['an empty round', [''], 'round-length'],
  ])('%s is refused', (_, rounds, expected) => {
    expect(code(rounds)).toBe(expected)
  })
  test('another round is needed exactly while a check would say too few', () => {
    expect(needsAnotherRound(plan, [], false)).toBe(true)
    expect(needsAnotherRound(plan, [MIXED], false)).toBe(true)
    expect(needsAnotherRound(plan, [MIXED, MIXED], false)).toBe(false)
    expect(needsAnotherRound(plan, [MIXED, MIXED], true)).toBe(true)
  })
  test('bits and their digest agree with the second implementation', () => {
    const round = fc.array(fc.constantFrom('H', 'T'), { minLength: 8, maxLength: 64 }).map((list) => list.join(''))
    fc.assert(
      fc.property(fc.array(round, { maxLength: 6 }), (rounds) => {
        const bits = rounds.map(referencePeres).join('')
        expect(bitText(tossBits(rounds))).toBe(bits)
        expect(toHex(tossDigest(sha256, tossBits(rounds)))).toBe(toHex(packBits(bits)))
      }),
      { seed: 37 },
    )
  })
})

describe('the draw key', () => {
  const bytes = fc.uint8Array({ minLength: 32, maxLength: 32 })
  test('agrees with the second implementation, whatever sources there are', () => {
    const bits = fc.option(fc.array(fc.constantFrom(0, 1), { maxLength: 100 }))
    fc.assert(
      fc.property(bytes, bytes, fc.option(bytes), bits, (sealDigest, seed, beaconRandomness, toss) => {
        const ours = deriveDrawKey(sha256, { sealDigest, seed, beaconRandomness, tossBits: toss })
        const theirs = drawKey(sealDigest, seed, beaconRandomness, toss === null ? null : toss.join(''))
        expect(toHex(ours)).toBe(theirs.toString('hex'))
      }),
      { seed: 41 },
    )
  })
  test('a trailing zero bit is not lost, and lengths are exact', () => {
    expect(toHex(tossDigest(sha256, [1]))).not.toBe(toHex(tossDigest(sha256, [1, 0])))
    const good = new Uint8Array(32)
    for (const bad of [new Uint8Array(31), new Uint8Array(33)]) {
      expect(() =>
        deriveDrawKey(sha256, { sealDigest: good, seed: bad, beaconRandomness: null, tossBits: null }),
      ).toThrow(RangeError)
    }
  })
})
