import { assertBytes, hasLoneSurrogate, put, utf8, writeUtf8 } from '../bytes/bytes.ts'
import { createHmac, type Sha256 } from '../bytes/hashing.ts'
import { members, readShape, refuse, text, type Members, type ShapeCode } from './shape.ts'
import type { Failure, Result } from '../bytes/result.ts'

/** Who stands behind a leaf, as hashed (PROTOCOL section 1): four strings, contact and numbers may be empty. */
export interface Identity {
  readonly contact: string
  readonly name: string
  readonly numbers: string
  readonly reference: string
}

/** The 32 characters of references: none that can be taken for another when read aloud or by eye. */
export const REFERENCE_ALPHABET = '23456789ABCDEFGHJKLMNPQRSTUVWXYZ'
export const MIN_REFERENCE_LENGTH = 8
export const MAX_REFERENCE_LENGTH = 64

/** Whether a text is a reference: 8 to 64 characters of `REFERENCE_ALPHABET` (section 1). */
export function isReference(value: unknown): value is string {
  return typeof value === 'string' && /^[23456789ABCDEFGHJKLMNPQRSTUVWXYZ]{8,64}$/.test(value)
}

/**
 * A reference out of entropy: five bits of each byte, so all 32 characters are equally likely. Requires 8 to 64 bytes.
 * Twelve characters are 60 bits: the caller still makes sure that none comes twice in a seal.
 */
export function referenceFromEntropy(entropy: Uint8Array): string {
  if (entropy.length < MIN_REFERENCE_LENGTH || entropy.length > MAX_REFERENCE_LENGTH) {
    throw new RangeError('a reference has 8 to 64 characters')
  }
  let reference = ''
  for (const byte of entropy) reference += REFERENCE_ALPHABET[byte & 31]
  return reference
}

/** Orders references as leaves stand: ascending by character code (section 1). */
export function compareReferences(left: string, right: string): number {
  return left < right ? -1 : left > right ? 1 : 0
}

/** Reads an identity strictly out of parsed JSON; throws inside `readShape`. */
export function readIdentity(value: unknown, at: string): Identity {
  const identity: Members<'contact' | 'name' | 'numbers' | 'reference'> = members(
    value,
    ['contact', 'name', 'numbers', 'reference'],
    at,
  )
  if (!isReference(identity.reference)) {
    refuse('text-wrong', `${at}.reference`, 'A reference has 8 to 64 characters of 2 to 9 and A to Z without I and O.')
  }
  return {
    contact: text(identity.contact, `${at}.contact`, 'may-be-empty'),
    name: text(identity.name, `${at}.name`),
    numbers: text(identity.numbers, `${at}.numbers`, 'may-be-empty'),
    reference: identity.reference as string,
  }
}

/** Reads an identity strictly, as a result. */
export function parseIdentity(value: unknown): Result<Identity, Failure<ShapeCode>> {
  return readShape(() => readIdentity(value, 'identity'))
}

const LABEL_INFO = utf8('label')
const IDENTITY_INFO = utf8('identity')

/** The two 32-byte salts of an entrant. */
export interface Salts {
  readonly labelSalt: Uint8Array
  readonly identitySalt: Uint8Array
}

/** The three 32-byte commitments of an entrant. */
export interface Commitments {
  readonly labelCommit: Uint8Array
  readonly identityCommit: Uint8Array
  readonly entryCommit: Uint8Array
}

/** Salts of an entrant out of the draw's 32-byte blinding key and their reference (section 1). */
export function deriveSalts(sha256: Sha256, blindingKey: Uint8Array, reference: string): Salts {
  return createSaltDeriver(sha256, blindingKey)(reference)
}

