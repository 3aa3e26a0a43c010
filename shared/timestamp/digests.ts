import { sha1 } from '@noble/hashes/legacy.js'
import { sha256, sha384, sha512 } from '@noble/hashes/sha2.js'
import type { DigestName } from '#shared/timestamp/oids.ts'

const HASHES: Readonly<Record<DigestName, (bytes: Uint8Array) => Uint8Array>> = { sha1, sha256, sha384, sha512 }

/** The digest of some bytes by a named hash: authorities choose theirs (FIPS 180-4). */
export const digestBy = (name: DigestName, bytes: Uint8Array): Uint8Array => HASHES[name](bytes)
