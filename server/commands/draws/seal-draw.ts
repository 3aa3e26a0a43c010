import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { CommandError, refused } from '#server/commands/command-error.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { problemsOfSealing } from '#server/store/draw-problems.ts'
import { factsOf, prizeRowsOf } from '#server/store/queries/office-draws.ts'
import { waitingSealing } from '#server/store/queries/sealings.ts'
import { person } from '#server/store/schema/people.ts'
import { AT_ONCE_MS, completeSealing } from './complete-sealing.ts'
import { lockDraw, type LockedDraw, requireState } from './lock-draw.ts'
import { putSeal } from './put-seal.ts'
import { refuseWhileSealing, SEAL_AT_ONCE } from './sealing-job.ts'

export interface SealDrawInput {
  readonly draw: string
  readonly version: number
  /** What the promoter saw: the seal is refused if the list differs by now. */
  readonly entrants: number
  readonly tickets: number
}

/**
 * Seals a closed list: at once, or as a job where it is long. `sealing`: the seal does not count yet; the worker goes on,
 * since the list is long or the timestamp authority does not answer.
 */
export async function sealDraw(
  services: Services,
  actor: CommandActor,
  input: SealDrawInput,
): Promise<{ readonly kind: 'sealed' | 'sealing' }> {
  const kind = await inTransaction(services, async (tx) => {
    const locked = await checkSealing(tx, services, input)
    await refuseWhileSealing(tx, input.draw)
    if (await waitingSealing(tx.db, input.draw)) {
      throw refused('The list is sealed, and its seal waits for its timestamp: there is nothing more to do.')
    }
    if (input.entrants > SEAL_AT_ONCE && actor) {
      const { draw, version, entrants, tickets } = input
      await services.queue.enqueue(tx.client, 'seal', { draw, actor: actor.id, version, entrants, tickets })
      return 'sealing' as const
    }
    await putSeal(tx, services, locked, actor, { drawAt: locked.row.drawAt, replaces: null })
    return 'made' as const
  })
  if (kind === 'sealing') return { kind }
  const outcome = await completeSealing(services, { draw: input.draw, withinMs: AT_ONCE_MS })
  return { kind: outcome.kind === 'counts' ? 'sealed' : 'sealing' }
}

/** The worker's part of a long sealing. Everything is checked anew. */
export async function sealLongList(
  services: Services,
  input: SealDrawInput & { readonly actor: string },
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const [row] = await tx.db
      .select({ id: person.id, name: person.name })
      .from(person)
      .where(eq(person.id, input.actor))
    const locked = await checkSealing(tx, services, input)
    if (await waitingSealing(tx.db, input.draw)) return
    await putSeal(tx, services, locked, row ?? null, { drawAt: locked.row.drawAt, replaces: null })
  })
  await completeSealing(services, { draw: input.draw })
}

async function checkSealing(tx: Transaction, services: Services, input: SealDrawInput): Promise<LockedDraw> {
  const locked = await lockDraw(tx, input)
  const { row, organisation } = locked
  requireState(row, ['closed'], 'seal it')
  const problems = problemsOfSealing(factsOf(row, organisation, await prizeRowsOf(tx.db, row.id)), services.clock.now())
  if (problems.length > 0) throw refused(problems.join(' '))
  if (input.entrants !== row.entrantCount || input.tickets !== row.ticketCount) {
    throw new CommandError(
      'changed',
      `The list is not the one that you confirmed: it has ${row.entrantCount} entrants and ${row.ticketCount} tickets now. Look at it again.`,
    )
  }
  return locked
}
