import { useQuery, useQueryClient } from '@tanstack/react-query'
import type { LoaderFunctionArgs } from 'react-router'
import { retryJob, type getSiteState } from '#shared/schemas/api/administrator.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf, useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { DataTable } from '#src/ui/data-table.tsx'
import { Digest } from '#src/ui/digest.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { secondsBetween, spanWords } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Notice } from '#src/ui/notice.tsx'
import { Facts, Part, Title } from '#src/ui/page.tsx'
import { Failure, Skeleton } from '#src/ui/states.tsx'
import { Time } from '#src/ui/time.tsx'
import { siteStateQuery } from './api/queries.ts'
import { jobWords } from './job-words.ts'

type SiteState = ResponseOf<typeof getSiteState>

/** The site has no place of its own: its times are told in UTC. */
const ZONE = 'UTC'
/** Seconds without a sign of life after which a worker counts as gone: it gives one every ten. */
const WORKER_SILENCE = 60

export async function loader(args: LoaderFunctionArgs) {
  await load(args, siteStateQuery)
  return null
}

export function Component() {
  const { api } = useApp()
  const { data, error, refetch } = useQuery(siteStateQuery(api))
  return (
    <>
      <Head title="State of the site" description="Jobs, mail, beacon and object store." />
      <Title
        title="State of the site"
        lead={data ? leadOf(data) : undefined}
        stub={
          data ? (
            <p className="stub-facts mt-0">
              As of <Time at={data.now} timeZone={ZONE} />
            </p>
          ) : null
        }
      />
      {data ? (
        <>
          <Overdue state={data} />
          <Jobs state={data} />
          <Mail state={data} />
          <Beacon state={data} />
          <Outside state={data} />
          <Store state={data} />
          <Key state={data} />
        </>
      ) : (
        <Part title="State">
          {error ? (
            <Failure
              title="The state could not be read"
              detail={detailsOf(error).detail}
              onRetry={() => void refetch()}
            />
          ) : (
            <Skeleton label="Reading the state of the site" />
          )}
        </Part>
      )}
    </>
  )
}

/** What to look at first, in one sentence. */
export function leadOf(state: SiteState): string {
  const faults = [
    workerGone(state) ? 'the worker gives no sign of life' : null,
    state.overdue.length > 0 ? `${countOf(state.overdue.length, 'draw')} overdue` : null,
    state.jobs.failed.length > 0 ? `${countOf(state.jobs.failed.length, 'job')} failed` : null,
    state.mail.reachable ? null : 'the mail server cannot be reached',
    state.mail.failed > 0 ? `${countOf(state.mail.failed, 'mail')} failed` : null,
    state.beacon.relays.some((relay) => relay.ok) ? null : 'no beacon relay answers',
    state.timestamps.authorities.some((authority) => authority.ok) ? null : 'no timestamp authority answers',
    state.timestamps.waiting > 0 ? `${countOf(state.timestamps.waiting, 'seal')} waiting for a timestamp` : null,
    state.store.reachable ? null : 'the object store cannot be reached',
    Math.abs(state.clockErrorSeconds) >= 2
      ? `this machine's clock and the database's are ${state.clockErrorSeconds} seconds apart`
      : null,
  ].filter((fault) => fault !== null)
  return faults.length === 0 ? 'Everything answers, and nothing is overdue.' : `To look at: ${faults.join('; ')}.`
}

function workerGone(state: SiteState): boolean {
  return state.jobs.workerSeenAt === null || secondsBetween(state.jobs.workerSeenAt, state.now) > WORKER_SILENCE
}

function Overdue({ state }: { readonly state: SiteState }) {
  if (state.overdue.length === 0) return null
  return (
    <Part title="Overdue draws" note="Sealed, past their time, no result">
      <ul className="account">
        {state.overdue.map((draw) => (
          <li key={draw.slug}>
            <Time at={draw.drawAt} timeZone={ZONE} />
            <p>
              <Link to={`/draws/${draw.slug}`}>{draw.title}</Link>
            </p>
          </li>
        ))}
      </ul>
    </Part>
  )
}

function Jobs({ state }: { readonly state: SiteState }) {
  const { jobs, now } = state
  return (
    <Part
      title="Jobs"
      note={jobs.workerSeenAt ? `Worker seen ${spanWords(secondsBetween(jobs.workerSeenAt, now))} ago` : null}
    >
      {workerGone(state) ? (
        <div className="mb-unit-2">
          <Notice title="No worker is running" fault>
            <p>
              Draws are not settled and mails are not sent until one is. Nothing is lost: jobs wait in the database.
            </p>
          </Notice>
        </div>
      ) : null}
      {jobs.counts.length === 0 ? (
        <p>No job waits, runs or has failed.</p>
      ) : (
        <DataTable
          dense
          rows={jobs.counts}
          rowKey={(row) => row.kind}
          columns={[
            { key: 'kind', head: 'Kind', rowHead: true, cell: (row) => jobWords(row.kind) },
            { key: 'waiting', head: 'Waiting', numeric: true, cell: (row) => formatNumber(row.waiting) },
            { key: 'running', head: 'Running', numeric: true, cell: (row) => formatNumber(row.running) },
            { key: 'failed', head: 'Failed', numeric: true, cell: (row) => formatNumber(row.failed) },
          ]}
        />
      )}
      {jobs.failed.length > 0 ? (
        <>
          <h3 className="mt-unit-3 mb-unit">Failed jobs</h3>
          <ul className="account">
            {jobs.failed.map((job) => (
              <FailedJob key={job.id} job={job} />
            ))}
          </ul>
        </>
      ) : null}
    </Part>
  )
}

