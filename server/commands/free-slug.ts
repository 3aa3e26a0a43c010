import { like, type SQL, sql } from 'drizzle-orm'
import { draw } from '#server/store/schema/draw.ts'
import { organisation } from '#server/store/schema/people.ts'
import type { Transaction } from './transaction.ts'

/** The first of `base`, `base-2`, `base-3`, … that no draw (or organisation) has. Two makers at once wait for each other. */
export async function freeSlug(tx: Transaction, of: 'draw' | 'organisation', base: string): Promise<string> {
  await tx.db.execute(sql`select pg_advisory_xact_lock(hashtext(${`slug ${of}`}))`)
  const table = of === 'draw' ? draw : organisation
  const near: SQL = like(table.slug, `${base}%`)
  const rows = await tx.db.select({ slug: table.slug }).from(table).where(near)
  const taken = new Set(rows.map(({ slug }) => slug))
  if (!taken.has(base)) return base
  for (let n = 2; ; n += 1) if (!taken.has(`${base}-${n}`)) return `${base}-${n}`
}
