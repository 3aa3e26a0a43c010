// The development chain of the format's section 3: anybody can make its rounds, because its secret is published.
import { bls12_381 } from '@noble/curves/bls12-381.js'
import { bigEndian, hex, sha256, unhex } from './record.ts'

const SECRET = '2275e931c17cd0a8a44ab5ad0a520359a2c6043635bd2a939f500ea4da07a0e2'
const TAG = 'BLS_SIG_BLS12381G1_XMD:SHA-256_SSWU_RO_NUL_'
const { shortSignatures } = bls12_381

export const developmentChain = {
  chain: '4fcc0ef382cd4fd48ab4445bbd17747645fff1315b2a4facd0ed570d284b4ebe',
  genesisTime: 1767225600,
  period: 3,
  publicKey: hex(shortSignatures.getPublicKey(unhex(SECRET)).toBytes(true)),
  scheme: 'bls-unchained-g1-rfc9380',
}

/** The signature over a round, 48 bytes. */
export function signRound(round: number): Buffer {
  const message = shortSignatures.hash(sha256(bigEndian(round, 8)), TAG)
  return Buffer.from(shortSignatures.sign(message, unhex(SECRET)).toBytes(true))
}
