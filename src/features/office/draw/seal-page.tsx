import { useQuery } from '@tanstack/react-query'
import { useParams, type LoaderFunctionArgs } from 'react-router'
import { sealDraw, type getSealSummary, type OfficeDraw } from '#shared/schemas/api/office.ts'
import type { ResponseOf } from '#shared/schemas/endpoint.ts'
import { useApp } from '#src/lib/app-context.ts'
import { Head } from '#src/lib/head.tsx'
import { load } from '#src/lib/loading.ts'
import { detailsOf, useSubmit } from '#src/lib/use-submit.ts'
import { Button } from '#src/ui/button.tsx'
import { Digest } from '#src/ui/digest.tsx'
import { ErrorSummary } from '#src/ui/error-summary.tsx'
import { TickField } from '#src/ui/field.tsx'
import { Figures } from '#src/ui/figures.tsx'
import { formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Facts, Part } from '#src/ui/page.tsx'
import { Failure, Skeleton } from '#src/ui/states.tsx'
import { sealSummaryQuery, useKeepDraw } from '../api/queries.ts'
import { OddsPart } from '../odds/odds-part.tsx'
import { useRole } from '../use-role.ts'
import { RULE_WORDS } from './draw-fields.tsx'
import { isBeingSealed } from './sealing.ts'
import { SealingNotice } from './sealing-notice.tsx'
import { useDraw } from './use-draw.ts'

type Summary = ResponseOf<typeof getSealSummary>

export async function loader(args: LoaderFunctionArgs) {
  await load(args, (api) => sealSummaryQuery(api, args.params.draw ?? ''))
  return null
}

export function Component() {
  const { api } = useApp()
  const draw = useDraw()
  const { data: summary, error, refetch } = useQuery(sealSummaryQuery(api, useParams().draw ?? ''))
  if (draw.sealDigest) return <Sealed draw={draw} digest={draw.sealDigest} />
  return (
    <>
      <Head title={`Seal: ${draw.title}`} description="What the seal fixes, and its confirmation." />
      {isBeingSealed(draw) ? (
        <Part title="The seal">
          <SealingNotice draw={draw} />
        </Part>
      ) : summary ? (
        <Prepare draw={draw} summary={summary} />
      ) : (
        <Part title="What the seal fixes">
          {error ? (
            <Failure
              title="The summary could not be made"
              detail={detailsOf(error).detail}
              onRetry={() => void refetch()}
            />
          ) : (
            <Skeleton label="Reading what the seal would fix" />
          )}
        </Part>
      )}
    </>
  )
}

function Prepare({ draw, summary }: { readonly draw: OfficeDraw; readonly summary: Summary }) {
  return (
    <>
      <Part
        title="What the seal fixes"
        note="Published, signed and logged before the randomness exists. Nobody can change it unseen."
      >
        <Figures
          items={[
            { figure: formatNumber(summary.entrants), words: 'entrants, each with their number of tickets' },
            { figure: formatNumber(summary.tickets), words: 'tickets in all: every one weighs the same' },
            {
              figure: formatNumber(summary.items),
              words: `to be won, drawn in this order: ${summary.prizes
                .map((prize) => (prize.quantity > 1 ? `${prize.name} (${formatNumber(prize.quantity)})` : prize.name))
                .join(', ')}`,
            },
            { figure: formatNumber(summary.reserves), words: 'reserves, called in order if a prize is not claimed' },
          ]}
        />
        <div className="mt-unit-2">
          <Facts
            items={[
              ['Rule', RULE_WORDS[summary.rule]],
              ['Draw', formatMoment(summary.drawAt, draw.timeZone)],
              [
                'Randomness',
                `Round ${formatNumber(summary.beacon.round)} of ${
                  summary.beacon.network === 'quicknet'
                    ? 'the public beacon drand quicknet'
                    : 'the development chain, whose secret is known to all'
                }, due ${formatMoment(summary.beacon.at, draw.timeZone, true)}, mixed with a secret of this site that the seal commits to`,
              ],
              ['Terms', <Digest key="terms" value={summary.termsDigest} what="digest of the terms" />],
              [
                'Signed with',
                <Digest key="key" value={summary.keyFingerprint} what="fingerprint of the signing key" />,
              ],
            ]}
          />
        </div>
      </Part>
      <OddsPart drawId={draw.id} entrants={summary.entrants} />
      <Part title="Before you seal">
        {summary.problems.length > 0 ? (
          <>
            <p>These stand in the way:</p>
            <ul className="checks">
              {summary.problems.map((problem) => (
                <li key={problem}>{problem}</li>
              ))}
            </ul>
          </>
        ) : (
          <p className="measure">
            Look through the list once more. After the seal a mistake can only be put right by a new seal with a public
            reason, and not at all from the moment of the draw.
          </p>
        )}
        <ul className="dashes mt-unit-2 measure">
          {summary.cautions.map((caution) => (
            <li key={caution}>{caution}</li>
          ))}
        </ul>
      </Part>
      <Confirm draw={draw} summary={summary} />
    </>
  )
}

