// Two implementations of one format, written apart: for random draws they must agree on every byte. This is the only file here that
// imports the product.
import { sha256 } from '@noble/hashes/sha2.js'
import { describe, expect, it } from 'vitest'
import type { MembersSource } from '#shared/archive/members-source.ts'
import { checkArchive } from '#shared/protocol/check/check-archive.ts'
import { portableTools } from '#shared/protocol/check/tools.ts'
import { prepareEntries } from '#shared/protocol/entrants.ts'
import { writeEntries } from '#shared/protocol/entries-csv.ts'
import { labelsBytes, parseLabels } from '#shared/protocol/labels.ts'
import { makeReceipt, receiptBytes, shortProof } from '#shared/protocol/receipt.ts'
import { parseResult, resultBytes } from '#shared/protocol/result.ts'
import { sampleWalks } from '#shared/protocol/sample.ts'
import { parseSeal, sealBytes, sealDigest } from '#shared/protocol/seal.ts'
import { settleDraw } from '#shared/protocol/settle.ts'
import { needsAnotherRound } from '#shared/protocol/tosses.ts'
import { type Made, makeArchive, randomFrom, type Wanted } from './archives.ts'
import { hex, sample } from './record.ts'

/** The value of a good result; a failure of the product is a failure of the test, with its own words. */
function good<T>(result: { ok: true; value: T } | { ok: false; error: unknown }): T {
  if (!result.ok) throw new Error(JSON.stringify(result.error))
  return result.value
}

const sources = ['beacon', 'tosses', 'both', 'tossed'] as const
const rules = ['one-prize-each', 'every-ticket'] as const

/** Draws of every kind: few tickets and many, prizes that outlast the tickets, sizes around powers of two. */
const wishes: Wanted[] = Array.from({ length: 48 }, (_, index) => {
  const random = randomFrom(`differential ${index}`)
  return {
    seed: `differential-${index}`,
    sources: sources[index % 4] ?? 'both',
    rule: rules[(index >> 2) % 2] ?? 'every-ticket',
    entrants: 1 + random.below(index < 24 ? 18 : 70),
    mostTickets: [1, 3, 40, 2 ** 32 - 1][random.below(4)] ?? 1,
    quantities: Array.from({ length: 1 + random.below(3) }, () => 1 + random.below(6)),
    reserves: random.below(5),
    roundLength: 8 + random.below(60),
    minimumBits: index % 4 === 1 ? 64 + random.below(40) : 1 + random.below(80),
    withhold: (leaf) => leaf % 5 === 3,
  }
})

const bytesOf = (made: Made, name: string): Buffer => made.files.get(name) ?? Buffer.alloc(0)
const same = (ours: Uint8Array, reference: Uint8Array): void => expect(Buffer.from(ours).equals(reference)).toBe(true)

/** The product's parse of the reference's seal and result, which also must be taken as valid. */
function parsed(made: Made) {
  const seal = good(parseSeal(bytesOf(made, 'seal.json'), { allowDevelopmentChain: true }))
  return {
    seal,
    digest: sealDigest(sha256, bytesOf(made, 'seal.json')),
    result: good(parseResult(bytesOf(made, 'result.json'))),
  }
}

describe.each(wishes)('$seed: $sources, $rule, $entrants entrants', (wish) => {
  const made = makeArchive(wish)
  // The product is given the entrants in the opposite order: it has to sort them itself.
  const entrants = made.leaves.map(({ label, identity, tickets }) => ({ label, identity, tickets })).reverse()
  const prepared = good(prepareEntries(sha256, made.blindingKey, entrants))

  it('commits to the same list', () => {
    same(writeEntries(prepared.tickets, prepared.entryCommits), bytesOf(made, 'entries.csv'))
    expect(hex(prepared.tree.root)).toBe(parsed(made).seal.entries.root)
    expect(prepared.tree.total).toBe(parsed(made).seal.entries.tickets)
  })

  it('writes the same seal', () => {
    const { seal, digest } = parsed(made)
    same(sealBytes(seal), bytesOf(made, 'seal.json'))
    expect(hex(digest)).toBe(made.sealDigest)
  })

  it('settles to the same coins and the same result, byte for byte', () => {
    const { seal, digest, result } = parsed(made)
    const commitmentsOf = (leaf: number) => {
      const found = made.leaves[leaf]
      if (!found) throw new Error(`There is no leaf ${leaf}.`)
      return found
    }
    const input = { seal, sealDigest: digest, tickets: prepared.tickets, drawnAt: result.drawnAt, commitmentsOf }
    const settled = settleDraw(sha256, { ...input, reveal: result.reveal })
    expect(
      settled?.outcome.picks.map(({ award, coins, leaf, pick, remaining }) => ({
        award,
        coins,
        leaf,
        pick,
        remaining,
      })),
    ).toEqual(made.picks)
    same(settled?.transcript ?? new Uint8Array(), bytesOf(made, 'transcript.jsonl'))
    same(resultBytes(settled?.result ?? result), bytesOf(made, 'result.json'))
  })

  it('stops tossing at the same round', () => {
    const { seal, digest, result } = parsed(made)
    const { tosses } = result.reveal
    if (!tosses || !seal.sources.tosses) return
    const dry = (count: number): boolean => {
      if (seal.sources.flips === 'derived') return false
      const commitmentsOf = () => ({ labelCommit: new Uint8Array(32), identityCommit: new Uint8Array(32) })
      const reveal = { ...result.reveal, tosses: tosses.slice(0, count) }
      const input = { seal, sealDigest: digest, tickets: prepared.tickets, drawnAt: result.drawnAt, commitmentsOf }
      return settleDraw(sha256, { ...input, reveal }) === null
    }
    const before = tosses.length - 1
    expect(needsAnotherRound(seal.sources.tosses, tosses.slice(0, before), dry(before))).toBe(true)
    expect(needsAnotherRound(seal.sources.tosses, tosses, dry(tosses.length))).toBe(false)
  })

  it('writes the same labels, receipts and short proofs', () => {
    same(labelsBytes(good(parseLabels(bytesOf(made, 'labels.jsonl')))), bytesOf(made, 'labels.jsonl'))
    for (const leaf of new Set([0, made.leaves.length >> 1, made.leaves.length - 1])) {
      const entrant = made.leaves[leaf]
      if (!entrant) continue
      const receipt = makeReceipt({ ...entrant, leaf, sealDigest: parsed(made).digest, path: prepared.tree.path(leaf) })
      same(receiptBytes(receipt), made.receipt(leaf))
      same(receiptBytes(shortProof(sha256, receipt)), made.inclusion(leaf))
    }
  })

  it("takes the same witness's sample", () => {
    const randomness = randomFrom(wish.seed).bytes()
    const walks = sampleWalks(sha256, { tickets: prepared.tickets, root: prepared.tree.root, randomness })
    expect(walks.map((walk) => walk.leaf)).toEqual(sample(made.leaves, randomness))
  })

  it("passes the product's own check", async () => {
    const open = async (): Promise<MembersSource> => ({
      names: [...made.files.keys()],
      size: (name) => bytesOf(made, name).length,
      async *open(name) {
        yield bytesOf(made, name)
      },
    })
    const report = await checkArchive({ open, tools: portableTools(() => 0), options: { allowDevelopmentChain: true } })
    expect(report.ok ? null : report.failure).toBeNull()
  })
})
