import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { verifyInclusion } from '#shared/merkle/inclusion.ts'
import { buildSumTree, streamSumTree, type PathStep, type SumTree } from '#shared/merkle/sum-tree.ts'
import { readPath, type ReceiptStep } from '#shared/protocol/receipt.ts'
import { readShape } from '#shared/protocol/shape.ts'
import { expectMembers, expectSame, hash, listOf, numberOf, reading, textOf, WrongValue } from './wrong-value.ts'

export const SUM_TREE_FIELDS = ['entries', 'root', 'total', 'paths'] as const

/** A list of leaves with the root, total and paths of its sum tree (section 2). */
export function checkSumTree(name: string, value: unknown): void {
  const m = expectMembers(name, value, SUM_TREE_FIELDS)
  const entries = listOf(name, 'entries', m.entries).map((entry, i) => {
    const field = `entries[${i}]`
    const e = expectMembers(`${name}, ${field}`, entry, ['tickets', 'entryCommit'])
    const commit = textOf(name, `${field}.entryCommit`, e.entryCommit)
    return {
      tickets: numberOf(name, `${field}.tickets`, e.tickets),
      entryCommit: reading(name, `${field}.entryCommit`, () => hexBytes(commit, 32)),
    }
  })
  const tree = checkTree(name, entries, { root: m.root, total: m.total, totalField: 'total' })
  const paths = listOf(name, 'paths', m.paths)
  if (paths.length !== entries.length) throw new WrongValue(name, 'paths', 'there must be a path for each leaf')
  for (const [leaf, path] of paths.entries()) {
    checkPath(name, `paths[${leaf}]`, path, { tree, leaf, entry: entries[leaf] as TreeEntry })
  }
}

/** A leaf of a tree under check. */
export interface TreeEntry {
  readonly tickets: number
  readonly entryCommit: Uint8Array
}

/** Root and total, built whole and streamed; returns the tree. */
export function checkTree(
  name: string,
  entries: readonly TreeEntry[],
  found: { readonly root: unknown; readonly total: unknown; readonly totalField: string },
): SumTree {
  const commits = new Uint8Array(entries.length * 32)
  const stream = streamSumTree(hash)
  const tree = reading(name, 'entries', () => {
    for (const [i, { tickets, entryCommit }] of entries.entries()) {
      commits.set(entryCommit, i * 32)
      stream.add(tickets, entryCommit)
    }
    return buildSumTree(
      hash,
      entries.map((entry) => entry.tickets),
      commits,
    )
  })
  expectSame(name, 'root', found.root, toHex(tree.root))
  expectSame(name, 'root (streamed)', found.root, toHex(stream.result().root))
  expectSame(name, found.totalField, found.total, tree.total)
  return tree
}

/** A path must be the computed one, and verify on its own. */
export function checkPath(
  name: string,
  field: string,
  found: unknown,
  against: { readonly tree: SumTree; readonly leaf: number; readonly entry: TreeEntry },
): void {
  const { tree, leaf, entry } = against
  const read = readShape(() => readPath(found, ''))
  if (!read.ok) throw new WrongValue(name, `${field}${read.error.at}`, read.error.message)
  const computed = reading(name, field, () => tree.path(leaf))
  expectSame(name, field, found, computed.map(written))
  const path = read.value.map((step): PathStep => ({ ...step, hash: hexBytes(step.hash, 32) }))
  const list = { count: tree.size, root: tree.root, tickets: tree.total }
  const proof = verifyInclusion(hash, { leaf, ...entry, path }, list)
  if (!proof.ok) throw new WrongValue(name, `${field} ${proof.error.at}`, proof.error.message)
}

function written(step: PathStep): ReceiptStep {
  return { ...step, hash: toHex(step.hash) }
}
