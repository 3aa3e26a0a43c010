import { asc, eq, sql } from 'drizzle-orm'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import type { Database } from '#server/store/database.ts'
import { sealedLeaf } from '#server/store/schema/seal.ts'
import { Lasting } from './lasting.ts'
import type { SealRow } from './seals.ts'

/** Up to so many leaves are shown one by one. */
const SINGLE_LEAVES = 400

type Spread = NonNullable<DrawPage['spread']>
type Counts = Extract<Spread, { kind: 'counts' }>['counts']
const lists = new Lasting<number[]>(200)
const counted = new Lasting<Counts>(200)

/** The sealed ticket counts for the chart. A sealed list never changes, so it is read once. */
export async function spreadOf(db: Database, seal: SealRow, winners: readonly number[]): Promise<Spread> {
  if (seal.entrants <= SINGLE_LEAVES) {
    const tickets = await lists.get(seal.digest, async () => {
      const rows = await db
        .select({ tickets: sealedLeaf.tickets })
        .from(sealedLeaf)
        .where(eq(sealedLeaf.sealId, seal.id))
        .orderBy(asc(sealedLeaf.leaf))
      return rows.map((row) => row.tickets)
    })
    return { kind: 'leaves', tickets: [...tickets], winners: [...winners] }
  }
  const counts = await counted.get(seal.digest, () =>
    db
      .select({ tickets: sealedLeaf.tickets, entrants: sql<number>`count(*)::int` })
      .from(sealedLeaf)
      .where(eq(sealedLeaf.sealId, seal.id))
      .groupBy(sealedLeaf.tickets)
      .orderBy(asc(sealedLeaf.tickets)),
  )
  return { kind: 'counts', counts: [...counts] }
}
