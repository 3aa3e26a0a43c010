// The product's log against the second implementation of it: the same leaves, roots, proofs, notes and members, byte for byte.
import { createPrivateKey } from 'node:crypto'
import { sha256 } from '@noble/hashes/sha2.js'
import { describe, expect, it } from 'vitest'
import { checkpointText, openCheckpoint, signCheckpoint } from '#shared/log/checkpoint.ts'
import { logProofBytes } from '#shared/log/log-proof.ts'
import { buildLogTree, logLeafHash, verifyLogConsistency, verifyLogInclusion } from '#shared/merkle/rfc9162.ts'
import { LOG_EVENTS, logLeafBytes, noteDigest } from '#shared/protocol/log-leaf.ts'
import { publicKeyOf, signBytes } from '#shared/protocol/signature.ts'
import { randomFrom } from './archives.ts'
import * as reference from './log.ts'
import { hex, unhex, utf8 } from './record.ts'

const random = randomFrom('the log twice')
const organisations = ['long-row-allotments', 'kiln-street-players', '-']
const facts = Array.from({ length: 45 }, (_, index) => ({
  at: `2031-05-04T19:${String(index).padStart(2, '0')}:00Z`,
  digest: random.below(2) === 0 ? null : hex(random.bytes()),
  draw: random.below(5) === 0 ? null : `marrow-draw-${random.below(4)}`,
  event: LOG_EVENTS[random.below(LOG_EVENTS.length)] ?? 'opened',
  note: random.below(3) === 0 ? hex(random.bytes()) : null,
  organisation: organisations[random.below(3)] ?? '-',
  supersedes: random.below(6) === 0 ? hex(random.bytes()) : null,
}))
const leaves = facts.map((fact) => reference.logLeaf(fact))
const seed = random.bytes()
const privateKey = createPrivateKey({
  key: Buffer.concat([unhex('302e020100300506032b657004220420'), seed]),
  format: 'der',
  type: 'pkcs8',
})
const secret = new Uint8Array(seed)
const origin = 'kiln-street.example/log'

describe('the log in two implementations', () => {
  it('has the same leaves and the same digests of reasons', () => {
    facts.forEach((fact, index) => {
      const ours = logLeafBytes({ ...fact, format: 'evenpenny/1', kind: 'log' })
      expect(Buffer.from(ours).equals(leaves[index] as Buffer)).toBe(true)
    })
    for (const text of ['The hall was flooded.', 'Ünwetter — “verschoben”', '']) {
      const salt = random.bytes()
      expect(hex(noteDigest(sha256, new Uint8Array(salt), text))).toBe(reference.noteDigest(salt, text))
    }
  })

  it('has the same roots and proofs at every size, and each takes the proofs of the other', () => {
    for (let size = 1; size <= leaves.length; size += 1) {
      const part = leaves.slice(0, size)
      const hashes = part.map((leaf) => logLeafHash(sha256, new Uint8Array(leaf)))
      const tree = buildLogTree(sha256, hashes)
      const root = reference.treeHash(part)
      expect(hex(tree.root)).toBe(hex(root))
      const index = random.below(size)
      const path = reference.inclusionPath(index, part)
      expect(tree.inclusionProof(index).map(hex)).toEqual(path.map(hex))
      const leafHash = hashes[index] as Uint8Array
      expect(verifyLogInclusion(sha256, { index, size, leafHash, proof: path, root })).toBe(true)
      expect(reference.rootFromPath(index, size, leafHash, tree.inclusionProof(index))?.equals(root)).toBe(true)
      const first = 1 + random.below(size)
      const firstRoot = reference.treeHash(leaves.slice(0, first))
      const proof = reference.consistencyProof(first, part)
      expect(tree.consistencyProof(first).map(hex)).toEqual(proof.map(hex))
      const claim = { first, second: size, firstRoot, secondRoot: root, proof }
      expect(verifyLogConsistency(sha256, claim)).toBe(true)
    }
  })

  it('signs the same checkpoints, and each opens those of the other', () => {
    for (const size of [0, 1, 7, 45]) {
      const part = leaves.slice(0, size)
      const head = { origin, size, root: new Uint8Array(reference.treeHash(part)) }
      const publicKey = publicKeyOf(secret)
      const ours = signCheckpoint(sha256, head, { publicKey, sign: (message) => signBytes(secret, message) })
      const theirs = reference.checkpoint(origin, part, privateKey)
      expect(ours).toBe(theirs)
      expect(openCheckpoint(sha256, utf8(theirs), { publicKeys: [publicKey], origin }).ok).toBe(true)
      expect(reference.readCheckpoint(ours, publicKey)).toEqual({ origin, size, root: hex(head.root) })
      expect(reference.readCheckpoint(ours.replace(origin, `${origin}s`), publicKey)).toBeNull()
      expect(ours.startsWith(checkpointText(head))).toBe(true)
    }
  })

  it('writes the same log-proof.json', () => {
    const tree = buildLogTree(
      sha256,
      leaves.map((leaf) => logLeafHash(sha256, new Uint8Array(leaf))),
    )
    const indexes = [0, 3, 11, 44]
    const ours = logProofBytes(
      indexes.map((index) => ({
        index,
        text: (leaves[index] as Buffer).toString('utf8'),
        path: tree.inclusionProof(index),
      })),
    )
    expect(Buffer.from(ours).equals(reference.logProof(indexes, leaves))).toBe(true)
  })
})
