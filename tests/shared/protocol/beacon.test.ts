import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { bls12_381 } from '@noble/curves/bls12-381.js'
import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { verifyBeaconRound } from '#shared/protocol/beacon.ts'
import { chainPublicKey, DEVELOPMENT_SECRET, signDevelopmentRound } from '#shared/protocol/development-chain.ts'
import { DEVELOPMENT_CHAIN, latestRoundAt, QUICKNET, roundTime } from '#shared/protocol/networks.ts'

interface Round {
  chain: string
  scheme: string
  public_key: string
  round: number
  signature: string
  randomness: string
}
interface Drand {
  good: Round[]
  chains: Record<string, { public_key: string; hash: string; period: number; genesis_time: number; schemeID: string }>
  rules: { round_time_vectors: { genesis: number; period: number; round: number; time_ms: number }[] }
}
// drand/drand-client, noislabs/drand-verify and drand/drand test data; sources in the file.
const drand = JSON.parse(readFileSync(join(import.meta.dirname, '../../outside/drand_beacons.json'), 'utf8')) as Drand
const ours = drand.good.filter((round) => round.scheme === QUICKNET.scheme)
const code = (publicKey: string, round: number, signature: string): string => {
  const result = verifyBeaconRound(sha256, { publicKey, round, signature })
  return result.ok ? toHex(result.value) : result.error.code
}
const first = ours[0] as Round

describe('real rounds of drand', () => {
  test('there are six of our scheme', () => expect(ours.length).toBe(6))
  test.each(ours.map((r) => [`${r.chain} ${r.round}`, r] as const))('%s verifies', (_, r) => {
    expect(code(r.public_key, r.round, r.signature)).toBe(r.randomness)
    expect(code(r.public_key, r.round + 1, r.signature)).toBe('signature-wrong')
  })
  test('rounds of other schemes and of another chain are refused', () => {
    for (const r of drand.good.filter((round) => round.scheme !== QUICKNET.scheme)) {
      expect(code(r.public_key, r.round, r.signature)).toBe('public-key-wrong')
      expect(code(QUICKNET.publicKey, r.round, r.signature)).toBe('signature-malformed')
    }
    expect(code(DEVELOPMENT_CHAIN.publicKey, first.round, first.signature)).toBe('signature-wrong')
    // The same key, a sound signature of another round.
    expect(code(first.public_key, first.round, (ours[1] as Round).signature)).toBe('signature-wrong')
  })
  test('the pinned network is the one that drand publishes', () => {
    const chain = drand.chains.quicknet as Drand['chains'][string]
    expect(QUICKNET).toEqual({
      chain: chain.hash,
      genesisTime: chain.genesis_time,
      period: chain.period,
      publicKey: chain.public_key,
      scheme: chain.schemeID,
    })
  })
  test.each(drand.rules.round_time_vectors)('round $round at its time', ({ genesis, period, round, time_ms }) => {
    const clock = { genesisTime: genesis, period }
    expect(roundTime(clock, round)).toBe(time_ms / 1000)
    expect(latestRoundAt(clock, time_ms / 1000)).toBe(round)
    expect(latestRoundAt(clock, time_ms / 1000 - 1)).toBe(round - 1)
    expect(latestRoundAt(clock, genesis - 1)).toBeNull()
    expect(() => latestRoundAt(clock, Number.NaN)).toThrow(RangeError)
    expect(() => roundTime(clock, 0)).toThrow(RangeError)
  })
})

describe('points that are none', () => {
  const infinity1 = `c0${'0'.repeat(94)}`
  const infinity2 = `c0${'0'.repeat(190)}`
  /** A point on the curve but outside its subgroup: the first x whose curve point has another order. */
  function outsideSubgroup(): string {
    for (let x = 1; x < 200; x += 1) {
      const bytes = new Uint8Array(48)
      bytes[0] = 0x80
      bytes[47] = x
      try {
        const { Fp } = bls12_381.fields
        const value = Fp.create(BigInt(x))
        const y = Fp.sqrt(Fp.add(Fp.pow(value, 3n), 4n))
        const point = bls12_381.G1.Point.fromAffine({ x: value, y })
        if (!point.isTorsionFree()) return toHex(bytes)
      } catch {
        // No point has this x.
      }
    }
    throw new Error('no such point')
  }
  test.each([
    ['infinity', infinity1],
    ['a point outside the subgroup', outsideSubgroup()],
    ['an x beyond the field', `9f${'f'.repeat(94)}`],
    ['all zeros', '0'.repeat(96)],
    ['capitals', first.signature.toUpperCase()],
    ['47 bytes', first.signature.slice(2)],
    ['nothing', ''],
  ])('a signature that is %s', (_, signature) => {
    expect(code(first.public_key, first.round, signature)).toBe('signature-malformed')
  })
  test.each([
    ['infinity', infinity2],
    ['a G1 point', first.signature],
    ['all zeros', '0'.repeat(192)],
  ])('a key that is %s', (_, key) => {
    expect(code(key, first.round, first.signature)).toBe('public-key-wrong')
  })
  test.each([0, -1, 1.5, Number.NaN, 2 ** 53, '123', true])('round %s', (round) => {
    expect(code(first.public_key, round as number, first.signature)).toBe('round-wrong')
  })
})

test('the development chain signs rounds that verify under its pinned key', () => {
  expect(chainPublicKey(DEVELOPMENT_SECRET)).toBe(DEVELOPMENT_CHAIN.publicKey)
  const signed = signDevelopmentRound(sha256, 4242)
  expect(code(DEVELOPMENT_CHAIN.publicKey, 4242, signed.signature)).toBe(signed.randomness)
})
