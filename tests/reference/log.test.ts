// The second implementation of the log against what others published, so that the comparison with the product is worth something.
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { describe, expect, it } from 'vitest'
import { consistencyProof, inclusionPath, keyId, rootFromPath, rootsFromProof, treeHash } from './log.ts'
import { hex, unhex } from './record.ts'

const outside = <T>(name: string): T =>
  JSON.parse(readFileSync(join(import.meta.dirname, '../outside', name), 'utf8')) as T

// RFC 6962 check values: transparency-dev/merkle, testonly/ (the tree of eight leaves of the Certificate Transparency code).
const known = outside<{
  leaf_inputs_hex: string[]
  root_hashes_by_size_0_to_8: string[]
  inclusion_proofs: { index: number; size: number; proof: string[] }[]
  consistency_proofs: { size1: number; size2: number; proof: string[] }[]
}>('rfc6962_merkle.json')
const leaves = known.leaf_inputs_hex.map(unhex)

describe('the check values of RFC 6962', () => {
  it('are the roots, inclusion proofs and consistency proofs of this implementation', () => {
    known.root_hashes_by_size_0_to_8.forEach((root, size) => expect(hex(treeHash(leaves.slice(0, size)))).toBe(root))
    for (const { index, size, proof } of known.inclusion_proofs) {
      expect(inclusionPath(index, leaves.slice(0, size)).map(hex)).toEqual(proof)
    }
    for (const { size1, size2, proof } of known.consistency_proofs) {
      expect(consistencyProof(size1, leaves.slice(0, size2)).map(hex)).toEqual(proof)
    }
    expect(known.inclusion_proofs.length + known.consistency_proofs.length).toBeGreaterThan(8)
  })
})

interface Probe {
  desc: string
  wantErr: boolean
  proof: string[] | null
}
// transparency-dev/merkle testdata/ (Apache-2.0): 196 proofs, 184 of which must be refused.
const probes = outside<{
  inclusion: (Probe & { leafIdx: number; treeSize: number; root: string; leafHash: string })[]
  consistency: (Probe & { size1: number; size2: number; root1: string; root2: string })[]
}>('tlog_proof_probes_good_and_bad.json')
const bytes = (text: string): Buffer => Buffer.from(text, 'base64')
const isHash = (hash: Buffer): boolean => hash.length === 32

describe('the probes of others', () => {
  it('are 196, and 184 of them are refused', () => {
    const inclusion = probes.inclusion.map((probe) => {
      const path = (probe.proof ?? []).map(bytes)
      const sizes = Number.isSafeInteger(probe.leafIdx) && Number.isSafeInteger(probe.treeSize) && probe.treeSize > 0
      const top =
        sizes &&
        [...path, bytes(probe.leafHash)].every(isHash) &&
        rootFromPath(probe.leafIdx, probe.treeSize, bytes(probe.leafHash), path)
      return [`${probe.desc}`, Boolean(top && top.equals(bytes(probe.root))), !probe.wantErr] as const
    })
    const consistency = probes.consistency.map((probe) => {
      const proof = (probe.proof ?? []).map(bytes)
      const sizes = Number.isSafeInteger(probe.size1) && Number.isSafeInteger(probe.size2)
      // Equal sizes have nothing to hash: their roots may be any bytes, as long as they are the same.
      const equal = probe.size1 === probe.size2
      const hashes = equal || [...proof, bytes(probe.root1), bytes(probe.root2)].every(isHash)
      const roots = sizes && hashes && rootsFromProof(probe.size1, probe.size2, bytes(probe.root1), proof)
      const holds = roots && roots[0].equals(bytes(probe.root1)) && roots[1].equals(bytes(probe.root2))
      return [`${probe.desc}`, Boolean(holds), !probe.wantErr] as const
    })
    const all = [...inclusion, ...consistency]
    expect(all).toHaveLength(196)
    expect(all.filter(([, taken, wanted]) => taken !== wanted)).toEqual([])
    expect(all.filter(([, taken]) => !taken)).toHaveLength(184)
  })
})

describe('key ids', () => {
  it('are those of the published example', () => {
    // C2SP signed-note, and golang.org/x/mod/sumdb/note: the key example.com/foo+530d903a+…
    const { verify } = outside<{ verify: { vkey: string } }>('c2sp_signed_note.json')
    const [name = '', id, encoded = ''] = verify.vkey.split('+')
    expect(hex(keyId(name, 1, bytes(encoded).subarray(1)))).toBe(id)
  })
})
