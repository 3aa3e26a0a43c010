import type { OfficeDraw } from '#shared/schemas/api/office.ts'
import { Head } from '#src/lib/head.tsx'
import { Digest } from '#src/ui/digest.tsx'
import { countOf, formatBytes, formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Facts, Part } from '#src/ui/page.tsx'
import { Time } from '#src/ui/time.tsx'
import { CorrectionsPart } from '../corrections/corrections-part.tsx'
import { PaperPart } from '../paper/paper-part.tsx'
import { JOB_STATES, jobTitle } from './job-words.ts'
import { NextStep } from './next-step.tsx'
import { RunPart } from './run-part.tsx'
import { useDraw } from './use-draw.ts'
import { WitnessPart } from './witness-part.tsx'

/** The draw at a glance: what to do next, jobs, mails, witnesses, and the gravest actions last. */
export function Component() {
  const draw = useDraw()
  return (
    <>
      <Head title={draw.title} description="What to do next, jobs, mails and witnesses." />
      <NextStep draw={draw} />
      {draw.state === 'draft' ? null : <PublicPart draw={draw} />}
      <MailPart draw={draw} />
      <JobPart draw={draw} />
      <CorrectionsPart draw={draw} />
      <PaperPart draw={draw} />
      <WitnessPart draw={draw} />
      <RunPart draw={draw} />
    </>
  )
}

function PublicPart({ draw }: { readonly draw: OfficeDraw }) {
  return (
    <Part title="In public">
      <Facts
        items={[
          [
            'Page',
            <Link key="page" to={`/draws/${draw.slug}`}>
              /draws/{draw.slug}
            </Link>,
          ],
          draw.sealDigest ? ['Seal', <Digest key="seal" value={draw.sealDigest} what="digest of the seal" />] : null,
          draw.archive
            ? [
                'Proof archive',
                `${formatBytes(draw.archive.bytes)}, ${
                  draw.archive.verifiedAt
                    ? `stored and read back ${formatMoment(draw.archive.verifiedAt, draw.timeZone)}`
                    : 'stored, not yet read back'
                }${draw.archive.lockedUntil ? `; locked until ${formatMoment(draw.archive.lockedUntil, draw.timeZone)}` : ''}`,
              ]
            : null,
        ]}
      />
    </Part>
  )
}

const MAILS = [
  ['entry', 'Private links'],
  ['seal', 'Receipts and seal'],
  ['result', 'Result'],
  ['notice', 'Postponed, cancelled'],
] as const

function MailPart({ draw }: { readonly draw: OfficeDraw }) {
  const kinds = MAILS.filter(([kind]) => Object.values(draw.mail[kind]).some((count) => count > 0))
  if (kinds.length === 0 && draw.state !== 'sealed' && draw.state !== 'drawn') return null
  const without = draw.counts.entrants - draw.counts.withEmail
  return (
    <Part
      title="Mails"
      note={
        without > 0 ? (
          <>
            {countOf(without, 'entrant')} without an <span className="nb">e-mail</span> address
          </>
        ) : undefined
      }
    >
      {kinds.length === 0 ? (
        <p>No entrant has an e-mail address. Tell them by letter or telephone.</p>
      ) : (
        <Facts
          exact
          items={kinds.map(([kind, words]) => {
            const { queued, sent, failed } = draw.mail[kind]
            return [
              words,
              `${formatNumber(sent)} sent${queued > 0 ? `, ${formatNumber(queued)} waiting` : ''}${
                failed > 0 ? `, ${formatNumber(failed)} refused by the other side` : ''
              }`,
            ]
          })}
        />
      )}
      {kinds.length > 0 && without > 0 ? (
        <p className="note mt-unit">Tell those without an address by letter or telephone.</p>
      ) : null}
    </Part>
  )
}

function JobPart({ draw }: { readonly draw: OfficeDraw }) {
  if (draw.jobs.length === 0) return null
  return (
    <Part title="Jobs" note="What the site does by itself">
      <ul className="account">
        {draw.jobs.map((job) => (
          <li key={job.id}>
            <Time at={job.at} timeZone={draw.timeZone} as="brief" />
            <div>
              <p>
                <b>{jobTitle(job.kind)}</b> {JOB_STATES[job.state]}
                {job.tries > 1 ? `, tried ${job.tries} times` : ''}.
              </p>
              {job.error ? <p className="exact">{job.error}</p> : null}
            </div>
          </li>
        ))}
      </ul>
    </Part>
  )
}
