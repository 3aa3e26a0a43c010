import { bls12_381 } from '@noble/curves/bls12-381.js'
import { hexBytes, toHex } from '../bytes/hex.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { BEACON_TAG, roundMessage } from './beacon.ts'

/** Published on purpose, so that nobody takes a draw on this chain for a real one (PROTOCOL section 3). */
export const DEVELOPMENT_SECRET = '2275e931c17cd0a8a44ab5ad0a520359a2c6043635bd2a939f500ea4da07a0e2'

/** A round of the development chain: its 48-byte signature and 32-byte randomness in hex. Requires round ≥ 1. */
export function signDevelopmentRound(
  sha256: Sha256,
  round: number,
  secret: string = DEVELOPMENT_SECRET,
): { readonly round: number; readonly signature: string; readonly randomness: string } {
  const message = bls12_381.shortSignatures.hash(roundMessage(sha256, round), BEACON_TAG)
  const signature = bls12_381.shortSignatures.sign(message, hexBytes(secret, 32)).toBytes(true)
  return { round, signature: toHex(signature), randomness: toHex(sha256(signature)) }
}

/** The 96-byte compressed public key of a chain's 32-byte secret, both in hex. */
export function chainPublicKey(secret: string): string {
  return toHex(bls12_381.shortSignatures.getPublicKey(hexBytes(secret, 32)).toBytes(true))
}