function Confirm({ draw, summary }: { readonly draw: OfficeDraw; readonly summary: Summary }) {
  const role = useRole()
  const form = useSubmit(sealDraw, useKeepDraw())
  if (role !== 'promoter') {
    return (
      <Part title="Seal the list">
        <p className="measure">
          {summary.problems.length > 0
            ? 'Put the points above right. Then the promoter seals the list.'
            : 'Ready for the promoter to seal.'}
        </p>
      </Part>
    )
  }
  const blocked = !draw.may.seal
  return (
    <Part title="Seal the list">
      <form
        className="form"
        method="post"
        noValidate
        onSubmit={(event) => {
          event.preventDefault()
          if (blocked) return
          const confirmed = new FormData(event.currentTarget).get('confirmed') === 'on'
          form.submit({
            params: { draw: draw.id },
            body: {
              version: draw.version,
              entrants: summary.entrants,
              tickets: summary.tickets,
              confirmed: confirmed as true,
            },
          })
        }}
      >
        {form.failed ? <ErrorSummary title="The list is not sealed" detail={form.detail} errors={form.faults} /> : null}
        <TickField
          name="confirmed"
          label={`I have looked through the list: ${formatNumber(summary.entrants)} entrants with ${formatNumber(summary.tickets)} tickets, and the prizes in this order. I answer for it as the promoter.`}
          error={form.faultOf('confirmed')}
          disabled={blocked}
        />
        <p className="buttons">
          <Button type="submit" busy={form.busy} aria-disabled={blocked ? true : undefined} aria-describedby="seal-why">
            {form.busy ? 'Sealing' : 'Seal the list'}
          </Button>
        </p>
        <p id="seal-why" className="note">
          {blocked ? 'Put the points above right first.' : 'The seal is public at once.'}
        </p>
      </form>
    </Part>
  )
}

function Sealed({ draw, digest }: { readonly draw: OfficeDraw; readonly digest: string }) {
  return (
    <>
      <Head title={`Seal: ${draw.title}`} description="The seal in force." />
      {isBeingSealed(draw) ? (
        <Part title="A new seal">
          <SealingNotice draw={draw} />
        </Part>
      ) : null}
      <Part title="The seal">
        <p className="measure">
          The list is sealed{draw.sealedAt ? `, ${formatMoment(draw.sealedAt, draw.timeZone)}` : ''}.{' '}
          {draw.state === 'sealed'
            ? `It is drawn ${formatMoment(draw.drawAt, draw.timeZone)}, by itself: nobody has to press anything.`
            : ''}
        </p>
        <div className="mt-unit-2">
          <Digest value={digest} what="digest of the seal" label="Seal" />
        </div>
        <p className="mt-unit">
          <Link to={`/draws/${draw.slug}`}>See it on the public page</Link>
        </p>
        {draw.may.replaceSeal ? (
          <p className="note mt-unit measure">
            To put a mistake right or to change the time, postpone the draw from its first page: that makes a new seal
            with a public reason, and this one stays beside it.
          </p>
        ) : null}
      </Part>
    </>
  )
}