function FailedJob({ job }: { readonly job: SiteState['jobs']['failed'][number] }) {
  const queryClient = useQueryClient()
  const again = useSubmit(retryJob, () => queryClient.invalidateQueries({ queryKey: ['administrator', 'state'] }))
  return (
    <li>
      <Time at={job.at} timeZone={ZONE} />
      <div>
        <p>
          <b>{jobWords(job.kind)}</b>
          {job.draw ? (
            <>
              , <Link to={`/draws/${job.draw.slug}`}>{job.draw.title}</Link>
            </>
          ) : null}
          . Tried {countOf(job.tries, 'time')}.
        </p>
        <p className="exact">{job.error}</p>
        {again.detail ? (
          <p className="fault" role="alert">
            {again.detail}
          </p>
        ) : null}
        <p className="mt-unit">
          <Button small quiet busy={again.busy} onClick={() => again.submit({ params: { job: job.id } })}>
            Try again
          </Button>
        </p>
      </div>
    </li>
  )
}

function Mail({ state: { mail } }: { readonly state: SiteState }) {
  return (
    <Part title="Mail">
      <Facts
        exact
        items={[
          ['Server', mail.reachable ? mail.detail : `Not reachable. ${mail.detail}`],
          ['Waiting', formatNumber(mail.queued)],
          ['Sent', formatNumber(mail.sent)],
          ['Failed', formatNumber(mail.failed)],
        ]}
      />
      {mail.lastFailures.length > 0 ? (
        <ul className="account mt-unit-2">
          {mail.lastFailures.map((failure, index) => (
            <li key={`${failure.at} ${index}`}>
              <Time at={failure.at} timeZone={ZONE} />
              <p>
                {failure.kind}: {failure.error}
              </p>
            </li>
          ))}
        </ul>
      ) : null}
    </Part>
  )
}

function Beacon({ state: { beacon } }: { readonly state: SiteState }) {
  return (
    <Part title="Beacon" note={beacon.network}>
      <DataTable
        dense
        rows={beacon.relays}
        rowKey={(relay) => relay.address}
        columns={[
          { key: 'address', head: 'Relay', rowHead: true, cell: (relay) => relay.address },
          { key: 'state', head: 'State', cell: (relay) => (relay.ok ? 'Answers, signature verified' : relay.detail) },
          {
            key: 'round',
            head: 'Latest round',
            numeric: true,
            cell: (relay) => (relay.round === null ? '' : formatNumber(relay.round)),
          },
          {
            key: 'time',
            head: 'Took',
            numeric: true,
            cell: (relay) => (relay.milliseconds === null ? '' : `${formatNumber(relay.milliseconds)} ms`),
          },
        ]}
      />
    </Part>
  )
}

/** Who, besides this site, says when a seal was there. */
function Outside({ state: { timestamps, witnesses } }: { readonly state: SiteState }) {
  return (
    <Part title="Timestamps and witnesses">
      <DataTable
        dense
        rows={timestamps.authorities}
        rowKey={(authority) => authority.address}
        columns={[
          { key: 'address', head: 'Timestamp authority', rowHead: true, cell: (authority) => authority.address },
          { key: 'state', head: 'State', cell: (authority) => authority.detail },
          {
            key: 'time',
            head: 'Took',
            numeric: true,
            cell: (authority) => (authority.milliseconds === null ? '' : `${formatNumber(authority.milliseconds)} ms`),
          },
        ]}
      />
      {witnesses.length === 0 ? (
        <p className="note mt-unit">No outside witness follows the log.</p>
      ) : (
        <DataTable
          dense
          rows={witnesses}
          rowKey={(witness) => witness.name}
          columns={[
            { key: 'name', head: 'Witness of the log', rowHead: true, cell: (witness) => witness.name },
            { key: 'state', head: 'State', cell: (witness) => witness.detail },
            { key: 'size', head: 'Entries', numeric: true, cell: (witness) => formatNumber(witness.size) },
          ]}
        />
      )}
    </Part>
  )
}

function Store({ state: { store } }: { readonly state: SiteState }) {
  return (
    <Part title="Object store">
      <Facts
        exact
        items={[
          ['Bucket', store.bucket],
          ['State', store.reachable ? store.detail : `Not reachable. ${store.detail}`],
          [
            'Retention lock',
            store.locked ? 'On: archives cannot be deleted before their time' : 'Off: this bucket has none',
          ],
          ['Archives', formatNumber(store.archives)],
          ['Not yet read back', formatNumber(store.unverified)],
        ]}
      />
    </Part>
  )
}

function Key({ state }: { readonly state: SiteState }) {
  return (
    <Part title="Signing key" note="Print it on posters: a check compares it">
      <Digest value={state.keyFingerprint} what="fingerprint of the signing key" />
      <p className="exact note mt-unit">
        The database&rsquo;s clock is{' '}
        {Math.abs(state.clockErrorSeconds) < 1
          ? 'within a second of this machine’s'
          : `${Math.abs(state.clockErrorSeconds)} seconds ${state.clockErrorSeconds > 0 ? 'ahead of' : 'behind'} this machine’s`}
        .
      </p>
    </Part>
  )
}