/** As `deriveSalts`, for many entrants of one draw. */
export function createSaltDeriver(sha256: Sha256, blindingKey: Uint8Array): (reference: string) => Salts {
  if (blindingKey.length !== 32) throw new RangeError('a blinding key has 32 bytes')
  const hmac = createHmac(sha256)
  const buffer = new Uint8Array(3 * MAX_REFERENCE_LENGTH)
  return (reference) => {
    const entrantSecret = hmac(blindingKey, buffer.subarray(0, writeUtf8(buffer, 0, reference)))
    return { labelSalt: hmac(entrantSecret, LABEL_INFO), identitySalt: hmac(entrantSecret, IDENTITY_INFO) }
  }
}

/** SHA256(0x03 || labelSalt || label) (section 1). Throws a RangeError for a lone surrogate. */
export function labelCommitment(sha256: Sha256, labelSalt: Uint8Array, label: string): Uint8Array {
  return createCommitter(sha256).label(labelSalt, label)
}

/** SHA256(0x04 || identitySalt || JCS(identity)) (section 1). */
export function identityCommitment(sha256: Sha256, identitySalt: Uint8Array, identity: Identity): Uint8Array {
  return createCommitter(sha256).identity(identitySalt, identity)
}

/** SHA256(0x02 || labelCommit || identityCommit) (section 1). */
export function entryCommitment(sha256: Sha256, labelCommit: Uint8Array, identityCommit: Uint8Array): Uint8Array {
  return createCommitter(sha256).entry(labelCommit, identityCommit)
}

/** All commitments of an entrant (section 1). */
export function commitEntrant(sha256: Sha256, salts: Salts, label: string, identity: Identity): Commitments {
  return createCommitter(sha256).entrant(salts, label, identity)
}

/** The commitments of section 1 with buffers of their own, for many entrants one after the other. */
export interface Committer {
  label(labelSalt: Uint8Array, label: string): Uint8Array
  identity(identitySalt: Uint8Array, identity: Identity): Uint8Array
  entry(labelCommit: Uint8Array, identityCommit: Uint8Array): Uint8Array
  entrant(salts: Salts, label: string, identity: Identity): Commitments
}

/** Makes a committer; its buffers grow with the longest text that it meets. */
export function createCommitter(sha256: Sha256): Committer {
  let buffer = new Uint8Array(2048)
  const pair = new Uint8Array(65)
  pair[0] = 2
  const salted = (tag: number, salt: Uint8Array, text: string): Uint8Array => {
    assertBytes(salt, 'salt', 32)
    if (33 + 3 * text.length > buffer.length) buffer = new Uint8Array(33 + 6 * text.length)
    buffer[0] = tag
    put(buffer, 1, salt)
    return sha256(buffer.subarray(0, writeUtf8(buffer, 33, text)))
  }
  const committer: Committer = {
    label: (labelSalt, label) => salted(3, labelSalt, label),
    identity: (identitySalt, identity) => salted(4, identitySalt, identityText(identity)),
    entry(labelCommit, identityCommit) {
      assertBytes(labelCommit, 'labelCommit', 32)
      assertBytes(identityCommit, 'identityCommit', 32)
      put(pair, 1, labelCommit)
      put(pair, 33, identityCommit)
      return sha256(pair)
    },
    entrant(salts, label, identity) {
      const labelCommit = committer.label(salts.labelSalt, label)
      const identityCommit = committer.identity(salts.identitySalt, identity)
      return { labelCommit, identityCommit, entryCommit: committer.entry(labelCommit, identityCommit) }
    },
  }
  return committer
}

/** JCS of an identity, spelt out because a list has a million of them: the members stand in JCS order. */
function identityText({ contact, name, numbers, reference }: Identity): string {
  const s = quoted
  return `{"contact":${s(contact)},"name":${s(name)},"numbers":${s(numbers)},"reference":${s(reference)}}`
}

/** JCS of a string (RFC 8785 section 3.2.2.2). */
function quoted(text: string): string {
  // JSON.stringify would spell a lone surrogate as an escape, which JCS forbids.
  if (hasLoneSurrogate(text)) throw new RangeError('text holds a lone surrogate')
  return JSON.stringify(text)
}
