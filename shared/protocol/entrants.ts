import { put } from '../bytes/bytes.ts'
import type { Sha256 } from '../bytes/hashing.ts'
import { fail, ok, type Failure, type Result } from '../bytes/result.ts'
import { textProblem, TEXT_PROBLEMS } from '../bytes/text.ts'
import { buildSumTree, type SumTree } from '../merkle/sum-tree.ts'
import { compareReferences, createCommitter, createSaltDeriver, isReference, type Identity } from './commitments.ts'
import { duplicateCommit } from './duplicate-commit.ts'
import { MAX_ENTRANTS, MAX_TICKETS, MAX_TICKETS_EACH } from './limits.ts'

/** An entrant as it goes into a seal. Text is NFC already; `identity.reference` is the reference of this seal. */
export interface SealEntrant {
  readonly label: string
  readonly identity: Identity
  readonly tickets: number
}

/** Why a list cannot be sealed. */
export type EntrantsCode =
  | 'too-few'
  | 'too-many'
  | 'tickets-out-of-range'
  | 'total-out-of-range'
  | 'reference-wrong'
  | 'reference-twice'
  | 'text-wrong'
  | 'commitment-twice'

/** Leaves of a list, in their order: `entryCommits` has 32 bytes a leaf, `order[leaf]` is the index in the input. */
export interface PreparedEntries {
  readonly tickets: Float64Array
  readonly entryCommits: Uint8Array
  readonly order: Uint32Array
  readonly tree: SumTree
}

/**
 * Leaves, root and total of a list of entrants (PROTOCOL sections 1 and 2), which will stand in ascending order of
 * reference. Refuses a list of 0 or more than 2,000,000, tickets outside 1 to 2^32 − 1, a total beyond 2^53 − 1, a
 * reference that is malformed or comes twice, and texts that the record refuses; `at` names the input by its index.
 */
export function prepareEntries(
  sha256: Sha256,
  blindingKey: Uint8Array,
  entrants: readonly SealEntrant[],
): Result<PreparedEntries, Failure<EntrantsCode>> {
  const count = entrants.length
  if (count === 0) return fail('too-few', '', 'A draw needs at least one entrant.')
  if (count > MAX_ENTRANTS) return fail('too-many', '', `A draw has at most ${MAX_ENTRANTS} entrants.`)
  const order = Uint32Array.from({ length: count }, (_, i) => i)
  const references = entrants.map((entrant) => entrant.identity.reference)
  order.sort((left, right) => compareReferences(references[left] as string, references[right] as string))
  const salts = createSaltDeriver(sha256, blindingKey)
  const committer = createCommitter(sha256)
  const tickets = new Float64Array(count)
  const entryCommits = new Uint8Array(count * 32)
  const leaves = new Uint32Array(count)
  for (let leaf = 0; leaf < count; leaf += 1) {
    const index = order[leaf] as number
    leaves[index] = leaf
    if (leaf > 0 && references[order[leaf - 1] as number] === references[index]) {
      return fail('reference-twice', `[${index}].reference`, 'This reference stands in the list twice.')
    }
  }
  let total = 0
  // In the order of the input, not of the leaves: a million entrants fetched out of order take far longer.
  for (let index = 0; index < count; index += 1) {
    const entrant = entrants[index] as SealEntrant
    const leaf = leaves[index] as number
    const refused = entrantProblem(entrant, index)
    if (refused !== null) return refused
    total += entrant.tickets
    if (total > MAX_TICKETS) return fail('total-out-of-range', '', 'All tickets together pass 2^53 − 1.')
    tickets[leaf] = entrant.tickets
    const commits = committer.entrant(salts(entrant.identity.reference), entrant.label, entrant.identity)
    put(entryCommits, leaf * 32, commits.entryCommit)
  }
  const tree = buildSumTree(sha256, tickets, entryCommits)
  const twice = duplicateCommit(entryCommits, tree.root)
  if (twice !== null) return fail('commitment-twice', `leaf ${twice}`, 'Two entrants have the same commitment.')
  return ok({ tickets, entryCommits, order, tree })
}

function entrantProblem(
  entrant: SealEntrant,
  index: number,
): { readonly ok: false; readonly error: Failure<EntrantsCode> } | null {
  const { tickets, label, identity } = entrant
  if (!Number.isInteger(tickets) || tickets < 1 || tickets > MAX_TICKETS_EACH) {
    return fail('tickets-out-of-range', `[${index}].tickets`, 'An entrant has 1 to 4,294,967,295 tickets.')
  }
  if (!isReference(identity.reference)) {
    return fail('reference-wrong', `[${index}].reference`, 'A reference has 8 to 64 characters of its alphabet.')
  }
  return (
    textRefusal(label, index, 'label') ??
    textRefusal(identity.name, index, 'name') ??
    textRefusal(identity.contact, index, 'contact') ??
    textRefusal(identity.numbers, index, 'numbers')
  )
}

function textRefusal(
  value: string,
  index: number,
  name: 'label' | 'name' | 'contact' | 'numbers',
): { readonly ok: false; readonly error: Failure<EntrantsCode> } | null {
  if (value === '' && (name === 'label' || name === 'name')) {
    return fail('text-wrong', `[${index}].${name}`, `The ${name} is empty.`)
  }
  const problem = textProblem(value)
  return problem === null ? null : fail('text-wrong', `[${index}].${name}`, `The ${name} ${TEXT_PROBLEMS[problem]}.`)
}
