import { sql } from 'drizzle-orm'
import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import type { Database } from '#server/store/database.ts'
import { instantOf } from '#server/time/instants.ts'

/** pg-boss keeps finished jobs in `job` for half a day, then in `archive` for a week. */
const ALL_JOBS = sql`(
  select id, name, data, state::text as state, start_after, started_on, completed_on, retry_count, output from pgboss.job
  union all
  select id, name, data, state::text, start_after, started_on, completed_on, retry_count, output from pgboss.archive
) as j`

type JobState = OfficeDraw['jobs'][number]['state']
const STATES: Readonly<Record<string, JobState>> = {
  created: 'waiting',
  retry: 'waiting',
  active: 'running',
  completed: 'done',
  cancelled: 'cancelled',
  failed: 'failed',
}

interface JobRow extends Record<string, unknown> {
  id: string
  name: string
  state: string
  seconds: number
  tries: number
  error: string | null
}

/** The jobs of one draw, newest first: of those that were run again and again, the latest. */
export async function jobsOf(db: Database, drawId: string): Promise<OfficeDraw['jobs']> {
  const { rows } = await db.execute<JobRow>(sql`
    select * from (
      select distinct on (name, data) id, name, state, retry_count as tries,
        coalesce(output ->> 'message', output -> 'value' ->> 'message') as error,
        extract(epoch from coalesce(completed_on, started_on, start_after))::float8 as seconds
      from ${ALL_JOBS} where data ->> 'draw' = ${drawId} order by name, data, start_after desc, id) latest
    order by seconds desc, id limit 50`)
  return rows.map((row) => ({
    id: row.id,
    kind: row.name,
    state: STATES[row.state] ?? 'waiting',
    at: instantOf(new Date(row.seconds * 1000)),
    tries: row.tries + (row.state === 'created' ? 0 : 1),
    error: row.error,
  }))
}

/** Counts of each kind, and the jobs that were given up, newest first. */
export async function jobStates(db: Database) {
  const [counts, failed] = await Promise.all([
    db.execute<{ kind: string; waiting: number; running: number; failed: number }>(sql`
      select name as kind, count(*) filter (where state in ('created', 'retry'))::int as waiting,
        count(*) filter (where state = 'active')::int as running, count(*) filter (where state = 'failed')::int as failed
      from ${ALL_JOBS} where name not like '\\_\\_pgboss%' group by name order by name`),
    db.execute<JobRow & { slug: string | null; title: string | null }>(sql`
      select j.id, j.name, j.retry_count as tries, draw.slug, draw.title,
        coalesce(j.output ->> 'message', j.output -> 'value' ->> 'message', '') as error,
        extract(epoch from coalesce(j.completed_on, j.start_after))::float8 as seconds
      from ${ALL_JOBS} left join draw on draw.id::text = j.data ->> 'draw'
      where j.state = 'failed' order by j.completed_on desc limit 50`),
  ])
  return {
    counts: counts.rows,
    failed: failed.rows.map((row) => ({
      id: row.id,
      kind: row.name,
      draw: row.slug === null || row.title === null ? null : { slug: row.slug, title: row.title },
      at: instantOf(new Date(row.seconds * 1000)),
      tries: row.tries + 1,
      error: row.error ?? '',
    })),
  }
}

/** Whether a job of this kind waits or runs for a draw. */
export async function hasLiveJob(db: Database, queue: string, drawId: string): Promise<boolean> {
  const { rows } = await db.execute(sql`
    select from pgboss.job where name = ${queue} and state in ('created', 'retry', 'active')
      and data ->> 'draw' = ${drawId} limit 1`)
  return rows.length > 0
}
