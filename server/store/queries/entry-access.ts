import { eq, inArray } from 'drizzle-orm'
import { readSlipCode } from '#shared/entrants/slip-code.ts'
import type { Services } from '#server/services.ts'
import { entrantPerson } from '#server/store/schema/entrant.ts'
import { entryCode, entryToken } from '#server/store/schema/entry.ts'
import { tokenHash } from '#server/store/tokens.ts'

/** Whose private page is asked for. */
export interface EntryAccess {
  readonly entrantId: number
  readonly drawId: string
}

const where = { entrantId: entrantPerson.entrantId, drawId: entrantPerson.drawId }

/** Whether a secret in an address is a slip's code rather than a mailed token: those have 43 letters. */
export const isSlipCode = (secret: string): boolean => readSlipCode(secret).ok

/** The entrant behind a mailed token or a slip's code; null for any other words, and once their details were erased. */
export async function findEntryAccess(
  { db, slipCodes }: Pick<Services, 'db' | 'slipCodes'>,
  secret: string,
): Promise<EntryAccess | null> {
  const code = readSlipCode(secret)
  if (code.ok) {
    const [row] = await db
      .select(where)
      .from(entryCode)
      .innerJoin(entrantPerson, eq(entrantPerson.entrantId, entryCode.entrantId))
      .where(inArray(entryCode.codeHash, [...slipCodes.all(code.value)]))
    return row ?? null
  }
  const [row] = await db
    .select(where)
    .from(entryToken)
    .innerJoin(entrantPerson, eq(entrantPerson.entrantId, entryToken.entrantId))
    .where(eq(entryToken.tokenHash, tokenHash(secret)))
  return row ?? null
}
