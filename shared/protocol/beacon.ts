import { bls12_381 } from '@noble/curves/bls12-381.js'
import { equalBytes, u64 } from '../bytes/bytes.ts'
import { hexBytes, isHex } from '../bytes/hex.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'

/** Rounds of a drand chain of scheme `bls-unchained-g1-rfc9380` (PROTOCOL section 3). */

/** The domain separation tag of the scheme's hash to G1. */
export const BEACON_TAG = 'BLS_SIG_BLS12381G1_XMD:SHA-256_SSWU_RO_NUL_'

/** Why a round is refused. */
export type BeaconCode = 'round-wrong' | 'public-key-wrong' | 'signature-malformed' | 'signature-wrong'

/** A round as a beacon publishes it; hex of 96, of 48 bytes. All of it may come from an attacker. */
export interface BeaconRound {
  readonly publicKey: string
  readonly round: number
  readonly signature: string
}

/** The message that a round signs: SHA256(u64(round)). */
export function roundMessage(sha256: Sha256, round: number): Uint8Array {
  return sha256(u64(round))
}

/**
 * Verifies a round's signature under a chain's key and returns its randomness, SHA256(signature), 32 bytes. Both
 * points must be canonical compressed encodings, on their curves, in their subgroups and not at infinity. About 50 ms.
 */
export function verifyBeaconRound(sha256: Sha256, input: BeaconRound): Result<Uint8Array, Failure<BeaconCode>> {
  const { publicKey, round, signature } = input
  if (!Number.isSafeInteger(round) || round < 1) return fail('round-wrong', 'round', 'Rounds count from 1.')
  const key = isHex(publicKey, 96) ? decodePoint(bls12_381.G2.Point, hexBytes(publicKey)) : null
  if (key === null) return fail('public-key-wrong', 'publicKey', 'The public key is not a point of its subgroup.')
  const bytes = isHex(signature, 48) ? hexBytes(signature) : null
  const point = bytes === null ? null : decodePoint(bls12_381.G1.Point, bytes)
  if (bytes === null || point === null) {
    return fail('signature-malformed', 'signature', 'The signature is not a point of its subgroup.')
  }
  const message = bls12_381.shortSignatures.hash(roundMessage(sha256, round), BEACON_TAG)
  if (!bls12_381.shortSignatures.verify(point, message, key)) {
    return fail('signature-wrong', 'signature', 'The signature does not belong to this round of this chain.')
  }
  return ok(sha256(bytes))
}

interface DecodedPoint {
  assertValidity(): void
  isTorsionFree(): boolean
  is0(): boolean
  toBytes(compressed: boolean): Uint8Array
}

function decodePoint<Point extends DecodedPoint>(
  curve: { fromBytes(bytes: Uint8Array): Point },
  bytes: Uint8Array,
): Point | null {
  try {
    const point = curve.fromBytes(bytes)
    point.assertValidity()
    const sound = !point.is0() && point.isTorsionFree() && equalBytes(point.toBytes(true), bytes)
    return sound ? point : null
  } catch {
    return null
  }
}
