import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { fromBase64 } from '#shared/bytes/base64.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import {
  buildLogTree,
  logLeafHash,
  logNodeHash,
  verifyLogConsistency,
  verifyLogInclusion,
} from '#shared/merkle/rfc9162.ts'
import { utf8 } from '#shared/bytes/bytes.ts'

interface Rfc6962 {
  leaf_inputs_hex: string[]
  root_hashes_by_size_0_to_8: string[]
  inclusion_proofs: { index: number; size: number; proof: string[] }[]
  consistency_proofs: { size1: number; size2: number; proof: string[] }[]
  hasher: { empty_root: string; empty_leaf: string; leaf_L123456: string; node_N123_N456: string }
}
interface Probes {
  inclusion: {
    leafIdx: number
    treeSize: number
    root: string
    leafHash: string
    proof: string[] | null
    desc: string
    wantErr: boolean
  }[]
  consistency: {
    size1: number
    size2: number
    root1: string
    root2: string
    proof: string[] | null
    desc: string
    wantErr: boolean
  }[]
}
const load = <T>(name: string): T =>
  JSON.parse(readFileSync(join(import.meta.dirname, '../../outside', name), 'utf8')) as T
// transparency-dev/merkle, testonly/ and testdata/ (Apache-2.0): the 8-leaf tree of the Certificate Transparency code.
const known = load<Rfc6962>('rfc6962_merkle.json')
const probes = load<Probes>('tlog_proof_probes_good_and_bad.json')
const leaves = known.leaf_inputs_hex.map((hex) => logLeafHash(sha256, hexBytes(hex)))

describe('RFC 9162 trees', () => {
  test('the hashes of leaves, nodes and nothing', () => {
    expect(toHex(buildLogTree(sha256, []).root)).toBe(known.hasher.empty_root)
    expect(toHex(logLeafHash(sha256, new Uint8Array(0)))).toBe(known.hasher.empty_leaf)
    expect(toHex(logLeafHash(sha256, utf8('L123456')))).toBe(known.hasher.leaf_L123456)
    expect(toHex(logNodeHash(sha256, utf8('N123'), utf8('N456')))).toBe(known.hasher.node_N123_N456)
  })
  test('roots for sizes 0 to 8', () => {
    known.root_hashes_by_size_0_to_8.forEach((root, size) => {
      expect(toHex(buildLogTree(sha256, leaves.slice(0, size)).root)).toBe(root)
    })
  })
  test.each(known.inclusion_proofs)('inclusion of $index in $size', ({ index, size, proof }) => {
    expect(buildLogTree(sha256, leaves.slice(0, size)).inclusionProof(index).map(toHex)).toEqual(proof)
  })
  test.each(known.consistency_proofs)('consistency of $size1 with $size2', ({ size1, size2, proof }) => {
    expect(buildLogTree(sha256, leaves.slice(0, size2)).consistencyProof(size1).map(toHex)).toEqual(proof)
  })
  test('all proofs of all trees to 40 leaves verify, and none for another size', () => {
    const many = Array.from({ length: 40 }, (_, i) => logLeafHash(sha256, Uint8Array.of(i)))
    const trees = many.map((_, i) => buildLogTree(sha256, many.slice(0, i + 1)))
    for (const tree of trees) {
      for (let index = 0; index < tree.size; index += 1) {
        const claim = { index, size: tree.size, leafHash: many[index] as Uint8Array, root: tree.root }
        const proof = tree.inclusionProof(index)
        expect(verifyLogInclusion(sha256, { ...claim, proof })).toBe(true)
        expect(verifyLogInclusion(sha256, { ...claim, index: (index + 1) % tree.size, proof })).toBe(tree.size === 1)
      }
      for (let first = 1; first <= tree.size; first += 1) {
        const firstRoot = (trees[first - 1] as { root: Uint8Array }).root
        const claim = { second: tree.size, firstRoot, secondRoot: tree.root, proof: tree.consistencyProof(first) }
        expect(verifyLogConsistency(sha256, { ...claim, first })).toBe(true)
        if (first > 1) expect(verifyLogConsistency(sha256, { ...claim, first: first - 1 })).toBe(false)
      }
    }
  })
})

describe('proofs that others made to be taken or refused', () => {
  const bytes = (text: string): Uint8Array => fromBase64(text) ?? new Uint8Array(0)
  test.each(probes.inclusion.map((p, i) => [`${i} ${p.desc} (${p.leafIdx} of ${p.treeSize})`, p] as const))(
    'inclusion %s',
    (_, p) => {
      const proof = (p.proof ?? []).map(bytes)
      const claim = { index: p.leafIdx, size: p.treeSize, leafHash: bytes(p.leafHash), proof, root: bytes(p.root) }
      expect(verifyLogInclusion(sha256, claim)).toBe(!p.wantErr)
    },
  )
  test.each(probes.consistency.map((p, i) => [`${i} ${p.desc} (${p.size1} in ${p.size2})`, p] as const))(
    'consistency %s',
    (_, p) => {
      const [firstRoot, secondRoot] = [bytes(p.root1), bytes(p.root2)]
      const proof = (p.proof ?? []).map(bytes)
      const claim = { first: p.size1, second: p.size2, firstRoot, secondRoot, proof }
      expect(verifyLogConsistency(sha256, claim)).toBe(!p.wantErr)
    },
  )
})
