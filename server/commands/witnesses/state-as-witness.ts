import { and, eq } from 'drizzle-orm'
import { invalid, refused } from '#server/commands/command-error.ts'
import { audit } from '#server/commands/audit.ts'
import { lockDraw } from '#server/commands/draws/lock-draw.ts'
import { inTransaction } from '#server/commands/transaction.ts'
import type { Services } from '#server/services.ts'
import { sealInForce, sealsOf } from '#server/store/queries/seals.ts'
import { witness, witnessStatement, witnessWords } from '#server/store/schema/draw.ts'
import { result } from '#server/store/schema/result.ts'
import { wholeSecond } from '#server/time/instants.ts'

export interface StatementInput {
  readonly draw: string
  readonly about: 'seal' | 'result'
  /** Of what they saw. */
  readonly digest: string
  readonly verdict: 'confirmed' | 'refused'
  readonly words: string | null
}

/** A witness confirms the seal in force or the result, or refuses with public words. It never stops or repeats a draw. */
export async function stateAsWitness(
  services: Services,
  actor: { readonly id: string; readonly name: string },
  input: StatementInput,
): Promise<void> {
  await inTransaction(services, async (tx) => {
    const { row } = await lockDraw(tx, { draw: input.draw })
    const [found] = await tx.db
      .select()
      .from(witness)
      .where(and(eq(witness.drawId, row.id), eq(witness.personId, actor.id)))
    if (!found) throw refused('Only a witness named in this draw can do this.')
    const [settled] = await tx.db.select({ digest: result.digest }).from(result).where(eq(result.drawId, row.id))
    const inForce = sealInForce(await sealsOf(tx.db, row.id))
    const subject = input.about === 'seal' ? inForce?.digest : settled?.digest
    if (subject === undefined) throw refused(`There is no ${input.about} yet.`)
    if (subject !== input.digest)
      throw refused(`The ${input.about} is another one by now. Load the page again and look at it.`)
    if (input.verdict === 'refused' && input.words === null) {
      throw invalid('words', 'Say in a sentence why you refuse: the public reads it.')
    }
    const [said] = await tx.db
      .select({ id: witnessStatement.id })
      .from(witnessStatement)
      .where(and(eq(witnessStatement.witnessId, found.id), eq(witnessStatement.digest, subject)))
    if (said) throw refused(`You have spoken about this ${input.about} already. A statement stays as it is.`)
    const [made] = await tx.db
      .insert(witnessStatement)
      .values({
        drawId: row.id,
        witnessId: found.id,
        about: input.about,
        verdict: input.verdict,
        digest: subject,
        at: wholeSecond(services.clock.now()),
      })
      .returning({ id: witnessStatement.id })
    if (!made) throw new Error('The statement was not written.')
    if (input.words !== null) await tx.db.insert(witnessWords).values({ statementId: made.id, words: input.words })
    await audit(tx, services, actor, {
      action: 'witness.state',
      organisationId: row.organisationId,
      drawId: row.id,
      subjectId: String(made.id),
      sentence: `${found.name} ${input.verdict} the ${input.about}${input.words === null ? '.' : `: ${input.words}`}`,
    })
  })
}
