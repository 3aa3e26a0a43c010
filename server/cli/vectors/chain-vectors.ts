import { toHex } from '#shared/bytes/hex.ts'
import { verifyBeaconRound } from '#shared/protocol/beacon.ts'
import { chainPublicKey, DEVELOPMENT_SECRET, signDevelopmentRound } from '#shared/protocol/development-chain.ts'
import { DEVELOPMENT_CHAIN, networkOf, QUICKNET } from '#shared/protocol/networks.ts'
import { expectMembers, expectSame, hash, listOf, numberOf, reading, textOf, WrongValue } from './wrong-value.ts'

export const CHAIN_FIELDS = ['publicKey', 'chain', 'genesisTime', 'period', 'scheme', 'rounds'] as const
const ROUND_FIELDS = ['round', 'signature', 'randomness', 'ok'] as const

/** A beacon chain: its parameters, its secret where given, and rounds that verify or do not, as `ok` says. */
export function checkChain(name: string, value: unknown): number {
  const m = expectMembers(name, value, CHAIN_FIELDS, ['secret'])
  const publicKey = textOf(name, 'publicKey', m.publicKey)
  const secret = m.secret === undefined ? null : textOf(name, 'secret', m.secret)
  if (secret !== null) {
    expectSame(
      name,
      'publicKey',
      publicKey,
      reading(name, 'secret', () => chainPublicKey(secret)),
    )
  }
  checkParameters(name, m, publicKey)
  const rounds = listOf(name, 'rounds', m.rounds)
  for (const [i, value] of rounds.entries()) checkRound(`${name}, rounds[${i}]`, value, publicKey, secret)
  return rounds.length
}

function checkParameters(name: string, m: Readonly<Record<string, unknown>>, publicKey: string): void {
  const parameters = {
    chain: textOf(name, 'chain', m.chain),
    genesisTime: numberOf(name, 'genesisTime', m.genesisTime),
    period: numberOf(name, 'period', m.period),
    publicKey,
    scheme: textOf(name, 'scheme', m.scheme),
  }
  if (networkOf(parameters) !== null) return
  // A chain of somebody's own, told by its secret, key and name: only its arithmetic can be checked.
  const own = typeof m.secret === 'string' && m.secret !== DEVELOPMENT_SECRET
  if (own && [QUICKNET, DEVELOPMENT_CHAIN].every((n) => n.publicKey !== publicKey && n.chain !== parameters.chain)) {
    expectSame(name, 'scheme', parameters.scheme, QUICKNET.scheme)
    return
  }
  // Not a pinned network: say which parameter differs from the one that it comes nearest to.
  const pinned =
    m.secret === DEVELOPMENT_SECRET || publicKey === DEVELOPMENT_CHAIN.publicKey || m.chain === DEVELOPMENT_CHAIN.chain
      ? DEVELOPMENT_CHAIN
      : QUICKNET
  for (const field of ['chain', 'genesisTime', 'period', 'publicKey', 'scheme'] as const) {
    expectSame(name, field, parameters[field], pinned[field])
  }
}

function checkRound(name: string, value: unknown, publicKey: string, secret: string | null): void {
  const m = expectMembers(name, value, ROUND_FIELDS)
  const round = numberOf(name, 'round', m.round)
  const signature = textOf(name, 'signature', m.signature)
  const verified = verifyBeaconRound(hash, { publicKey, round, signature })
  if (m.ok === true && !verified.ok) throw new WrongValue(name, verified.error.at, verified.error.message)
  expectSame(name, 'ok', m.ok, verified.ok)
  if (!verified.ok) return
  expectSame(name, 'randomness', m.randomness, toHex(verified.value))
  if (secret === null) return
  const signed = signDevelopmentRound(hash, round, secret)
  if (signed.signature !== signature) throw new WrongValue(name, 'signature', 'the secret signs this round otherwise')
}
