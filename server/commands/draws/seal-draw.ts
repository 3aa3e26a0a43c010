import { eq } from 'drizzle-orm'
import type { CommandActor } from '#server/commands/actor.ts'
import { audit } from '#server/commands/audit.ts'
import { CommandError, refused } from '#server/commands/command-error.ts'
import { appendLog } from '#server/commands/log.ts'
import { inTransaction, type Transaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { problemsOfSealing } from '#server/store/draw-problems.ts'
import { factsOf, prizeRowsOf } from '#server/store/queries/office-draws.ts'
import { person } from '#server/store/schema/people.ts'
import { lockDraw, type LockedDraw, loggedNames, requireState } from './lock-draw.ts'
import { putSeal } from './put-seal.ts'
import { refuseWhileSealing, SEAL_AT_ONCE } from './sealing-job.ts'

export interface SealDrawInput {
  readonly draw: string
  readonly version: number
  /** What the promoter saw: the seal is refused if the list differs by now. */
  readonly entrants: number
  readonly tickets: number
}

/** Seals a closed list: at once, or as a job where it is long. */
export async function sealDraw(
  services: Services,
  actor: CommandActor,
  input: SealDrawInput,
): Promise<{ readonly kind: 'sealed' | 'sealing' }> {
  return inTransaction(services, async (tx) => {
    const locked = await checkSealing(tx, services, input)
    await refuseWhileSealing(tx, input.draw)
    if (input.entrants > SEAL_AT_ONCE && actor) {
      const { draw, version, entrants, tickets } = input
      await services.queue.enqueue(tx.client, 'seal', { draw, actor: actor.id, version, entrants, tickets })
      return { kind: 'sealing' }
    }
    await sealNow(tx, services, actor, locked)
    return { kind: 'sealed' }
  })
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
    await sealNow(tx, services, row ?? null, locked)
  })
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

async function sealNow(tx: Transaction, services: Services, actor: CommandActor, locked: LockedDraw): Promise<void> {
  const { row } = locked
  const { digest } = await putSeal(tx, services, locked, { drawAt: row.drawAt, replaces: null })
  await audit(tx, services, actor, {
    action: 'draw.seal',
    organisationId: row.organisationId,
    drawId: row.id,
    subjectId: digest,
    sentence: `Sealed the list: ${row.entrantCount} entrants, ${row.ticketCount} tickets.`,
    after: { digest, entrants: row.entrantCount, tickets: row.ticketCount, drawAt: row.drawAt },
  })
  await appendLog(tx, services, { event: 'sealed', ...loggedNames(locked), digest })
}
