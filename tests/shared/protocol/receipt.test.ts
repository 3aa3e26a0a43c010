import { describe, expect, test } from 'vitest'
import { sample } from '#tests/reference/record.ts'
import { digestOf } from '#tests/support/record/seal.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { canonicalText } from '#shared/bytes/canonical-json.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { deriveSalts, referenceFromEntropy } from '#shared/protocol/commitments.ts'
import { prepareEntries } from '#shared/protocol/entrants.ts'
import {
  checkReceipt,
  makeReceipt,
  parseReceipt,
  receiptBytes,
  shortProof,
  type Receipt,
} from '#shared/protocol/receipt.ts'
import { sampleWalks } from '#shared/protocol/sample.ts'

const key = new Uint8Array(32).fill(9)
const entrants = Array.from({ length: 13 }, (_, i) => ({
  label: `Plot ${i}`,
  tickets: 1 + i,
  identity: {
    contact: `plot${i}@allotments.example`,
    name: `Holder ${i}`,
    numbers: `${i * 5 + 1}-${i * 5 + 5}`,
    reference: referenceFromEntropy(sha256(Uint8Array.of(i, 1)).subarray(0, 10)),
  },
}))
const prepared = prepareEntries(sha256, key, entrants)
if (!prepared.ok) throw new Error(prepared.error.message)
const { tree, order, entryCommits, tickets } = prepared.value
const seal = { entries: { count: tree.size, root: toHex(tree.root), tickets: tree.total } }

function receiptOf(leaf: number): Receipt {
  const entrant = entrants[order[leaf] as number] as (typeof entrants)[number]
  const salts = deriveSalts(sha256, key, entrant.identity.reference)
  return makeReceipt({ sealDigest: hexBytes(digestOf(2)), leaf, ...entrant, ...salts, path: tree.path(leaf) })
}
const code = (receipt: Receipt | ReturnType<typeof shortProof>, digest = digestOf(2)): string => {
  const checked = checkReceipt(sha256, receipt, seal, digest)
  return checked.ok ? 'ok' : checked.error.code
}

describe('a receipt', () => {
  test('leads to the root for every leaf, and so does its short proof, which names nobody', () => {
    for (let leaf = 0; leaf < tree.size; leaf += 1) {
      const receipt = receiptOf(leaf)
      const parsed = parseReceipt(receiptBytes(receipt))
      expect(parsed).toEqual({ ok: true, value: receipt })
      const short = shortProof(sha256, receipt)
      expect([code(receipt), code(short)]).toEqual(['ok', 'ok'])
      expect(parseReceipt(receiptBytes(short))).toEqual({ ok: true, value: short })
      const text = new TextDecoder().decode(receiptBytes(short))
      expect(text).not.toMatch(/Plot|Holder|allotments|Salt/)
      expect(short.entryCommit).toBe(toHex(entryCommits.subarray(leaf * 32, leaf * 32 + 32)))
    }
  })
  const good = receiptOf(4)
  test.each([
    ['another seal', { seal: digestOf(3) }, 'seal-mismatch'],
    ['another label', { label: 'Plot 99' }, 'root-mismatch'],
    ['another name', { identity: { ...good.identity, name: 'Holder 99' } }, 'root-mismatch'],
    ['another salt', { labelSalt: digestOf(1) }, 'root-mismatch'],
    ['more tickets', { tickets: good.tickets + 1 }, 'total-mismatch'],
    ['another number', { leaf: 5 }, 'path-side'],
    ['a number outside', { leaf: 13 }, 'leaf-out-of-range'],
  ])('with %s fails', (_, changes, expected) => {
    expect(code({ ...good, ...changes })).toBe(expected)
  })
  test.each([
    [{ kind: 'proof' }, 'value-wrong'],
    [{ extra: 0 }, 'member-unknown'],
    [{ tickets: 0 }, 'number-wrong'],
    [{ tickets: true }, 'number-wrong'],
    [{ leaf: '4' }, 'number-wrong'],
    [{ identity: null }, 'object-expected'],
    [{ identity: { ...good.identity, reference: 'short' } }, 'text-wrong'],
    [{ path: [{ ...good.path[0], side: 'l' }] }, 'value-wrong'],
    [{ path: [{ ...good.path[0], tickets: 0 }] }, 'number-wrong'],
    [{ path: [{ ...good.path[0], hash: 'ff' }] }, 'hex-wrong'],
    [{ path: Array.from({ length: 22 }, () => good.path[0]) }, 'value-wrong'],
    [{ path: {} }, 'list-expected'],
  ])('%j is none: %s', (changes, expected) => {
    expect(parseReceipt(utf8(canonicalText({ ...good, ...changes })))).toMatchObject({ error: { code: expected } })
  })
  test('a member missing, or the bytes spaced, is refused', () => {
    for (const name of Object.keys(good)) {
      const { [name as 'leaf']: _, ...without } = good
      expect(parseReceipt(utf8(canonicalText(without))).ok).toBe(false)
    }
    expect(parseReceipt(utf8(JSON.stringify(good, null, 1)))).toMatchObject({ error: { code: 'not-canonical' } })
  })
})

describe("the witness's sample", () => {
  const randomness = sha256(utf8('a round'))
  const input = { tickets, root: tree.root, randomness }
  test('agrees with the second implementation', () => {
    const walks = sampleWalks(sha256, input)
    const entries = Array.from(tickets, (count, i) => ({
      tickets: count,
      entryCommit: Buffer.from(entryCommits.subarray(i * 32, i * 32 + 32)),
    }))
    expect(walks.map((walk) => walk.leaf)).toEqual(sample(entries, randomness))
    expect(walks.length).toBe(59)
    // A leaf comes at most as often as it has tickets.
    const times = new Map<number, number>()
    for (const { leaf } of walks) times.set(leaf, (times.get(leaf) ?? 0) + 1)
    for (const [leaf, count] of times) expect(count).toBeLessThanOrEqual(tickets[leaf] as number)
  })
  test('ends when the tickets run out', () => {
    expect(sampleWalks(sha256, { ...input, tickets: [3, 2] }).map((walk) => walk.remaining)).toEqual([5, 4, 3, 2, 1])
  })
})
