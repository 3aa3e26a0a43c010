#!/usr/bin/env node
// The check that lies in every proof archive of a draw in the format evenpenny/1.
//
//     node check.mjs [--key FINGERPRINT] [--tsa FILE.pem] [--witness KEY] [--test-beacon] [--test-timestamps] [--json]
//                    [archive or folder] [receipt.json …]
//
// It needs Node 20 or later and, beside it, bls12-381.mjs (a published library, bundled: the beacon's signature cannot be
// checked with what Node brings). It opens no connection and writes no file. Section numbers are those of the format's
// description. Read it from top to bottom: first the small strict readers, then the mathematics (tree, coin, walk), then
// the twelve steps in the order in which they run.
//
// Exit status: 0 all twelve steps hold, 1 a step fails (the first one is named, and where), 2 wrong usage.

import { createHmac, createPublicKey, hash, hkdfSync, verify } from 'node:crypto'
import { lstatSync, readdirSync, readFileSync, statSync } from 'node:fs'
import { basename, dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { inflateRawSync } from 'node:zlib'
import { bls12_381 } from './bls12-381.mjs'

// ---- Limits and pinned values ("Limits", section 3) -----------------------------------------------------------------

const GIB = 2 ** 30
const MAX_TICKETS_EACH = 2 ** 32 - 1
const MAX_COUNT = Number.MAX_SAFE_INTEGER // 2^53 − 1: every number of the format is at most this
const MAX_ENTRANTS = 2_000_000
const MAX_PICKS = 100_000

const SCHEME = 'bls-unchained-g1-rfc9380'
const BEACON_TAG = 'BLS_SIG_BLS12381G1_XMD:SHA-256_SSWU_RO_NUL_'
const QUICKNET = {
  chain: '52db9ba70e0cc0f6eaf7803dd07447a1f5477735fd3f661792ba94600c84e971',
  genesisTime: 1692803367,
  period: 3,
  publicKey:
    '83cf0f2896adee7eb8b5f01fcad3912212c437e0073e911fb90022d3e760183c8c4b450b6a0a6c3ac6a5776a2d106451' +
    '0d1fec758c921cc22b0e17e63aaf4bcb5ed66304de9cf809bd274ca73bab4af5a6e9c76a4bc09e76eae8991ef5ece45a',
}
// The development chain's secret key is public: anybody can make its rounds in advance. It passes only with --test-beacon.
const DEVELOPMENT_CHAIN = {
  chain: '4fcc0ef382cd4fd48ab4445bbd17747645fff1315b2a4facd0ed570d284b4ebe',
  genesisTime: 1767225600,
  period: 3,
  publicKey:
    '8dd939c1f055c7a22f8c8e3f31dfbdb5b7137a23838a6dfb377c2624ea1bd72173f964ac53e23a20508116ac96073f4c' +
    '0e68a70a404eb50dab512d4e774d0c70ebcc9b3b720e4a339ab49be0dd7c4c4ea176da10adefc7d47bfe920cf46e811d',
}

// Section 9. SHA256SUMS is a member too, and covers all the others.
const SUMS = 'SHA256SUMS'
const REQUIRED = [
  'seal.json',
  'seal.sig',
  'entries.csv',
  'result.json',
  'result.sig',
  'transcript.jsonl',
  'labels.jsonl',
].concat(['terms.txt', 'site-key.pem', 'CHECKING.txt', 'check.mjs', 'bls12-381.mjs'])
// Members that came later: archives from before have neither, and one alone fails.
const LOG_MEMBERS = ['checkpoint.txt', 'log-proof.json']
const WITNESSED = ['witnessed.txt', 'witnessed-proof.json']
const OTHER_LATER = ['seal.tsr', 'replaced.json']

// ---- Failing --------------------------------------------------------------------------------------------------------

/** A step that does not hold: `where` names the place, the message is a plain sentence about it. */
class Failure extends Error {
  constructor(where, message) {
    super(message)
    this.where = where
  }
}

/** Wrong usage: nothing was checked. */
class Usage extends Error {}

function fail(where, message) {
  throw new Failure(where, message)
}

// ---- Bytes and text ("Writing") -------------------------------------------------------------------------------------

const sha256 = (...parts) => hash('sha256', Buffer.concat(parts), 'buffer')
const hmac = (key, ...parts) => createHmac('sha256', key).update(Buffer.concat(parts)).digest()
const byte = (value) => Buffer.of(value)
const ascii = (text) => Buffer.from(text, 'latin1')
const fromHex = (text) => Buffer.from(text, 'hex')
const toHex = (bytes) => Buffer.from(bytes).toString('hex')

function u32(value) {
  const bytes = Buffer.alloc(4)
  bytes.writeUInt32BE(value)
  return bytes
}

/** Writes a whole number below 2^53 as eight bytes, big-endian. */
function putU64(bytes, value, offset) {
  bytes.writeUInt32BE(Math.floor(value / 2 ** 32), offset)
  bytes.writeUInt32BE(value % 2 ** 32, offset + 4)
}

function u64(value) {
  const bytes = Buffer.alloc(8)
  putU64(bytes, value, 0)
  return bytes
}

/** UTF-8 to text; malformed bytes fail, and a byte order mark is a character like any other. */
function utf8(bytes, where) {
  try {
    return new TextDecoder('utf-8', { fatal: true, ignoreBOM: true }).decode(bytes)
  } catch {
    return fail(where, 'the bytes are not UTF-8 text.')
  }
}

// Control characters, lone surrogates, the line and paragraph separators, and everything that can turn the reading
// direction: Unicode's own property names.
const FORBIDDEN = /[\p{Cc}\p{Cs}\p{Zl}\p{Zp}\p{Bidi_Control}]/u

function noForbidden(text, where) {
  const found = FORBIDDEN.exec(text)
  if (found) {
    const point = found[0].codePointAt(0).toString(16).toUpperCase().padStart(4, '0')
    fail(where, `the text holds the character U+${point}, which the format refuses.`)
  }
}

/**
 * Canonical JSON (RFC 8785): members by UTF-16 code unit, no space, the shortest escapes, which are JSON.stringify's.
 * The format's numbers are whole and not negative, so that their one form is their digits. Every string that passes here is also
 * held to the rule for text.
 */
function canonical(value, where, depth = 0) {
  if (depth > 12) fail(where, 'it is nested deeper than anything in the format.')
  if (value === null || typeof value === 'boolean') return String(value)
  if (typeof value === 'string') {
    noForbidden(value, where)
    return JSON.stringify(value)
  }
  if (typeof value === 'number') {
    if (!Number.isSafeInteger(value) || value < 0) fail(where, `${value} is not a whole number from 0 to 2^53 − 1.`)
    return String(value)
  }
  if (Array.isArray(value)) return `[${value.map((item) => canonical(item, where, depth + 1)).join(',')}]`
  const members = Object.keys(value).sort() // sort() without an argument compares code units
  return `{${members.map((k) => `${canonical(k, where)}:${canonical(value[k], where, depth + 1)}`).join(',')}}`
}

/**
 * Parses text that must be exactly the canonical form of what it says. A member that stands twice, a space, another order, a number
 * such as 1.0, 01 or 1e3: each of them makes the text differ from its canonical form.
 */
function parseCanonical(text, where) {
  let value
  try {
    value = JSON.parse(text)
  } catch {
    fail(where, 'it is not JSON.')
  }
  if (canonical(value, where) !== text) {
    fail(
      where,
      'its bytes are not the canonical JSON (RFC 8785) of what they say: a double member, a space, an order or a number differs.',
    )
  }
  return value
}

/** The lines of a text file in which every line ends with a line feed, the last one too. */
function linesOf(bytes, where) {
  const text = utf8(bytes, where)
  if (text === '') return []
  if (!text.endsWith('\n')) fail(where, 'the last line does not end with a line feed.')
  return text.slice(0, -1).split('\n')
}

// ---- Members and their types ("Writing") ----------------------------------------------------------------------------

/** An object with exactly these members: none missing, none unknown. (A double one is refused by parseCanonical.) */
function members(value, names, where) {
  if (value === null || typeof value !== 'object' || Array.isArray(value)) fail(where, 'an object is expected.')
  for (const name of names) if (!Object.hasOwn(value, name)) fail(where, `the member "${name}" is missing.`)
  for (const name of Object.keys(value)) if (!names.includes(name)) fail(where, `the member "${name}" is unknown.`)
  return value
}

function list(value, where) {
  if (!Array.isArray(value)) fail(where, 'a list is expected.')
  return value
}

/** Text by the rule of noForbidden, and not empty: the format names the two members that may be (section 1). */
function text(value, where, mayBeEmpty = false) {
  if (typeof value !== 'string') fail(where, 'text is expected.')
  if (value === '' && !mayBeEmpty) fail(where, 'it is empty.')
  noForbidden(value, where)
  return value
}

function count(value, least, most, where) {
  if (typeof value !== 'number' || !Number.isSafeInteger(value)) fail(where, 'a whole number is expected.')
  if (value < least || value > most) fail(where, `${value} is not within ${least} to ${most}.`)
  return value
}

function hex(value, bytes, where) {
  if (typeof value !== 'string' || value.length !== 2 * bytes || !/^[0-9a-f]*$/.test(value)) {
    fail(where, `${2 * bytes} lower-case hexadecimal digits are expected.`)
  }
  return value
}

function one(value, allowed, where) {
  if (!allowed.includes(value))
    fail(where, `${JSON.stringify(value)} is not ${allowed.map((a) => JSON.stringify(a)).join(' or ')}.`)
  return value
}

/** A time YYYY-MM-DDThh:mm:ssZ as seconds since 1970. The way back must give the same text: no 30 February, no second 60. */
function time(value, where) {
  if (typeof value !== 'string' || !/^\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ$/.test(value)) {
    fail(where, 'a time in the form YYYY-MM-DDThh:mm:ssZ is expected.')
  }
  const milliseconds = Date.parse(value)
  if (Number.isNaN(milliseconds) || new Date(milliseconds).toISOString() !== value.replace('Z', '.000Z')) {
    fail(where, `${value} is not a time that exists.`)
  }
  return milliseconds / 1000
}

// ---- The zip (section 9) --------------------------------------------------------------------------------------------

const CRC_TABLE = new Int32Array(256).map((_, index) => {
  let crc = index
  for (let bit = 0; bit < 8; bit++) crc = crc & 1 ? (crc >>> 1) ^ 0xedb88320 : crc >>> 1
  return crc
})

function crc32(bytes) {
  let crc = -1
  for (let i = 0; i < bytes.length; i++) crc = (crc >>> 8) ^ CRC_TABLE[(crc ^ bytes[i]) & 255]
  return ~crc >>> 0
}

/** Names from [A-Za-z0-9._-] at top level, none twice in any letter case. `seen` holds the lower-case names so far. */
function memberName(name, seen) {
  if (!/^[A-Za-z0-9._-]+$/.test(name) || name === '.' || name === '..') {
    fail(`the member ${JSON.stringify(name)}`, 'a name may hold only letters, digits, ".", "_" and "-", and no folder.')
  }
  if (seen.has(name.toLowerCase())) fail(`the member ${name}`, 'the name stands twice (letter case does not count).')
  seen.add(name.toLowerCase())
}

/** An extra field may only be the time "UT" (0x5455): others can give a member a second name or size, or hide data. */
function onlyTimes(extra, where) {
  for (let at = 0; at < extra.length; ) {
    if (extra.length - at < 4 || extra.readUInt16LE(at) !== 0x5455) fail(where, 'the zip header has an extra field.')
    at += 4 + extra.readUInt16LE(at + 2)
    if (at > extra.length) fail(where, 'an extra field of the zip header is cut short.')
  }
}

/**
 * Reads a zip in the one strict form that cannot mean two things to two programs: every byte of the file belongs to a member, to the
 * directory or to the end record, and each local header repeats its directory line. Returns a map from name to bytes.
 */
function readZip(zip) {
  const whole = 'the zip file'
  const end = zip.length - 22
  if (end < 0 || zip.readUInt32LE(end) !== 0x06054b50)
    fail(whole, 'it does not end with a zip end record, without a comment.')
  const entries = zip.readUInt16LE(end + 10)
  const directory = zip.readUInt32LE(end + 16)
  if (zip.readUInt32LE(end + 4) !== 0 || zip.readUInt16LE(end + 8) !== entries || zip.readUInt16LE(end + 20) !== 0) {
    fail(whole, 'its end record speaks of several disks, another number of members, or a comment.')
  }
  if (directory + zip.readUInt32LE(end + 12) !== end)
    fail(whole, 'its directory does not reach from where it should to the end record.')

  const found = []
  const seen = new Set()
  let unpacked = 0
  let at = directory
  for (let k = 0; k < entries; k++) {
    const line = `line ${k + 1} of the zip's directory`
    if (at + 46 > end || zip.readUInt32LE(at) !== 0x02014b50) fail(line, 'it is not a directory line.')
    const nameLength = zip.readUInt16LE(at + 28)
    const extraLength = zip.readUInt16LE(at + 30)
    const next = at + 46 + nameLength + extraLength
    if (next > end) fail(line, 'it is cut short.')
    const name = zip.latin1Slice(at + 46, at + 46 + nameLength)
    memberName(name, seen)
    const where = `the member ${name}`
    const flags = zip.readUInt16LE(at + 8)
    const method = zip.readUInt16LE(at + 10)
    const size = zip.readUInt32LE(at + 24)
    // Bits 1 and 2 tell how hard deflate tried, bit 11 that the name is UTF-8. Encryption, and sizes told only afterwards, are refused.
    if ((flags & ~0x0806) !== 0)
      fail(where, 'it is encrypted, or its sizes stand behind it, or it uses another zip extension.')
    if (method !== 0 && method !== 8) fail(where, 'it is neither stored nor deflated.')
    if (zip.readUInt16LE(at + 32) !== 0 || zip.readUInt16LE(at + 34) !== 0)
      fail(where, 'it has a comment or lies on another disk.')
    onlyTimes(zip.subarray(at + 46 + nameLength, next), where)
    // Written on Unix, the upper half of the attributes is the file's mode: a link or a folder is no member.
    const type = zip[at + 5] === 3 ? zip.readUInt32LE(at + 38) >>> 28 : 0
    if ((type !== 0 && type !== 8) || zip[at + 38] & 0x10) fail(where, 'it is not an ordinary file.')
    unpacked += size
    if (unpacked > GIB) fail(where, 'the archive unpacks to more than 1 GiB, the limit.')
    found.push({
      name,
      where,
      method,
      size,
      line: at,
      packed: zip.readUInt32LE(at + 20),
      local: zip.readUInt32LE(at + 42),
      nameLength,
      extraLength,
    })
    at = next
  }
  if (at !== end) fail(whole, 'there are bytes between its directory and its end record.')

  const files = new Map()
  let expected = 0
  for (const m of [...found].sort((a, b) => a.local - b.local)) {
    if (m.local !== expected)
      fail(m.where, 'there are bytes before it that belong to no member, or it overlaps with another.')
    const data = m.local + 30 + m.nameLength + m.extraLength
    expected = data + m.packed
    if (expected > directory) fail(m.where, 'it reaches into the directory.')
    // Version, flags, method, date, checksum, sizes and lengths are the same 26 bytes in both headers; then name and extra field.
    if (
      zip.readUInt32LE(m.local) !== 0x04034b50 ||
      zip.compare(zip, m.line + 6, m.line + 32, m.local + 4, m.local + 30) !== 0 ||
      zip.compare(zip, m.line + 46, m.line + 46 + m.nameLength + m.extraLength, m.local + 30, data) !== 0
    ) {
      fail(m.where, 'its local header is not equal to its line in the directory.')
    }
    const bytes = unpack(zip.subarray(data, expected), m)
    if (crc32(bytes) !== zip.readUInt32LE(m.line + 16)) fail(m.where, 'its bytes do not have the checksum in the zip.')
    files.set(m.name, bytes)
  }
  if (expected !== directory) fail(whole, 'there are bytes between its last member and its directory.')
  return files
}

function unpack(packed, { method, size, where }) {
  if (method === 0) {
    if (packed.length !== size) fail(where, 'it is stored, but its two sizes differ.')
    return packed
  }
  let result
  try {
    result = inflateRawSync(packed, { maxOutputLength: Math.max(size, 1), info: true })
  } catch {
    fail(where, 'it cannot be inflated to the size that the zip states.')
  }
  if (result.buffer.length !== size) fail(where, 'it does not have the size that the zip states.')
  if (result.engine.bytesWritten !== packed.length) fail(where, 'there are bytes behind its compressed data.')
  return result.buffer
}

/** A folder into which the archive was unpacked. What SHA256SUMS does not name is no part of the archive, and is left alone. */
function readFolder(folder) {
  const files = new Map()
  const names = readdirSync(folder).sort()
  if (!names.includes(SUMS)) fail(`the folder`, `it holds no ${SUMS}: it is not an unpacked proof archive.`)
  let size = 0
  const read = (name) => {
    const where = `the member ${name}`
    if (!names.includes(name)) fail(where, 'it is missing.')
    const stat = lstatSync(join(folder, name))
    if (!stat.isFile()) fail(where, 'it is not an ordinary file.')
    size += stat.size
    if (size > GIB) fail(where, 'the archive takes more than 1 GiB, the limit.')
    files.set(name, readFileSync(join(folder, name)))
  }
  read(SUMS)
  for (const name of readSums(files.get(SUMS)).keys()) read(name)
  return { files, strays: names.filter((name) => !files.has(name)) }
}

/** SHA256SUMS: 64 hex digits, two spaces, name; each of the other members once. */
function readSums(bytes) {
  const sums = new Map()
  const seen = new Set([SUMS.toLowerCase()])
  linesOf(bytes, SUMS).forEach((line, index) => {
    const match = /^([0-9a-f]{64}) {2}(.+)$/.exec(line)
    if (!match) fail(`${SUMS} line ${index + 1}`, 'it is not 64 hexadecimal digits, two spaces and a name.')
    memberName(match[2], seen)
    sums.set(match[2], match[1])
  })
  return sums
}

// ---- The site's key (section 9) -------------------------------------------------------------------------------------

const SPKI_ED25519 = fromHex('302a300506032b6570032100') // RFC 8410: the DER before the 32 bytes of an Ed25519 public key

/** The DER bytes of a SubjectPublicKeyInfo PEM, written exactly as OpenSSL writes it, with an Ed25519 key that can be trusted. */
function readPublicKey(pem, where) {
  const match = /^-----BEGIN PUBLIC KEY-----\n([A-Za-z0-9+/]{59}=)\n-----END PUBLIC KEY-----\n$/.exec(utf8(pem, where))
  const der = match ? Buffer.from(match[1], 'base64') : Buffer.alloc(0)
  if (!match || der.toString('base64') !== match[1] || !der.subarray(0, 12).equals(SPKI_ED25519)) {
    fail(where, 'it is not an Ed25519 public key as SubjectPublicKeyInfo in PEM, or not written in its one form.')
  }
  // RFC 8032, 5.1.3: y stands little-endian, the top bit is the sign of x. y must be below p = 2^255 − 19.
  const p = 2n ** 255n - 19n
  const y = BigInt(`0x${toHex(Buffer.from(der.subarray(12)).reverse())}`) & (2n ** 255n - 1n)
  if (y >= p) fail(where, 'the key is not in canonical form.')
  // The eight points whose order divides 8 have these five values of y. Under such a key one signature fits many messages.
  const y8 = 0x05fc536d880238b13933c6d305acdfd5f098eff289f4c345b027b2c28f95e826n
  if ([0n, 1n, p - 1n, y8, p - y8].includes(y)) fail(where, 'the key is a point of small order.')
  return der
}

// ---- The sum tree (section 2) ---------------------------------------------------------------------------------------
//
// "Split after the largest power of two smaller than n" gives the same tree as pairing neighbours level by level, a last node without
// a neighbour going up unchanged. So a tree is a list of levels, leaves first; node i of a level stands over nodes 2i and 2i + 1.
// Sums are at most 2^53 − 1, which a double holds exactly.

/** Returns the tickets of every node, level by level, and the root's hash. */
function sumTree(tickets, commits) {
  const n = tickets.length
  const hashes = Buffer.alloc(32 * n)
  const leaf = Buffer.alloc(1 + 8 + 32) // 0x00 || u64(tickets) || entryCommit
  for (let i = 0; i < n; i++) {
    putU64(leaf, tickets[i], 1)
    commits.copy(leaf, 9, 32 * i, 32 * i + 32)
    hash('sha256', leaf, 'buffer').copy(hashes, 32 * i)
  }
  const node = Buffer.alloc(1 + 8 + 32 + 8 + 32) // 0x01 || u64(left) || leftHash || u64(right) || rightHash
  node[0] = 1
  const levels = [tickets]
  while (levels.at(-1).length > 1) {
    const below = levels.at(-1)
    const sums = new Float64Array(Math.ceil(below.length / 2))
    for (let i = 0; i < sums.length; i++) {
      const left = 2 * i
      const right = left + 1
      if (right === below.length) {
        sums[i] = below[left]
        hashes.copy(hashes, 32 * i, 32 * left, 32 * left + 32)
        continue
      }
      sums[i] = below[left] + below[right]
      putU64(node, below[left], 1)
      hashes.copy(node, 9, 32 * left, 32 * left + 32)
      putU64(node, below[right], 41)
      hashes.copy(node, 49, 32 * right, 32 * right + 32)
      hash('sha256', node, 'buffer').copy(hashes, 32 * i) // never ahead of what is still to be read
    }
    levels.push(sums)
  }
  return { levels, root: toHex(hashes.subarray(0, 32)) }
}

/** The sides on which the siblings of leaf i stand in a tree of n leaves, from the leaf up. */
function sidesOf(i, n) {
  const sides = []
  for (; n > 1; i = Math.floor(i / 2), n = Math.ceil(n / 2)) {
    if (i % 2 === 1) sides.push('L')
    else if (i + 1 < n) sides.push('R')
  }
  return sides
}

// ---- Fair bits from tosses (section 4) ------------------------------------------------------------------------------

/** Peres's extractor on a list of 0 and 1. */
function peres(tosses) {
  if (tosses.length < 2) return []
  const unequal = []
  const differences = []
  const common = []
  for (let i = 0; i + 1 < tosses.length; i += 2) {
    differences.push(tosses[i] ^ tosses[i + 1])
    if (tosses[i] === tosses[i + 1]) common.push(tosses[i])
    else unequal.push(tosses[i])
  }
  return [...unequal, ...peres(differences), ...peres(common)]
}

// ---- Flips, coin and walk (sections 5, 6, 7) ------------------------------------------------------------------------

/** Pick k's flips under `derived`: HMAC(drawKey, u32(k) || u32(0)) || HMAC(drawKey, u32(k) || u32(1)) || …, most significant bit first. */
function derivedFlips(drawKey, pick) {
  let block
  let used = 0
  return () => {
    if (used % 256 === 0) block = hmac(drawKey, u32(pick), u32(used / 256))
    const bit = (block[(used % 256) >> 3] >> (7 - (used & 7))) & 1
    used += 1
    return bit
  }
}

class OutOfFlips extends Error {}

/**
 * Tosses a coin that shows heads with chance exactly a/b, by comparing the flips with the binary digits of a/b.
 * `r >= b − r` says 2r ≥ b, and the remainders are formed without ever passing 2^53.
 * @returns the flips used, as text, and "H" or "T"
 */
function tossCoin(a, b, flip) {
  if (a === 0) return ['', 'T']
  if (a === b) return ['', 'H']
  let r = a
  let used = ''
  for (;;) {
    const digit = r >= b - r ? 1 : 0
    r = digit ? r - (b - r) : r + r
    const s = flip()
    used += s
    if (s < digit) return [used, 'H']
    if (s > digit || r === 0) return [used, 'T']
  }
}

/**
 * All picks of the draw, from the seal, the tree's levels and the flips (a function from pick to its stream). One object for each
 * pick: leaf, tickets in before it, and every coin as it stands in the transcript.
 */
function walkAll(seal, levels, flipsOf) {
  const still = levels.map((sums) => sums.slice()) // the tickets still in under every node
  const top = still.length - 1
  const picks = []
  for (const award of awardsOf(seal)) {
    const remaining = still[top][0]
    if (remaining === 0) break
    const pick = picks.length
    const flip = flipsOf(pick)
    const coins = []
    let at = 0
    for (let level = top; level > 0; level--) {
      const below = still[level - 1]
      at *= 2
      if (at + 1 === below.length) continue // a node that went up without a neighbour: the same node, no coin
      const [left, right] = [below[at], below[at + 1]]
      const [used, side] = tossCoin(left, left + right, flip)
      coins.push([left, right, used, side])
      if (side === 'T') at += 1
    }
    const leaves = seal.rule === 'every-ticket' ? 1 : still[0][at]
    for (let level = 0, node = at; level <= top; level++, node >>>= 1) still[level][node] -= leaves
    picks.push({ pick, award, leaf: at, remaining, coins })
  }
  return picks
}

/** Each prize's items in turn, then the reserves (section 7). */
function* awardsOf(seal) {
  for (const prize of seal.prizes) for (let item = 1; item <= prize.quantity; item++) yield { item, prize: prize.id }
  for (let reserve = 1; reserve <= seal.reserves; reserve++) yield { reserve }
}

// ---- Commitments (section 1) ----------------------------------------------------------------------------------------

const commitLabel = (salt, label) => sha256(byte(3), fromHex(salt), Buffer.from(label, 'utf8'))
const commitIdentity = (salt, identity) =>
  sha256(byte(4), fromHex(salt), Buffer.from(canonical(identity, 'identity'), 'utf8'))
const commitEntry = (labelCommit, identityCommit) => sha256(byte(2), labelCommit, identityCommit)

// =====================================================================================================================
// The twelve steps (section 11). Each takes the state `c` of the check, adds to it, and returns what it found.
// =====================================================================================================================

/** Step 1: the zip, its members and SHA256SUMS (section 9). */
function checkArchive(c) {
  if (statSync(c.path).isDirectory()) {
    Object.assign(c, readFolder(c.path))
  } else {
    if (statSync(c.path).size > GIB + 2 ** 24)
      fail('the zip file', 'it is larger than an archive of 1 GiB, the limit, can be.')
    c.files = readZip(readFileSync(c.path))
    c.strays = []
  }
  for (const name of [...REQUIRED, SUMS]) if (!c.files.has(name)) fail(`the member ${name}`, 'it is missing.')
  const sums = readSums(c.files.get(SUMS))
  for (const name of sums.keys()) if (!c.files.has(name)) fail(SUMS, `it names ${name}, which is not there.`)
  for (const [name, bytes] of c.files) {
    if (name === SUMS) continue
    if (!sums.has(name)) fail(SUMS, `it does not name the member ${name}.`)
    if (toHex(sha256(bytes)) !== sums.get(name))
      fail(`the member ${name}`, `its bytes do not have the digest in ${SUMS}.`)
  }
  const known = [SUMS, ...REQUIRED, ...LOG_MEMBERS, ...WITNESSED, ...OTHER_LATER]
  c.later = [...c.files.keys()].filter((name) => !known.includes(name) && !REPLACED.test(name))
  return `${c.files.size} members, each with its digest.`
}

/** Step 2: both signatures and the key (section 9). */
function checkSignatures(c) {
  const der = readPublicKey(c.files.get('site-key.pem'), 'site-key.pem')
  c.fingerprint = toHex(sha256(der))
  const key = createPublicKey({ key: der, format: 'der', type: 'spki' })
  c.rawKey = der.subarray(12)
  c.publicKey = key
  for (const name of ['seal', 'result']) {
    const signature = c.files.get(`${name}.sig`)
    if (signature.length !== 64) fail(`${name}.sig`, 'it does not have the 64 bytes of an Ed25519 signature.')
    if (!verify(null, c.files.get(`${name}.json`), key, signature)) {
      fail(`${name}.sig`, `it is not the signature of site-key.pem over ${name}.json.`)
    }
  }
  // The seal names its key. Where it is not JSON with such a member, step 3 says what is wrong with it.
  const named = memberOf(c.files.get('seal.json'), 'key')
  if (typeof named === 'string' && named !== c.fingerprint) {
    fail('seal.json key', 'the seal names another key than the one in site-key.pem.')
  }
  if (c.key !== null && c.key !== c.fingerprint) {
    fail('site-key.pem', `its fingerprint is ${c.fingerprint}, which is not the one given with --key.`)
  }
  return `seal and result are signed by the key ${c.fingerprint}${c.key ? ', the one given' : ', an unknown key'}.`
}

/** A member of a JSON file that has not been examined yet; undefined where there is none. */
function memberOf(bytes, name) {
  try {
    return JSON.parse(bytes.toString('utf8'))?.[name]
  } catch {
    return undefined
  }
}

/** Step 3: the seal (section 3). */
function checkSeal(c) {
  const bytes = c.files.get('seal.json')
  const seal = readSeal(c, bytes, 'seal.json')
  const terms = c.files.get('terms.txt')
  if (toHex(sha256(terms)) !== seal.terms) fail('terms.txt', 'its digest is not the one in the seal.')
  const words = utf8(terms, 'terms.txt')
  if (!words.endsWith('\n') || words.endsWith('\n\n')) fail('terms.txt', 'it does not end with exactly one line feed.')
  noForbidden(words.replaceAll('\n', ''), 'terms.txt')
  c.seal = seal
  c.drawAt = time(seal.drawAt, 'seal.json drawAt')
  c.sealDigest = toHex(sha256(bytes))
  const picks = seal.prizes.reduce((sum, { quantity }) => sum + quantity, seal.reserves)
  return `seal ${c.sealDigest} of the draw ${JSON.stringify(seal.draw)}, ${JSON.stringify(seal.title)}; rule ${seal.rule}, ${picks} picks at most.`
}

/** The record of a seal: exactly its members, and every rule of section 3 that needs nothing else. */
function readSeal(c, bytes, file) {
  const seal = parseCanonical(utf8(bytes, file), file)
  const at = (name) => `${file} ${name}`
  const names = [
    'format',
    'kind',
    'draw',
    'organisation',
    'title',
    'key',
    'terms',
    'sealedAt',
    'drawAt',
    'revealBy',
    'entries',
    'prizes',
  ]
  members(seal, [...names, 'reserves', 'rule', 'sources', 'supersedes', 'reason'], file)
  one(seal.format, ['evenpenny/1'], at('format'))
  one(seal.kind, ['seal'], at('kind'))
  text(seal.draw, at('draw'))
  members(seal.organisation, ['name', 'registration'], at('organisation'))
  text(seal.organisation.name, at('organisation.name'))
  if (seal.organisation.registration !== null) text(seal.organisation.registration, at('organisation.registration'))
  text(seal.title, at('title'))
  hex(seal.key, 32, at('key')) // step 2 has compared it with site-key.pem

  const drawAt = time(seal.drawAt, at('drawAt'))
  if (drawAt - time(seal.sealedAt, at('sealedAt')) < 120)
    fail(at('drawAt'), 'it is less than 120 seconds after sealedAt.')
  if (seal.revealBy !== null) {
    const after = time(seal.revealBy, at('revealBy')) - drawAt
    if (after < 0 || after > 24 * 3600) fail(at('revealBy'), 'it is not within the 24 hours after drawAt.')
  }

  members(seal.entries, ['count', 'root', 'tickets'], at('entries'))
  count(seal.entries.count, 1, MAX_ENTRANTS, at('entries.count'))
  hex(seal.entries.root, 32, at('entries.root'))
  const entrants = seal.entries.count
  count(seal.entries.tickets, entrants, entrants * MAX_TICKETS_EACH, at('entries.tickets')) // never beyond 2^53 − 1

  if (list(seal.prizes, at('prizes')).length === 0) fail(at('prizes'), 'there is no prize.')
  const ids = new Set()
  let picks = count(seal.reserves, 0, MAX_PICKS, at('reserves'))
  seal.prizes.forEach((prize, index) => {
    const where = at(`prizes[${index}]`)
    members(prize, ['id', 'name', 'quantity'], where)
    if (ids.has(text(prize.id, where))) fail(where, `the id ${JSON.stringify(prize.id)} stands twice.`)
    ids.add(prize.id)
    text(prize.name, where)
    picks += count(prize.quantity, 1, MAX_PICKS, `${where}.quantity`)
  })
  if (picks > MAX_PICKS) fail(at('prizes'), `there are ${picks} picks, more than the limit of ${MAX_PICKS}.`)
  one(seal.rule, ['one-prize-each', 'every-ticket'], at('rule'))
  checkSources(c, seal, at, drawAt)

  if ((seal.supersedes === null) !== (seal.reason === null))
    fail(at('reason'), 'supersedes and reason are not both set or both null.')
  if (seal.supersedes !== null) {
    hex(seal.supersedes, 32, at('supersedes'))
    text(seal.reason, at('reason'))
  }
  hex(seal.terms, 32, at('terms'))
  return seal
}

/** Section 3, `sources`. */
function checkSources(c, seal, at, drawAt) {
  const sources = members(seal.sources, ['beacon', 'flips', 'seedCommit', 'tosses'], at('sources'))
  one(sources.flips, ['derived', 'tossed'], at('sources.flips'))
  const derived = sources.flips === 'derived'
  if (sources.seedCommit !== null) hex(sources.seedCommit, 32, at('sources.seedCommit'))
  if (derived && sources.seedCommit === null) fail(at('sources.seedCommit'), 'derived flips need a seed.')
  if (derived && sources.beacon === null && sources.tosses === null)
    fail(at('sources'), 'derived flips need a beacon or tosses.')
  if (!derived && (sources.beacon !== null || sources.seedCommit !== null))
    fail(at('sources'), 'tossed flips have no beacon and no seed.')
  if (!derived && sources.tosses === null) fail(at('sources.tosses'), 'tossed flips need tosses.')
  if (!derived && seal.revealBy !== null)
    fail(at('revealBy'), 'it is null where the flips are tossed: the hall sees the outcome.')

  if (sources.tosses !== null) {
    const where = at('sources.tosses')
    const tosses = members(sources.tosses, ['minimumBits', 'roundLength', 'witnesses'], where)
    count(tosses.roundLength, 8, 256, `${where}.roundLength`)
    count(tosses.minimumBits, derived && sources.beacon === null ? 64 : 1, MAX_COUNT, `${where}.minimumBits`)
    if (list(tosses.witnesses, `${where}.witnesses`).length === 0) fail(`${where}.witnesses`, 'there is no witness.')
    tosses.witnesses.forEach((role, index) => text(role, `${where}.witnesses[${index}]`))
  }

  if (sources.beacon === null) return
  const where = at('sources.beacon')
  const beacon = members(sources.beacon, ['chain', 'genesisTime', 'period', 'publicKey', 'round', 'scheme'], where)
  const network = c.testBeacon && beacon.chain === DEVELOPMENT_CHAIN.chain ? DEVELOPMENT_CHAIN : QUICKNET
  if (network === QUICKNET && beacon.chain === DEVELOPMENT_CHAIN.chain) {
    fail(
      `${where}.chain`,
      'it is the development chain, whose secret is public: such a draw proves nothing. (--test-beacon lets it pass.)',
    )
  }
  for (const name of Object.keys(network)) {
    if (beacon[name] !== network[name])
      fail(`${where}.${name}`, "it is not that of the pinned network, drand's quicknet.")
  }
  one(beacon.scheme, [SCHEME], `${where}.scheme`)
  c.development ||= network === DEVELOPMENT_CHAIN
  // The first round, 1 at least, whose time genesisTime + (N − 1)·period is at or after drawAt.
  const round = Math.max(1, Math.ceil((drawAt - network.genesisTime) / network.period) + 1)
  if (beacon.round !== round) fail(`${where}.round`, `it is not ${round}, the first round at or after drawAt.`)
}

/** Step 4: entries.csv against count, total and root (sections 1, 2, 9). Works on the bytes: there may be two million lines. */
function checkEntries(c) {
  const file = c.files.get('entries.csv')
  const { count: n, tickets: total, root } = c.seal.entries
  const header = 'tickets,entry_commit\n'
  if (file.latin1Slice(0, header.length) !== header)
    fail('entries.csv line 1', 'the header is not "tickets,entry_commit".')
  const tickets = new Float64Array(n)
  const commits = Buffer.alloc(32 * n)
  const seen = new Set()
  let sum = 0
  let leaf = 0
  for (let at = header.length; at < file.length; leaf++) {
    const where = `entries.csv line ${leaf + 2}`
    if (leaf === n) fail(where, `there are more leaves than the ${n} that the seal states.`)
    let value = 0
    const start = at
    for (; file[at] >= 48 && file[at] <= 57 && at - start < 10; at++) value = 10 * value + file[at] - 48
    if (at === start || file[start] === 48 || value > MAX_TICKETS_EACH)
      fail(where, 'the tickets are not a whole number from 1 to 2^32 − 1.')
    if (file[at] !== 44) fail(where, 'the tickets are not followed by a comma.')
    const digits = file.latin1Slice(at + 1, at + 65)
    if (file[at + 65] !== 10 || !/^[0-9a-f]{64}$/.test(digits))
      fail(where, 'the commitment is not 64 lower-case hexadecimal digits and a line feed.')
    if (seen.has(digits)) fail(where, 'the same commitment stands on an earlier line.')
    seen.add(digits)
    commits.write(digits, 32 * leaf, 'hex')
    tickets[leaf] = value
    sum += value // 2,000,000 times 2^32 − 1 stays below 2^53 − 1, the limit
    at += 66
  }
  if (leaf !== n) fail('entries.csv', `it holds ${leaf} leaves, and the seal states ${n}.`)
  if (sum !== total) fail('entries.csv', `its tickets add up to ${sum}, and the seal states ${total}.`)
  const tree = sumTree(tickets, commits)
  if (tree.root !== root) fail('entries.csv', `its root is ${tree.root}, and the seal states ${root}.`)
  c.tickets = tickets
  c.levels = tree.levels
  c.commitOf = (index) => commits.subarray(32 * index, 32 * index + 32)
  return `${n} entrants with ${total} tickets lead to the seal's root.`
}

/** Step 5: the result: canonical, its members, its seal, times, `reveal` against `sources` (section 8). */
function checkResult(c) {
  const result = parseCanonical(utf8(c.files.get('result.json'), 'result.json'), 'result.json')
  const at = (name) => `result.json ${name}`
  members(result, ['format', 'kind', 'seal', 'drawnAt', 'reveal', 'picks', 'transcript'], 'result.json')
  one(result.format, ['evenpenny/1'], at('format'))
  one(result.kind, ['result'], at('kind'))
  if (hex(result.seal, 32, at('seal')) !== c.sealDigest) fail(at('seal'), 'it is the result of another seal.')
  if (time(result.drawnAt, at('drawnAt')) < c.drawAt) fail(at('drawnAt'), 'it is earlier than drawAt in the seal.')
  hex(result.transcript, 32, at('transcript'))

  const { sources } = c.seal
  const reveal = members(result.reveal, ['beacon', 'seed', 'tosses'], at('reveal'))
  for (const [name, source] of [
    ['beacon', sources.beacon],
    ['seed', sources.seedCommit],
    ['tosses', sources.tosses],
  ]) {
    if ((reveal[name] === null) !== (source === null)) {
      fail(
        at(`reveal.${name}`),
        source === null ? 'the seal names no such source.' : 'the seal names this source, and it is not revealed.',
      )
    }
  }
  if (reveal.seed !== null) hex(reveal.seed, 32, at('reveal.seed'))
  if (reveal.beacon !== null) {
    members(reveal.beacon, ['round', 'signature'], at('reveal.beacon'))
    count(reveal.beacon.round, 1, MAX_COUNT, at('reveal.beacon.round'))
    hex(reveal.beacon.signature, 48, at('reveal.beacon.signature'))
  }
  if (reveal.tosses !== null)
    list(reveal.tosses, at('reveal.tosses')).forEach((round, index) => text(round, at(`reveal.tosses[${index}]`), true))

  list(result.picks, at('picks')).forEach((pick, k) => {
    const where = at(`picks[${k}]`)
    members(pick, ['award', 'identityCommit', 'labelCommit', 'leaf', 'pick', 'remaining', 'tickets'], where)
    hex(pick.identityCommit, 32, `${where}.identityCommit`)
    hex(pick.labelCommit, 32, `${where}.labelCommit`)
    for (const name of ['leaf', 'pick', 'remaining', 'tickets']) count(pick[name], 0, MAX_COUNT, `${where}.${name}`)
    const reserve = pick.award !== null && typeof pick.award === 'object' && Object.hasOwn(pick.award, 'reserve')
    members(pick.award, reserve ? ['reserve'] : ['item', 'prize'], `${where}.award`)
    count(reserve ? pick.award.reserve : pick.award.item, 1, MAX_PICKS, `${where}.award`)
    if (!reserve) text(pick.award.prize, `${where}.award`)
  })
  c.result = result
  return `the result of this seal, drawn at ${result.drawnAt}, with ${result.picks.length} picks.`
}

/** Step 6: the seed against its commitment (section 3). */
function checkSeed(c) {
  const { seed } = c.result.reveal
  if (seed === null) return 'the seal names no seed.'
  if (toHex(sha256(byte(5), fromHex(seed))) !== c.seal.sources.seedCommit) {
    fail('result.json reveal.seed', 'it is not the seed to which the seal commits.')
  }
  return 'the seed is the one to which the seal commits.'
}

/** Step 7: the beacon round's number and signature (section 3). */
function checkBeacon(c) {
  const { beacon } = c.result.reveal
  if (beacon === null) return 'the seal names no beacon.'
  const sealed = c.seal.sources.beacon
  if (beacon.round !== sealed.round)
    fail('result.json reveal.beacon.round', `it is not the round ${sealed.round} that the seal names.`)
  const where = 'result.json reveal.beacon.signature'
  const signatureBytes = fromHex(beacon.signature)
  let holds = false
  try {
    const signature = bls12_381.G1.Point.fromBytes(signatureBytes)
    const publicKey = bls12_381.G2.Point.fromBytes(fromHex(sealed.publicKey))
    for (const point of [signature, publicKey]) {
      point.assertValidity() // on the curve
      if (point.is0() || !point.isTorsionFree()) fail(where, 'a point is not in its subgroup.')
    }
    if (toHex(signature.toBytes(true)) !== beacon.signature) fail(where, 'the point is not in its one compressed form.')
    const scheme = bls12_381.shortSignatures
    holds = scheme.verify(signature, scheme.hash(sha256(u64(beacon.round)), BEACON_TAG), publicKey)
  } catch (error) {
    if (error instanceof Failure) throw error
    fail(where, 'it is not a point of the signature group.')
  }
  if (!holds) fail(where, `it is not the beacon's signature over round ${beacon.round}.`)
  c.randomness = sha256(signatureBytes)
  return `round ${beacon.round} is signed by the ${c.development ? 'development chain (a test: its secret is public)' : 'beacon, drand quicknet'}.`
}

/** Step 8: the tosses: rounds, minimum, none too many (sections 3 and 4). */
function checkTosses(c) {
  const { tosses } = c.result.reveal
  if (tosses === null) return 'the seal names no tosses.'
  const { roundLength, minimumBits } = c.seal.sources.tosses
  const bits = []
  let beforeLast = 0 // the fair bits of all rounds but the last
  tosses.forEach((round, index) => {
    const where = `result.json reveal.tosses[${index}]`
    if (!/^[HT]*$/.test(round)) fail(where, 'a toss is H or T.')
    if (round.length !== roundLength) fail(where, `it has ${round.length} tosses; a round has exactly ${roundLength}.`)
    beforeLast = bits.length
    bits.push(...peres(Array.from(round, (toss) => (toss === 'H' ? 1 : 0))))
  })
  const where = 'result.json reveal.tosses'
  if (bits.length < minimumBits)
    fail(where, `${tosses.length} rounds give ${bits.length} fair bits, fewer than the minimum of ${minimumBits}.`)
  c.fairBits = bits
  // Under `tossed` the rounds must also suffice for the walks, so that these are walked here; step 9 compares them.
  let needed = 0
  if (c.seal.sources.flips === 'tossed') {
    const next = () => {
      if (needed === bits.length) throw new OutOfFlips()
      return bits[needed++]
    }
    try {
      c.walks = walkAll(c.seal, c.levels, () => next)
    } catch (error) {
      if (!(error instanceof OutOfFlips)) throw error
      fail(where, `${tosses.length} rounds give ${bits.length} fair bits, and the walks need more.`)
    }
  }
  if (beforeLast >= minimumBits && beforeLast >= needed) fail(where, 'there is a round more than was needed.')
  return `${tosses.length} rounds of ${roundLength} tosses give ${bits.length} fair bits.`
}

/** Section 5: the draw key. A source that the seal does not name adds no bytes. */
function drawKeyOf(c) {
  const ikm = [fromHex(c.result.reveal.seed)]
  if (c.randomness) ikm.push(c.randomness)
  if (c.fairBits) {
    const packed = Buffer.alloc(Math.ceil(c.fairBits.length / 8))
    c.fairBits.forEach((bit, index) => {
      packed[index >> 3] |= bit << (7 - (index & 7))
    })
    ikm.push(sha256(byte(6), u32(c.fairBits.length), packed))
  }
  return Buffer.from(hkdfSync('sha256', Buffer.concat(ikm), fromHex(c.sealDigest), ascii('evenpenny/1 draw'), 32))
}

/** Step 9: every coin of every pick from the flips, in order, with award, leaf, remaining and tickets (sections 5 to 8). */
function checkWalks(c) {
  if (!c.walks) {
    const drawKey = drawKeyOf(c)
    c.walks = walkAll(c.seal, c.levels, (pick) => derivedFlips(drawKey, pick))
  }
  const lines = linesOf(c.files.get('transcript.jsonl'), 'transcript.jsonl')
  const picks = c.result.picks
  let coins = 0
  let flips = 0
  c.walks.forEach((walked, k) => {
    const line = `transcript.jsonl line ${k + 1}`
    if (k >= lines.length) fail(line, `there is no line for pick ${k}.`)
    const expected = canonical({ coins: walked.coins, leaf: walked.leaf, pick: k }, line)
    if (lines[k] !== expected) fail(line, explain(lines[k], walked, line))
    const where = `result.json picks[${k}]`
    const stated = picks[k]
    if (!stated) fail(where, `the draw has ${c.walks.length} picks, and the result ends after ${picks.length}.`)
    if (canonical(stated.award, where) !== canonical(walked.award, where))
      fail(`${where}.award`, `it is not ${canonical(walked.award, where)}.`)
    const truth = { leaf: walked.leaf, pick: k, remaining: walked.remaining, tickets: c.tickets[walked.leaf] }
    for (const [name, value] of Object.entries(truth)) {
      if (stated[name] !== value) fail(`${where}.${name}`, `it is ${stated[name]}, and the coins give ${value}.`)
    }
    coins += walked.coins.length
    for (const coin of walked.coins) flips += coin[2].length
  })
  const n = c.walks.length
  if (picks.length > n) fail(`result.json picks[${n}]`, `the draw has only ${n} picks.`)
  if (lines.length > n) fail(`transcript.jsonl line ${n + 1}`, `the draw has only ${n} picks.`)
  return `${n} picks, ${coins} coins and ${flips} flips, each as the sources give it.`
}

/** Says which coin of a transcript line differs from the walk. */
function explain(line, walked, where) {
  const stated = parseCanonical(line, where)
  members(stated, ['coins', 'leaf', 'pick'], where)
  const coins = list(stated.coins, where)
  const differs = walked.coins.findIndex((coin, j) => canonical(coins[j] ?? null, where) !== canonical(coin, where))
  if (differs >= 0) {
    return `coin ${differs + 1} of pick ${walked.pick} is ${canonical(coins[differs] ?? null, where)}, and the flips give ${canonical(walked.coins[differs], where)}.`
  }
  return `pick ${walked.pick} has ${walked.coins.length} coins and ends at leaf ${walked.leaf}; the line says otherwise.`
}

/** Step 10: every label and commitment against its leaf (sections 1 and 8). */
function checkLabels(c) {
  const firstPick = new Map() // leaf → its first pick: a Map keeps this order
  const winners = new Set()
  c.result.picks.forEach((pick, k) => {
    const commit = commitEntry(fromHex(pick.labelCommit), fromHex(pick.identityCommit))
    if (!commit.equals(c.commitOf(pick.leaf)))
      fail(`result.json picks[${k}]`, `its commitments are not those of leaf ${pick.leaf}.`)
    if (!firstPick.has(pick.leaf)) firstPick.set(pick.leaf, k)
    if (!('reserve' in pick.award)) winners.add(pick.leaf)
  })
  let before = -1
  const opened = new Set()
  linesOf(c.files.get('labels.jsonl'), 'labels.jsonl').forEach((line, index) => {
    const where = `labels.jsonl line ${index + 1}`
    const { label, labelSalt, leaf } = members(parseCanonical(line, where), ['label', 'labelSalt', 'leaf'], where)
    text(label, `${where} label`)
    hex(labelSalt, 32, `${where} labelSalt`)
    const k = firstPick.get(count(leaf, 0, MAX_ENTRANTS, `${where} leaf`))
    if (k === undefined) fail(where, `leaf ${leaf} was not picked.`)
    if (k <= before) fail(where, `leaf ${leaf} stands twice, or not in the order of first picks.`)
    before = k
    if (toHex(commitLabel(labelSalt, label)) !== c.result.picks[k].labelCommit)
      fail(where, `it is not the label of leaf ${leaf}.`)
    opened.add(leaf)
  })
  c.withheld = [...winners].filter((leaf) => !opened.has(leaf))
  const withheld = c.withheld.length ? ` Label withheld: ${leaves(c.withheld)}.` : ''
  return `${c.result.picks.length} picks fit their leaves, and ${opened.size} opened labels fit.${withheld}`
}

/** Names leaves, the first twenty of them. */
function leaves(numbers) {
  const more = numbers.length > 20 ? ` and ${numbers.length - 20} more` : ''
  return `leaf ${numbers.slice(0, 20).join(', ')}${more}`
}

/** Step 11: the transcript's digest (section 8). */
function checkTranscript(c) {
  if (toHex(sha256(c.files.get('transcript.jsonl'))) !== c.result.transcript) {
    fail('result.json transcript', 'it is not the digest of transcript.jsonl.')
  }
  return `transcript.jsonl has the digest in the result.`
}

/** Step 12: receipts, short proofs and later members, where given (sections 9 and 10). */
function checkReceipts(c) {
  const found = c.receipts.map((path) => checkReceipt(c, readFileSync(path), basename(path)))
  if (found.length === 0) found.push('no receipt was given.')
  for (const check of [checkLog, checkTimestamp, checkWitnessed, checkReplaced]) {
    const told = check(c)
    if (told) found.push(told)
  }
  if (c.later.length) found.push(`Not examined: ${c.later.join(', ')}.`)
  if (c.strays.length)
    found.push(`In the folder, but no part of the archive, and not examined: ${c.strays.join(', ')}.`)
  return found.join(' ')
}

const REFERENCE = /^[23456789ABCDEFGHJKLMNPQRSTUVWXYZ]{8,64}$/

function checkReceipt(c, bytes, where) {
  const at = (name) => `${where} ${name}`
  const receipt = parseCanonical(utf8(bytes, where), where)
  const full = receipt?.kind === 'receipt'
  const own = full ? ['label', 'labelSalt', 'identity', 'identitySalt'] : ['entryCommit']
  members(receipt, ['format', 'kind', 'seal', 'leaf', 'tickets', 'path', ...own], where)
  one(receipt.format, ['evenpenny/1'], at('format'))
  one(receipt.kind, ['receipt', 'inclusion'], at('kind'))
  if (hex(receipt.seal, 32, at('seal')) !== c.sealDigest) fail(at('seal'), 'it belongs to another seal.')
  const { count: n, tickets: total, root } = c.seal.entries
  const leaf = count(receipt.leaf, 0, n - 1, at('leaf'))
  let sum = count(receipt.tickets, 1, MAX_TICKETS_EACH, at('tickets'))

  let entryCommit
  if (full) {
    text(receipt.label, at('label'))
    hex(receipt.labelSalt, 32, at('labelSalt'))
    hex(receipt.identitySalt, 32, at('identitySalt'))
    const identity = members(receipt.identity, ['contact', 'name', 'numbers', 'reference'], at('identity'))
    for (const name of Object.keys(identity)) {
      text(identity[name], at(`identity.${name}`), name === 'contact' || name === 'numbers')
    }
    if (!REFERENCE.test(identity.reference))
      fail(at('identity.reference'), 'it is not 8 to 64 characters of the alphabet for references.')
    entryCommit = commitEntry(
      commitLabel(receipt.labelSalt, receipt.label),
      commitIdentity(receipt.identitySalt, identity),
    )
  } else {
    entryCommit = fromHex(hex(receipt.entryCommit, 32, at('entryCommit')))
  }

  // Up the path to the root. The sides are those of this leaf and no other, so that its number is proved too.
  const sides = sidesOf(leaf, n)
  if (list(receipt.path, at('path')).length !== sides.length)
    fail(at('path'), `leaf ${leaf} of ${n} has ${sides.length} siblings on its path.`)
  let hashed = sha256(byte(0), u64(sum), entryCommit)
  receipt.path.forEach((sibling, index) => {
    const here = at(`path[${index}]`)
    members(sibling, ['hash', 'side', 'tickets'], here)
    const other = fromHex(hex(sibling.hash, 32, `${here}.hash`))
    count(sibling.tickets, 1, MAX_COUNT, `${here}.tickets`)
    if (sibling.side !== sides[index])
      fail(`${here}.side`, `the sibling of leaf ${leaf} stands on the side ${sides[index]} here.`)
    const left = sibling.side === 'L'
    hashed = left
      ? sha256(byte(1), u64(sibling.tickets), other, u64(sum), hashed)
      : sha256(byte(1), u64(sum), hashed, u64(sibling.tickets), other)
    sum += sibling.tickets
    if (sum > total) fail(`${here}.tickets`, `the tickets on the path add up to more than the seal's ${total}.`)
  })
  if (sum !== total || toHex(hashed) !== root) fail(at('path'), "it does not lead to the seal's root and total.")
  return `${where}: leaf ${leaf} with ${receipt.tickets} tickets is in the sealed list.`
}

// ---- The site's log (section 13) ------------------------------------------------------------------------------------
//
// checkpoint.txt is a signed note (C2SP signed-note and tlog-checkpoint): the log's name, its size and the root of its tree, an
// empty line, and signatures. log-proof.json holds what the log says of this draw, each entry with its path to that root. Leaves
// and nodes are hashed as RFC 9162, section 2.1.1, has it; unlike the list's tree this one has no counts.

const LOG_EVENTS = (
  'opened closed sealed replaced postponed cancelled tosses-done drawn failed revealed promoted forfeited substituted ' +
  'withheld suspended restored checkpointed'
).split(' ')

/** Bytes of padded base64 in its one spelling, or null. */
function base64(text) {
  const bytes = Buffer.from(text, 'base64')
  return bytes.toString('base64') === text ? bytes : null
}

/** The text of a signed note and its signature lines: name, four bytes of key id, signature. */
function readNote(bytes, where) {
  if (bytes.length > 2 ** 18) fail(where, 'it is longer than any signed note here.')
  const note = utf8(bytes, where)
  if (!note.endsWith('\n') || /[\0-\x09\x0b-\x1f]/.test(note)) fail(where, 'a signed note is whole lines of text.')
  const split = note.lastIndexOf('\n\n')
  const lines = note
    .slice(split + 2)
    .split('\n')
    .slice(0, -1)
  if (split < 1 || lines.length === 0) fail(where, 'it has no text, no empty line or no signature.')
  if (lines.length > 100) fail(where, 'it has more than 100 signatures.')
  const signatures = lines.map((line, index) => {
    const match = /^\u2014 ([^\p{White_Space}+]+) ([A-Za-z0-9+/=]+)$/u.exec(line)
    const raw = match && base64(match[2])
    if (!raw || raw.length < 5) fail(`${where} signature ${index + 1}`, 'it is not a dash, a name and base64.')
    return { name: match[1], id: raw.subarray(0, 4), signature: raw.subarray(4) }
  })
  return { text: note.slice(0, split + 1), signatures }
}

/** A checkpoint: three lines, signed under the log's name by the key that signed the seal. */
function readCheckpoint(c, where) {
  const note = readNote(c.files.get(where), where)
  const { text: body, signatures } = note
  const lines = /^([^\n]+)\n(0|[1-9][0-9]{0,15})\n([A-Za-z0-9+/=]{44})\n$/.exec(body)
  if (!lines) fail(where, 'a checkpoint is three lines: the name of the log, its size, its root.')
  const [, origin, size, encoded] = lines
  const root = base64(encoded)
  count(Number(size), 0, MAX_COUNT, `${where} line 2`)
  if (!root || root.length !== 32) fail(`${where} line 3`, 'the root is not 32 bytes in base64.')
  if (/[\p{White_Space}+]/u.test(origin)) fail(`${where} line 1`, 'the name of the log holds a space or a plus sign.')
  const id = sha256(Buffer.from(`${origin}\n`, 'utf8'), byte(1), c.rawKey).subarray(0, 4)
  const own = signatures.filter((line) => line.name === origin && line.id.equals(id))
  if (own.length === 0) fail(where, 'no signature is of the key that signed the seal.')
  for (const { signature } of own) {
    if (signature.length !== 64 || !verify(null, Buffer.from(body, 'utf8'), c.publicKey, signature)) {
      fail(where, 'the signature of the key that signed the seal is not good.')
    }
  }
  return { origin, size: Number(size), root, note }
}

/** A leaf of the log: its data are these very bytes. */
function readLogLeaf(data, where) {
  if (typeof data !== 'string') fail(where, 'text is expected.')
  const names = ['at', 'digest', 'draw', 'event', 'format', 'kind', 'note', 'organisation', 'supersedes']
  const leaf = members(parseCanonical(data, where), names, where)
  time(leaf.at, `${where} at`)
  for (const name of ['digest', 'note', 'supersedes']) if (leaf[name] !== null) hex(leaf[name], 32, `${where} ${name}`)
  if (leaf.draw !== null) text(leaf.draw, `${where} draw`)
  one(leaf.event, LOG_EVENTS, `${where} event`)
  one(leaf.format, ['evenpenny/1'], `${where} format`)
  one(leaf.kind, ['log'], `${where} kind`)
  text(leaf.organisation, `${where} organisation`)
  return leaf
}

/** Entries of the log with their paths, in ascending order. */
function readLogProof(c, where) {
  const proof = members(parseCanonical(utf8(c.files.get(where), where), where), ['entries', 'format', 'kind'], where)
  one(proof.format, ['evenpenny/1'], `${where} format`)
  one(proof.kind, ['log-proof'], `${where} kind`)
  let before = -1
  return list(proof.entries, `${where} entries`).map((entry, k) => {
    const at = `${where} entries[${k}]`
    members(entry, ['index', 'leaf', 'path'], at)
    if (count(entry.index, 0, MAX_COUNT - 1, `${at}.index`) <= before) fail(`${at}.index`, 'it is not in its order.')
    before = entry.index
    const leaf = readLogLeaf(entry.leaf, `${at}.leaf`)
    list(entry.path, `${at}.path`).forEach((sibling, j) => hex(sibling, 32, `${at}.path[${j}]`))
    return { ...leaf, index: entry.index, path: entry.path, data: entry.leaf, where: at }
  })
}

/** An entry's path must lead to the root of a checkpoint, with the sides that the entry's number has. */
function leadsTo(entry, head, name) {
  const sides = entry.index < head.size ? sidesOf(entry.index, head.size) : null
  if (!sides || sides.length !== entry.path.length)
    fail(`${entry.where}.path`, `entry ${entry.index} of ${head.size} does not have such a path.`)
  const top = entry.path.reduce(
    (below, sibling, j) =>
      sides[j] === 'L' ? sha256(byte(1), fromHex(sibling), below) : sha256(byte(1), below, fromHex(sibling)),
    sha256(byte(0), Buffer.from(entry.data, 'utf8')),
  )
  if (!top.equals(head.root)) fail(`${entry.where}.path`, `it does not lead to the root in ${name}.`)
}

/** What the log says of the draw: its opening came first, then this seal, then this result, and no seal between the two. */
function checkLog(c) {
  const present = LOG_MEMBERS.filter((name) => c.files.has(name))
  if (present.length === 0) return ''
  for (const name of LOG_MEMBERS)
    if (!c.files.has(name)) fail(`the member ${name}`, `it is missing, and ${present[0]} is there.`)
  const head = readCheckpoint(c, 'checkpoint.txt')
  const where = 'log-proof.json'
  const entries = readLogProof(c, where)
  for (const entry of entries) {
    leadsTo(entry, head, 'checkpoint.txt')
    if (entry.draw !== c.seal.draw) fail(`${entry.where}.leaf draw`, 'the entry is about another draw.')
  }
  if (entries[0]?.event !== 'opened') fail(`${where} entries`, 'the log does not open the draw before everything else.')
  const isSeal = ({ event }) => event === 'sealed' || event === 'replaced'
  const sealed = entries.find((entry) => isSeal(entry) && entry.digest === c.sealDigest)
  if (!sealed) fail(`${where} entries`, 'no entry of the log names this seal.')
  const result = toHex(sha256(c.files.get('result.json')))
  const drawn = entries.find(({ event, digest }) => event === 'drawn' && digest === result)
  if (!drawn || drawn.index < sealed.index)
    fail(`${where} entries`, 'no entry of the log names this result after its seal.')
  if (
    entries.some(
      (entry) => isSeal(entry) && entry !== sealed && entry.index > sealed.index && entry.index < drawn.index,
    )
  )
    fail(`${where} entries`, 'the log names another seal between this one and the result.')
  c.log = { ...head, root: toHex(head.root) }
  return `The log ${head.origin}, ${head.size} entries, holds ${entries.length} of this draw; entry ${sealed.index} is this seal.`
}

// ---- Timestamps (RFC 3161) ------------------------------------------------------------------------------------------
//
// seal.tsr is an authority's answer: a status, and signed data (CMS, RFC 5652) over a small record with the digest of seal.json and a
// time. Its bytes are DER (X.690): a tag, a length, a content, and contents inside. Node verifies signatures and certificates'
// keys; what a certificate is for is read here, since a timestamp counts only under one that is for timestamps alone.

const SEQUENCE = 0x30
const OIDS = {
  signedData: '1.2.840.113549.1.7.2',
  tstInfo: '1.2.840.113549.1.9.16.1.4',
  contentType: '1.2.840.113549.1.9.3',
  messageDigest: '1.2.840.113549.1.9.4',
  signingCertificate: '1.2.840.113549.1.9.16.2.12',
  signingCertificateV2: '1.2.840.113549.1.9.16.2.47',
  timeStamping: '1.3.6.1.5.5.7.3.8',
}
const DIGESTS = {
  '1.3.14.3.2.26': 'sha1',
  '2.16.840.1.101.3.4.2.1': 'sha256',
  '2.16.840.1.101.3.4.2.2': 'sha384',
  '2.16.840.1.101.3.4.2.3': 'sha512',
}
// Algorithm of a signature → kind of key, and the digest where the algorithm names one.
const SIGNATURES = {
  '1.2.840.113549.1.1.1': ['rsa', null],
  '1.2.840.113549.1.1.11': ['rsa', 'sha256'],
  '1.2.840.113549.1.1.12': ['rsa', 'sha384'],
  '1.2.840.113549.1.1.13': ['rsa', 'sha512'],
  '1.2.840.10045.4.3.2': ['ec', 'sha256'],
  '1.2.840.10045.4.3.3': ['ec', 'sha384'],
  '1.2.840.10045.4.3.4': ['ec', 'sha512'],
  '1.3.101.112': ['ed25519', null],
}
// The development authority's key is public: anybody can make its timestamps. It passes only with --test-timestamps.
const DEVELOPMENT_AUTHORITY = `-----BEGIN CERTIFICATE-----
MIIBzTCCAXSgAwIBAgIBATAKBggqhkjOPQQDAjBMMR4wHAYDVQQKDBVFdmVucGVu
bnkgZGV2ZWxvcG1lbnQxKjAoBgNVBAMMIURldmVsb3BtZW50IGF1dGhvcml0eSAt
IHdvcnRobGVzczAgFw0yMDAxMDEwMDAwMDBaGA8yMDk5MTIzMTIzNTk1OVowTDEe
MBwGA1UECgwVRXZlbnBlbm55IGRldmVsb3BtZW50MSowKAYDVQQDDCFEZXZlbG9w
bWVudCBhdXRob3JpdHkgLSB3b3J0aGxlc3MwWTATBgcqhkjOPQIBBggqhkjOPQMB
BwNCAARY5xHbALEHxv7Rx8tj52SutRGry4wEWUoLF4MhucVLQE3CDJio6Q8g7eZ+
8G2/K7dLcZjJQIf6cYtF1cr0AiYvo0UwQzASBgNVHRMBAf8ECDAGAQH/AgEAMA4G
A1UdDwEB/wQEAwICBDAdBgNVHQ4EFgQUpWVNnG9pzA4yoX8CzfFzTwwptTkwCgYI
KoZIzj0EAwIDRwAwRAIgaHdfIlGzp9qpbkFSTmbSoQcVVDjwef+ZlMjG3zYHVXIC
IAjWzdaixA9RT6axvJ3euGL5V8tqH90aLfflAYEl+H99
-----END CERTIFICATE-----`
const DEVELOPMENT_SIGNER_KEY = 'cd76ca6942dee894374808b1bc3805a5a794e3a9dfb8a4017c68b0d6cda12344' // SHA-256 of the key that signs under it

/** The element at `at`: tag, all its bytes, its content. Lengths are definite, and written as shortly as they can be. */
function derAt(bytes, at, where) {
  const broken = () => fail(where, 'its DER is not well formed.')
  if (at + 2 > bytes.length || (bytes[at] & 31) === 31) broken()
  let start = at + 2
  let length = bytes[at + 1]
  if (length >= 128) {
    const octets = length & 127
    if (octets < 1 || octets > 4 || start + octets > bytes.length) broken()
    length = bytes.readUIntBE(start, octets)
    if (length < 128 || length < 256 ** (octets - 1)) broken()
    start += octets
  }
  if (start + length > bytes.length) broken()
  return { tag: bytes[at], all: bytes.subarray(at, start + length), content: bytes.subarray(start, start + length) }
}

/** Bytes that are exactly one element of a tag. */
function derOf(bytes, tag, where) {
  const element = derAt(bytes, 0, where)
  if (element.tag !== tag || element.all.length !== bytes.length) fail(where, 'its DER is not what belongs here.')
  return element
}

function derInside(element, where) {
  const inside = []
  for (let at = 0; at < element.content.length; at += inside.at(-1).all.length) {
    if (inside.length > 1000) fail(where, 'it has too many elements.')
    inside.push(derAt(element.content, at, where))
  }
  return inside
}

/** Goes through a sequence: `take` wants an element, of this tag where one is given; `maybe` takes one only if it is there. */
function derFields(element, where, tag = SEQUENCE) {
  if (element.tag !== tag) fail(where, 'its DER is not what belongs here.')
  const inside = derInside(element, where)
  const maybe = (wanted) => (inside[0]?.tag === wanted ? inside.shift() : null)
  const take = (wanted = inside[0]?.tag) => maybe(wanted) ?? fail(where, 'an element of its DER is missing.')
  const end = () => inside.length === 0 || fail(where, 'there is an element too many in its DER.')
  return { take, maybe, end }
}

function oidOf(element, where) {
  if (element.tag !== 6 || element.content.length === 0 || element.content.length > 64)
    fail(where, 'an identifier is wrong.')
  const arcs = []
  let arc = 0
  for (const octet of element.content) {
    arc = arc * 128 + (octet & 127)
    if (octet < 128) {
      arcs.push(arc)
      arc = 0
    }
  }
  const top = Math.min(2, Math.floor(arcs[0] / 40))
  return [top, arcs[0] - 40 * top, ...arcs.slice(1)].join('.')
}

/** The bytes of a whole number; an algorithm's identifier; a small number; a truth value. */
const integerOf = (element, where) =>
  element.tag === 2 && element.content.length > 0 ? element.content : fail(where, 'a whole number is expected.')
const algorithmOf = (element, where) => oidOf(derFields(element, where).take(), where)
const truthOf = (element, where) =>
  element.content.length === 1 && [0, 255].includes(element.content[0])
    ? element.content[0] === 255
    : fail(where, 'a truth value is wrong.')
function smallOf(element, where) {
  const bytes = integerOf({ ...element, tag: 2 }, where)
  if (bytes.length > 6 || bytes[0] >= 128) fail(where, 'a number is too large, or below 0.')
  return bytes.readUIntBE(0, bytes.length)
}

/** Seconds since 1970 of an ASN.1 time in UTC, with what stands behind the point apart. */
function asn1Time(element, where) {
  const written = element.content.toString('latin1')
  const form =
    element.tag === 0x18
      ? /^(\d{4})(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)(\.\d{0,8}[1-9])?Z$/
      : element.tag === 0x17
        ? /^(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)(\d\d)Z$/
        : null
  const parts = form?.exec(written)
  if (!parts) fail(where, 'a time is not one in UTC.')
  const [, year, month, day, hour, minute, second, fraction] = parts
  const full = year.length === 4 ? year : `${Number(year) < 50 ? 20 : 19}${year}`
  return {
    seconds: time(`${full}-${month}-${day}T${hour}:${minute}:${second}Z`, where),
    fraction: Number(`0${fraction ?? ''}`),
  }
}

/** A certificate: Node's view of it, and what Node does not tell. */
function readCertificate(bytes, where) {
  if (bytes.length > 16 * 1024) fail(where, 'a certificate is too long.')
  const outer = derFields(derOf(bytes, SEQUENCE, where), where)
  const body = outer.take(SEQUENCE)
  const algorithm = outer.take(SEQUENCE)
  const bits = outer.take(3)
  outer.end()
  const fields = derFields(body, where)
  fields.maybe(0xa0)
  const serial = integerOf(fields.take(), where)
  if (!fields.take(SEQUENCE).all.equals(algorithm.all)) fail(where, 'a certificate names two algorithms.')
  const issuer = fields.take(SEQUENCE).all
  const validity = derFields(fields.take(SEQUENCE), where)
  const from = asn1Time(validity.take(), where).seconds
  const until = asn1Time(validity.take(), where).seconds
  const subject = fields.take(SEQUENCE)
  const spki = fields.take(SEQUENCE).all
  fields.maybe(0x81)
  fields.maybe(0x82)
  const wrapped = fields.maybe(0xa3)
  fields.end()
  const c = {
    bytes,
    serial,
    issuer,
    subject: subject.all,
    from,
    until,
    spki,
    body: body.all,
    ca: false,
    below: Infinity,
    unknown: false,
  }
  c.algorithm = algorithmOf(algorithm, where)
  c.signature = bits.content.subarray(1)
  const names = new Map()
  for (const set of derInside(subject, where)) {
    for (const pair of derInside(set, where)) {
      const part = derFields(pair, where)
      const oid = oidOf(part.take(6), where)
      if (!names.has(oid)) names.set(oid, part.take().content.toString('utf8'))
    }
  }
  c.name = names.get('2.5.4.3') ?? names.get('2.5.4.10') ?? ''
  const seen = new Set()
  for (const extension of wrapped ? derInside(derOf(wrapped.content, SEQUENCE, where), where) : []) {
    const part = derFields(extension, where)
    const oid = oidOf(part.take(6), where)
    const flag = part.maybe(1)
    const critical = flag !== null && truthOf(flag, where)
    const value = part.take(4).content
    if (seen.has(oid)) fail(where, 'a certificate has an extension twice.')
    seen.add(oid)
    if (oid === '2.5.29.19') {
      const limits = derFields(derOf(value, SEQUENCE, where), where)
      const is = limits.maybe(1)
      c.ca = is !== null && truthOf(is, where)
      const most = limits.maybe(2)
      if (most) c.below = smallOf(most, where)
    } else if (oid === '2.5.29.15') c.usage = derOf(value, 3, where).content[1] ?? 0
    else if (oid === '2.5.29.37')
      c.purposes = { critical, oids: derInside(derOf(value, SEQUENCE, where), where).map((one) => oidOf(one, where)) }
    else if (oid === '2.5.29.14') c.keyId = derOf(value, 4, where).content
    else if (oid !== '2.5.29.32') c.unknown ||= critical
  }
  return c
}

/** Whether a signature is good under a certificate's key; null where its kind is not known here. */
function signedUnder(certificate, oid, digest, message, signature) {
  const known = SIGNATURES[oid]
  if (!known || (known[1] !== null && digest !== null && known[1] !== digest)) return null
  const algorithm = known[1] ?? digest
  try {
    const key = createPublicKey({ key: certificate.spki, format: 'der', type: 'spki' })
    const { namedCurve, modulusLength } = key.asymmetricKeyDetails
    const curve = ['prime256v1', 'secp384r1'].includes(namedCurve)
    if (key.asymmetricKeyType !== known[0] || (known[0] === 'ec' && !curve) || modulusLength < 2048) return null
    if (known[0] === 'ed25519') return verify(null, message, key, signature)
    if (algorithm === null || algorithm === 'sha1') return null
    return verify(algorithm, message, key, signature)
  } catch {
    return false
  }
}

function issued(certificate, issuer, below) {
  if (!certificate.issuer.equals(issuer.subject) || issuer.unknown || !issuer.ca || issuer.below < below) return false
  if (issuer.usage !== undefined && (issuer.usage & 4) === 0) return false
  return signedUnder(issuer, certificate.algorithm, null, certificate.body, certificate.signature) === true
}

/** The trusted certificate to which one leads, through three authorities at most; null where there is none. */
function vouchFor(certificate, included, trusted, at, below = 0) {
  const valid = (one) => one.from <= at && at <= one.until
  for (const anchor of trusted) {
    if (anchor.bytes.equals(certificate.bytes) || (valid(anchor) && issued(certificate, anchor, below))) return anchor
  }
  if (below === 3) return null
  for (const issuer of included) {
    if (issuer === certificate || !valid(issuer) || !issued(certificate, issuer, below)) continue
    const anchor = vouchFor(issuer, included, trusted, at, below + 1)
    if (anchor) return anchor
  }
  return null
}

/** Verifies a timestamp over a digest: who signed it, when, and who of the trusted vouches for them, or null. */
function readTimestamp(bytes, imprint, trusted, where) {
  if (bytes.length > 64 * 1024) fail(where, 'it is longer than any timestamp.')
  const answer = derFields(derOf(bytes, SEQUENCE, where), where)
  const status = smallOf(derFields(answer.take(SEQUENCE), where).take(2), where)
  if (status > 1) fail(where, `the authority gave no timestamp (status ${status}).`)
  const outer = derFields(answer.take(SEQUENCE), where)
  answer.end()
  if (oidOf(outer.take(), where) !== OIDS.signedData) fail(where, 'it is no signed data.')
  const data = derFields(derOf(outer.take(0xa0).content, SEQUENCE, where), where)
  outer.end()
  data.take(2)
  data.take(0x31)
  const inner = derFields(data.take(SEQUENCE), where)
  if (oidOf(inner.take(), where) !== OIDS.tstInfo) fail(where, 'what is signed is no timestamp.')
  const content = derOf(inner.take(0xa0).content, 4, where).content
  inner.end()
  const held = data.maybe(0xa0)
  data.maybe(0xa1)
  const signers = derInside(data.take(0x31), where)
  data.end()
  if (signers.length !== 1) fail(where, 'it does not have exactly one signer.')

  const info = derFields(derOf(content, SEQUENCE, where), where)
  if (smallOf(info.take(2), where) !== 1) fail(where, 'it has another version than 1.')
  info.take(6)
  const message = derFields(info.take(SEQUENCE), where)
  const over = DIGESTS[algorithmOf(message.take(SEQUENCE), where)]
  if (over !== 'sha256' || !message.take(4).content.equals(imprint))
    fail(`${where} messageImprint`, 'it is a timestamp of something else.')
  info.take(2)
  const stated = asn1Time(info.take(0x18), where)
  const accuracy = info.maybe(SEQUENCE)
  info.maybe(1)
  info.maybe(2)
  info.maybe(0xa0)
  const extensions = info.maybe(0xa1)
  info.end()
  for (const extension of extensions ? derInside(extensions, where) : []) {
    const part = derFields(extension, where)
    part.take(6)
    const critical = part.maybe(1)
    if (critical && truthOf(critical, where)) fail(where, 'it has an extension that is not known.')
  }
  let late = 0
  if (accuracy) {
    const part = derFields(accuracy, where)
    for (const [tag, unit] of [
      [2, 1],
      [0x80, 1000],
      [0x81, 1_000_000],
    ]) {
      const given = part.maybe(tag)
      const value = given ? smallOf(given, where) : 0
      if (unit > 1 && value > 999) fail(where, 'its accuracy is not one.')
      late += value / unit
    }
    part.end()
  }

  const signer = derFields(signers[0], where)
  signer.take(2)
  const keyId = signer.maybe(0x80)
  const named = keyId ? null : derFields(signer.take(SEQUENCE), where)
  const [issuer, serial] = named ? [named.take(SEQUENCE).all, integerOf(named.take(), where)] : []
  const digest = DIGESTS[algorithmOf(signer.take(SEQUENCE), where)]
  const attributes = signer.take(0xa0)
  const algorithm = algorithmOf(signer.take(SEQUENCE), where)
  const signature = signer.take(4).content
  signer.maybe(0xa1)
  signer.end()
  if (!digest) fail(`${where} digestAlgorithm`, 'its digest is not one known here.')
  const signedAttributes = new Map()
  for (const attribute of derInside(attributes, where)) {
    const part = derFields(attribute, where)
    const oid = oidOf(part.take(), where)
    const values = derInside(part.take(0x31), where)
    if (values.length !== 1 || signedAttributes.has(oid)) fail(where, 'a signed attribute has not one value.')
    signedAttributes.set(oid, values[0])
  }
  const kind = signedAttributes.get(OIDS.contentType)
  if (!kind || oidOf(kind, where) !== OIDS.tstInfo)
    fail(`${where} contentType`, 'its signature is over another kind of content.')
  const digested = signedAttributes.get(OIDS.messageDigest)?.content
  if (!digested?.equals(hash(digest, content, 'buffer')))
    fail(`${where} messageDigest`, 'its signature is over other content.')

  const included = (held ? derInside(held, where) : [])
    .filter(({ tag }) => tag === SEQUENCE)
    .map(({ all }) => readCertificate(all, where))
  if (included.length > 10) fail(where, 'it has too many certificates.')
  const meant = (one) =>
    keyId ? one.keyId?.equals(keyId.content) : one.issuer.equals(issuer) && one.serial.equals(serial)
  const certificate = [...included, ...trusted].find(meant)
  if (!certificate) fail(`${where} certificates`, 'it holds no certificate of its signer.')
  const naming = [
    [OIDS.signingCertificate, 'sha1'],
    [OIDS.signingCertificateV2, 'sha256'],
  ].filter(([oid]) => signedAttributes.has(oid))
  for (const [oid, usual] of naming) {
    const first = derInside(derFields(signedAttributes.get(oid), where).take(SEQUENCE), where)[0]
    const part = derFields(first ?? fail(where, 'a signed attribute names no certificate.'), where)
    const other = part.maybe(SEQUENCE)
    const by = other ? DIGESTS[algorithmOf(other, where)] : usual
    if (!by || !part.take(4).content.equals(hash(by, certificate.bytes, 'buffer')))
      fail(`${where} signingCertificate`, 'its signed attributes name another certificate.')
  }
  if (naming.length === 0) fail(`${where} signingCertificate`, 'its signed attributes name no certificate.')
  const signed = Buffer.from(attributes.all)
  signed[0] = 0x31 // what is signed is the same bytes as a SET (RFC 5652, section 5.4)
  const good = signedUnder(certificate, algorithm, digest, signed, signature)
  if (good === null) fail(`${where} signatureAlgorithm`, 'its signature is of a kind that is not known here.')
  if (!good) fail(`${where} signature`, `it is not signed by ${certificate.name}.`)
  const { purposes, usage } = certificate
  if (!purposes?.critical || purposes.oids.length !== 1 || purposes.oids[0] !== OIDS.timeStamping) {
    fail(`${where} certificates`, `the certificate of ${certificate.name} is not for timestamps alone.`)
  }
  if ((usage !== undefined && (usage & 0xc0) === 0) || certificate.unknown)
    fail(`${where} certificates`, 'its signer may not sign.')
  if (stated.seconds < certificate.from || stated.seconds > certificate.until)
    fail(`${where} genTime`, 'its certificate was not valid then.')
  return {
    at: stated.seconds,
    latest: Math.ceil(stated.seconds + stated.fraction + late),
    name: certificate.name || 'an authority without a name',
    by: vouchFor(certificate, included, trusted, stated.seconds),
  }
}

/** Certificates of a PEM text. */
function certificatesOf(pem, where) {
  const blocks = pem.match(/-----BEGIN CERTIFICATE-----[^-]+-----END CERTIFICATE-----/g) ?? []
  return blocks.map((block) => readCertificate(Buffer.from(block.split('\n').slice(1, -1).join(''), 'base64'), where))
}

const isoTime = (seconds) => new Date(seconds * 1000).toISOString().replace('.000Z', 'Z')

/** The first second that is too late: the draw, or, where a coin may be tossed before it, four hours before the round. */
function tooLate(seal) {
  const drawAt = time(seal.drawAt, 'seal.json drawAt')
  const { beacon, tosses } = seal.sources
  return beacon && tosses
    ? Math.min(drawAt, beacon.genesisTime + (beacon.round - 1) * beacon.period - 4 * 3600)
    : drawAt
}

/** seal.tsr: a timestamp over seal.json, and whether it comes before the draw and any toss. */
function checkTimestamp(c) {
  const where = 'seal.tsr'
  if (!c.files.has(where)) return ''
  const trusted = [...c.authorities, ...(c.testTimestamps ? certificatesOf(DEVELOPMENT_AUTHORITY, where) : [])]
  const stamp = readTimestamp(c.files.get(where), fromHex(c.sealDigest), trusted, where)
  const when = `${stamp.name} put a timestamp on the seal at ${isoTime(stamp.at)}`
  if (!stamp.by) {
    c.notShown.push(`The timestamp is by ${stamp.name}, for whom no certificate given here vouches.`)
    return `${when}; no certificate given here vouches for it.`
  }
  if (stamp.latest >= tooLate(c.seal)) {
    c.notShown.push(`The timestamp by ${stamp.name}, of ${isoTime(stamp.at)}, does not come before the draw.`)
    return `${when}, which is not before the draw and any toss.`
  }
  c.shownBy.push(`the timestamp of ${stamp.name} at ${isoTime(stamp.at)}`)
  const [own] = certificatesOf(DEVELOPMENT_AUTHORITY, where)
  const key = toHex(sha256(stamp.by.spki))
  if (stamp.by.spki.equals(own.spki) || key === DEVELOPMENT_SIGNER_KEY) c.developmentAuthority = true
  return `${when}, before the draw; ${stamp.by.name || 'a certificate given here'} vouches for it.`
}

// ---- Outside witnesses of the log (C2SP tlog-cosignature) -----------------------------------------------------------
//
// witnessed.txt is a checkpoint from before the draw, with cosignatures: others say that they saw the log so, and that it only
// grew. witnessed-proof.json leads from the log's entry of this seal to that checkpoint's root.

/** NAME+ID+KEY as people hand it on: an Ed25519 key of type 4. */
function readWitnessKey(written) {
  const [, name, id, encoded] = /^([^+\s]+)\+([0-9a-f]{8})\+(.+)$/.exec(written) ?? []
  const key = encoded && base64(encoded)
  if (!key || key.length !== 33 || key[0] !== 4) throw new Usage('--witness wants a key as NAME+ID+KEY, of type 4.')
  const computed = toHex(sha256(Buffer.from(`${name}\n`, 'utf8'), key).subarray(0, 4))
  if (computed !== id) throw new Usage(`--witness ${name}: the id of this name and key is ${computed}, and not ${id}.`)
  const der = Buffer.concat([fromHex('302a300506032b6570032100'), key.subarray(1)])
  return { name, id: fromHex(id), key: createPublicKey({ key: der, format: 'der', type: 'spki' }) }
}

/** The cosignatures of the given witnesses in a note; one that claims to be of such a witness and is not, fails. */
function cosignatures(c, note, where) {
  const found = []
  note.signatures.forEach(({ name, id, signature }, index) => {
    const witness = c.witnesses.find((one) => one.name === name && one.id.equals(id))
    if (!witness) return
    const seconds = signature.length === 72 ? Number(signature.readBigUInt64BE(0)) : Number.NaN
    const message = Buffer.from(`cosignature/v1\ntime ${seconds}\n${note.text}`, 'utf8')
    if (!Number.isSafeInteger(seconds) || !verify(null, message, witness.key, signature.subarray(8))) {
      fail(`${where} signature ${index + 1}`, `the cosignature of ${name} is not good.`)
    }
    found.push({ name, at: seconds })
  })
  return found
}

function checkWitnessed(c) {
  const found = c.log
    ? cosignatures(c, c.log.note, 'checkpoint.txt').map(({ name, at }) => `${name} cosigned the log at ${isoTime(at)}.`)
    : []
  const present = WITNESSED.filter((name) => c.files.has(name))
  if (present.length === 0) return found.join(' ')
  for (const name of WITNESSED)
    if (!c.files.has(name)) fail(`the member ${name}`, `it is missing, and ${present[0]} is there.`)
  const head = readCheckpoint(c, 'witnessed.txt')
  const where = 'witnessed-proof.json'
  const [entry, ...more] = readLogProof(c, where)
  const seals = entry?.event === 'sealed' || entry?.event === 'replaced'
  if (!seals || more.length > 0 || entry.digest !== c.sealDigest)
    fail(`${where} entries`, 'it is not the one entry of this seal.')
  leadsTo(entry, head, 'witnessed.txt')
  const limit = tooLate(c.seal)
  const cosigned = cosignatures(c, head.note, 'witnessed.txt')
  for (const { name, at } of cosigned) {
    if (at < limit) c.shownBy.push(`the cosignature of the witness ${name} at ${isoTime(at)}`)
    else c.notShown.push(`The cosignature of ${name}, of ${isoTime(at)}, does not come before the draw.`)
    found.push(`${name} cosigned the log with this seal at ${isoTime(at)}.`)
  }
  if (cosigned.length === 0) {
    const unknown = head.note.signatures.filter(({ name }) => name !== head.origin).map(({ name }) => name)
    if (unknown.length) c.notShown.push(`The log was cosigned by ${unknown.join(', ')}, whose keys were not given.`)
    found.push(`A checkpoint of ${head.size} entries, root ${toHex(head.root)}, holds this seal.`)
  }
  return found.join(' ')
}

// ---- Replaced seals (section 3: supersedes) -------------------------------------------------------------------------

const REPLACED = /^replaced-([1-9][0-9]{0,3})\.(json|sig|tsr)$/

/** replaced.json names the seals that were replaced, oldest first; each is named by `supersedes` of the one after it. */
function checkReplaced(c) {
  const files = [...c.files.keys()].filter((name) => REPLACED.test(name))
  const where = 'replaced.json'
  if (!c.files.has(where)) {
    if (files.length > 0) fail(`the member ${where}`, `it is missing, and ${files[0]} is there.`)
    return c.seal.supersedes === null ? '' : 'The seals that this one replaced are not in the archive.'
  }
  if (c.files.get(where).length > 2 ** 18) fail(where, 'it is too long.')
  const record = members(parseCanonical(utf8(c.files.get(where), where), where), ['format', 'kind', 'seals'], where)
  one(record.format, ['evenpenny/1'], `${where} format`)
  one(record.kind, ['replaced'], `${where} kind`)
  const listed = list(record.seals, `${where} seals`)
  if (listed.length < 1 || listed.length > 1000) fail(`${where} seals`, 'from 1 to 1000 seals are expected.')
  const stray = files.find((name) => Number(REPLACED.exec(name)[1]) > listed.length)
  if (stray) fail(stray, 'replaced.json names no seal with this number.')
  const lists = []
  let before = null
  let foreign = 0
  listed.forEach((entry, k) => {
    members(entry, ['added', 'changed', 'removed', 'seal'], `${where} seals[${k}]`)
    for (const name of ['added', 'changed', 'removed'])
      count(entry[name], 0, MAX_ENTRANTS, `${where} seals[${k}].${name}`)
    hex(entry.seal, 32, `${where} seals[${k}].seal`)
    const name = `replaced-${k + 1}`
    for (const end of ['json', 'sig'])
      if (!c.files.has(`${name}.${end}`)) fail(`the member ${name}.${end}`, 'it is missing.')
    const bytes = c.files.get(`${name}.json`)
    const digest = sha256(bytes)
    if (toHex(digest) !== entry.seal) fail(`${name}.json`, 'it does not have the digest in replaced.json.')
    const seal = readSeal(c, bytes, `${name}.json`)
    if (seal.draw !== c.seal.draw) fail(`${name}.json draw`, 'it is of another draw.')
    if (seal.supersedes !== before) fail(`${name}.json supersedes`, 'it does not name the seal before it.')
    const signature = c.files.get(`${name}.sig`)
    if (signature.length !== 64) fail(`${name}.sig`, 'it does not have the 64 bytes of an Ed25519 signature.')
    if (seal.key !== c.fingerprint) foreign++
    else if (!verify(null, bytes, c.publicKey, signature))
      fail(`${name}.sig`, `it is not the signature of site-key.pem over ${name}.json.`)
    if (c.files.has(`${name}.tsr`)) readTimestamp(c.files.get(`${name}.tsr`), digest, [], `${name}.tsr`)
    lists.push(seal.entries.count)
    before = toHex(digest)
  })
  if (c.seal.supersedes !== before) fail('seal.json supersedes', 'it does not name the last seal that was replaced.')
  lists.push(c.seal.entries.count)
  listed.forEach(({ added, changed, removed }, k) => {
    const left = lists[k] - removed
    if (left < 0 || changed > left || left + added !== lists[k + 1])
      fail(`${where} seals[${k}]`, 'its counts do not lead from this list to the next.')
  })
  const replaced = listed.length === 1 ? '1 seal was' : `${listed.length} seals were`
  return `${replaced} replaced before this one.${foreign ? ` ${foreign} of them are signed by an earlier key, which is not in the archive.` : ''}`
}

// ---- Running --------------------------------------------------------------------------------------------------------

const STEPS = [
  ['The archive and its members', checkArchive],
  ['The signatures and the key', checkSignatures],
  ['The seal', checkSeal],
  ['The entries', checkEntries],
  ['The result', checkResult],
  ['The seed', checkSeed],
  ['The beacon', checkBeacon],
  ['The tosses', checkTosses],
  ['Every coin of every pick', checkWalks],
  ['Labels and commitments', checkLabels],
  ["The transcript's digest", checkTranscript],
  ['Receipts, short proofs and later members', checkReceipts],
]

/** Both halves of the verdict, and what no check can show (section 11). */
function verdict(c) {
  const lines = ['The arithmetic holds: from this seal and these sources, these picks and no others follow.']
  if (c.development) {
    lines.push(
      'THIS IS A TEST: its beacon is the development chain, whose secret is public. It shows nothing about a real draw.',
    )
  }
  if (c.shownBy.length > 0) {
    lines.push(`Sealed in time: shown by ${c.shownBy.join(', and by ')}, over the seal`, `  ${c.sealDigest}`)
    if (c.developmentAuthority)
      lines.push('THIS IS A TEST: the timestamp is of the development authority, whose key is public.')
  } else {
    lines.push(
      'Sealed in time: not shown. Only a timestamp, or a checkpoint cosigned by somebody other than the site, over the seal',
      `  ${c.sealDigest}`,
      '  from before the draw time and before any toss would show it.',
    )
    const none = 'This archive has none, or none that a key or certificate given to this check vouches for.'
    lines.push(`  ${c.notShown.length > 0 ? c.notShown.join(' ') : none}`)
  }
  lines.push(
    c.key
      ? 'Signed by the key whose fingerprint was given.'
      : `Signed by an unknown key. Compare all 64 digits with the fingerprint that the site publishes: ${c.fingerprint}`,
  )
  if (c.log) {
    lines.push(
      `The site's log ${c.log.origin}, at ${c.log.size} entries with the root ${c.log.root},`,
      '  holds the opening, this seal and this result. Whether everybody is shown the same log is for those who remember its checkpoints.',
    )
  }
  if (c.withheld.length)
    lines.push(`Label withheld for ${c.withheld.length} of the winning leaves: ${leaves(c.withheld)}.`)
  lines.push(
    'What no check can show: whether every ticket sold was entered and no invented entrant was (receipts, the witness’s sample of',
    '  stubs and the money show that); whether a coin was tossed as written; and that the beacon’s members and the site, all',
    '  together, did not choose the outcome (a hall that fears this adds tosses).',
  )
  return lines.join('\n')
}

/** Runs the steps in order and stops at the first that fails. `say` is told each step as it ends. */
function run(c, say) {
  const steps = []
  for (const [index, [title, check]] of STEPS.entries()) {
    try {
      const found = check(c)
      steps.push({ step: index + 1, title, found })
      say(`step ${index + 1}  ${title}: ${found}`)
    } catch (error) {
      const [where, message] =
        error instanceof Failure ? [error.where, error.message] : ['the check itself', `it stopped: ${error.message}.`]
      return { ok: false, step: index + 1, where, message, steps }
    }
  }
  return { ok: true, step: null, where: null, message: verdict(c), steps }
}

const USAGE = `Usage: node check.mjs [--key FINGERPRINT] [--tsa FILE.pem] [--witness NAME+ID+KEY] [--test-beacon] [--test-timestamps] [--json]
                      [archive or folder] [receipt.json …]

  archive or folder   a proof archive, zipped or unpacked; without it, the folder in which check.mjs stands
  receipt.json …      receipts or short proofs to check against it
  --key FINGERPRINT   all 64 hexadecimal digits of the site's key, from its pages, posters or tickets
  --tsa FILE.pem      the certificate of a timestamp authority that you trust, from a place other than the site; may be repeated
  --witness KEY       the key of an outside witness of the site's log that you trust, as they hand it on; may be repeated
  --test-beacon       lets the development chain pass, for tests
  --test-timestamps   lets the development authority vouch for a timestamp, for tests
  --json              prints one JSON object instead of lines`

/** Reads the command line; throws Usage. */
function options(args) {
  const c = { key: null, testBeacon: false, testTimestamps: false, json: false, path: null, receipts: [] }
  Object.assign(c, { authorities: [], witnesses: [], shownBy: [], notShown: [], development: false })
  const paths = []
  for (let i = 0; i < args.length; i++) {
    if (args[i] === '--test-beacon') c.testBeacon = true
    else if (args[i] === '--test-timestamps') c.testTimestamps = true
    else if (args[i] === '--json') c.json = true
    else if (args[i] === '--tsa') c.authorities.push(...readAuthorities(args[++i] ?? ''))
    else if (args[i] === '--witness') c.witnesses.push(readWitnessKey(args[++i] ?? ''))
    else if (args[i] === '--key') {
      // People write fingerprints in groups and in capitals.
      c.key = (args[++i] ?? '').replace(/[\s:-]/g, '').toLowerCase()
      if (!/^[0-9a-f]{64}$/.test(c.key)) throw new Usage('--key wants all 64 hexadecimal digits of the fingerprint.')
    } else if (args[i].startsWith('-')) throw new Usage(`The option ${args[i]} is unknown.`)
    else paths.push(args[i])
  }
  for (const path of paths) if (!statSync(path, { throwIfNoEntry: false })) throw new Usage(`There is no ${path}.`)
  const archive = paths.length > 0 && (!paths[0].endsWith('.json') || statSync(paths[0]).isDirectory())
  c.path = archive ? paths.shift() : dirname(fileURLToPath(import.meta.url))
  c.receipts = paths
  for (const path of paths) if (!statSync(path).isFile()) throw new Usage(`${path} is not a receipt.`)
  return c
}

/** The certificates in a file that the checker trusts. */
function readAuthorities(path) {
  if (!statSync(path, { throwIfNoEntry: false })?.isFile())
    throw new Usage(`--tsa wants a file with certificates; there is no ${path}.`)
  try {
    const found = certificatesOf(readFileSync(path, 'latin1'), path)
    if (found.length > 0) return found
  } catch {
    throw new Usage(`--tsa: a certificate in ${path} cannot be read.`)
  }
  throw new Usage(`--tsa: ${path} holds no certificate in PEM.`)
}

/** Names out of a hostile archive or folder must not steer the terminal. */
const printable = (line) => line.replace(/[^\P{Cc}\n]|\p{Bidi_Control}/gu, '\ufffd')

function main(args) {
  let c
  try {
    c = options(args)
  } catch (error) {
    if (!(error instanceof Usage)) throw error
    console.error(`${error.message}\n\n${USAGE}`)
    return 2
  }
  const print = (line) => console.log(printable(line))
  const outcome = run(c, c.json ? () => {} : print)
  if (c.json) console.log(JSON.stringify(outcome))
  else if (outcome.ok) print(`\n${outcome.message}`)
  else print(`FAILED at step ${outcome.step}: ${outcome.where}: ${outcome.message}`)
  return outcome.ok ? 0 : 1
}

process.exitCode = main(process.argv.slice(2))
