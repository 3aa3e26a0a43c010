import { setImmediate as breathe } from 'node:timers/promises'
import { and, asc, eq, gt } from 'drizzle-orm'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { TEXT_PROBLEMS, textProblem } from '#shared/bytes/text.ts'
import { streamSumTree } from '#shared/merkle/sum-tree.ts'
import {
  commitEntrant,
  compareReferences,
  createSaltDeriver,
  referenceFromEntropy,
} from '#shared/protocol/commitments.ts'
import type { Entropy } from '#server/adapters/entropy/entropy.ts'
import { refused } from '#server/commands/command-error.ts'
import type { Database } from '#server/store/database.ts'
import { entrant, entrantPerson } from '#server/store/schema/entrant.ts'

const REFERENCE_LENGTH = 16
const PAGE = 5000
/** Entrants between two breaths of the event loop: a few milliseconds of hashing. */
const SLICE = 500

/** One leaf of a list about to be sealed. Commitments have 32 bytes each. */
export interface CommittedLeaf {
  readonly entrantId: number
  readonly tickets: number
  readonly reference: string
  readonly label: string
  readonly name: string
  readonly contact: string
  readonly numbers: string
  readonly email: string | null
  entryCommit: Uint8Array
  labelCommit: Uint8Array
  identityCommit: Uint8Array
}

export interface CommittedList {
  /** In ascending order of reference. */
  readonly leaves: readonly CommittedLeaf[]
  readonly root: Uint8Array
  readonly tickets: number
}

const UNSET = new Uint8Array(0)

/**
 * Leaves, root and total of the entrants of a draw, under fresh references and this blinding key (PROTOCOL sections 1
 * and 2). Gives way to other work between slices, so that the site goes on answering.
 */
export async function commitList(
  services: { readonly db: Database; readonly entropy: Entropy; readonly sha256: Sha256 },
  drawId: string,
  blindingKey: Uint8Array,
): Promise<CommittedList> {
  const leaves = await readEntrants(services, drawId)
  leaves.sort((left, right) => compareReferences(left.reference, right.reference))
  const saltsOf = createSaltDeriver(services.sha256, blindingKey)
  const tree = streamSumTree(services.sha256)
  for (const [index, leaf] of leaves.entries()) {
    if (index % SLICE === 0) await breathe()
    checkTexts(leaf)
    const { contact, name, numbers, reference } = leaf
    Object.assign(
      leaf,
      commitEntrant(services.sha256, saltsOf(reference), leaf.label, { contact, name, numbers, reference }),
    )
    tree.add(leaf.tickets, leaf.entryCommit)
  }
  const { root, total } = tree.result()
  return { leaves, root, tickets: total }
}

async function readEntrants(
  { db, entropy }: { readonly db: Database; readonly entropy: Entropy },
  drawId: string,
): Promise<CommittedLeaf[]> {
  const leaves: CommittedLeaf[] = []
  const references = new Set<string>()
  for (let last = 0; ; ) {
    const rows = await db
      .select({ entrant, person: entrantPerson })
      .from(entrant)
      .leftJoin(entrantPerson, and(eq(entrantPerson.drawId, entrant.drawId), eq(entrantPerson.entrantId, entrant.id)))
      .where(and(eq(entrant.drawId, drawId), gt(entrant.id, last)))
      .orderBy(asc(entrant.id))
      .limit(PAGE)
    for (const { entrant: row, person } of rows) {
      if (!person) throw refused(`The details of entrant ${row.code} were erased: they cannot be sealed.`)
      let reference: string
      do reference = referenceFromEntropy(entropy.bytes(REFERENCE_LENGTH))
      while (references.has(reference))
      references.add(reference)
      leaves.push({
        entrantId: row.id,
        tickets: row.tickets,
        reference,
        label: person.label,
        name: person.name,
        contact: [person.email, person.phone].filter((part) => part !== null).join(', '),
        numbers: person.numbers ?? '',
        email: person.email,
        entryCommit: UNSET,
        labelCommit: UNSET,
        identityCommit: UNSET,
      })
    }
    const end = rows.at(-1)
    if (!end) return leaves
    last = end.entrant.id
  }
}

/** Texts were checked when they came in; a record that a check refuses must never be sealed. */
function checkTexts(leaf: CommittedLeaf): void {
  for (const [what, text] of Object.entries({
    name: leaf.name,
    label: leaf.label,
    contact: leaf.contact,
    numbers: leaf.numbers,
  })) {
    const problem = textProblem(text)
    if (problem !== null) {
      throw refused(
        `The ${what} of an entrant with ${leaf.tickets} tickets ${TEXT_PROBLEMS[problem]}. Correct it first.`,
      )
    }
  }
}
