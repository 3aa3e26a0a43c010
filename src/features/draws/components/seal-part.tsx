import type { DrawPage, SealView } from '#shared/schemas/api/public.ts'
import { CopyButton } from '#src/ui/copy-button.tsx'
import { Digest, digestGroups } from '#src/ui/digest.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatClock, formatMoment, wallClock } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { Part } from '#src/ui/page.tsx'
import { SealEdge } from '#src/ui/seal-edge.tsx'

export function SealPart({ draw }: { readonly draw: DrawPage }) {
  const { seal } = draw
  if (!seal) return null
  const at = wallClock(seal.sealedAt, draw.timeZone)
  const groups = digestGroups(seal.digest)
  return (
    <Part title="The seal" note={<p>Published, signed and logged before any random number exists.</p>}>
      <div className="seal-grid">
        <SealEdge
          large
          digest={seal.digest}
          lines={[`${at.day} ${at.monthName.slice(0, 3)} ${at.year}`, formatClock(seal.sealedAt, draw.timeZone, true)]}
        />
        <div>
          <p className="hex">
            {[0, 4, 8, 12].map((from) => (
              <span className="block" key={from}>
                {groups.slice(from, from + 4).join(' ')}
              </span>
            ))}
          </p>
          <div className="note mt-unit">
            The edge shows the same 64 digits: one reed each, the longer the higher. It helps the eye; only the digits
            prove anything. <CopyButton value={seal.digest} what="the seal" text="Copy the digest" />
          </div>
          {seal.timestamp ? (
            <p className="mt-unit">
              Timestamped by {seal.timestamp.authority} on {formatMoment(seal.timestamp.at, draw.timeZone, true)}.{' '}
              {seal.beacon?.network === 'development'
                ? 'This is the authority for tests, whose key everybody knows: it shows nothing.'
                : 'That is somebody other than this site: the seal was there by then.'}
            </p>
          ) : null}
          <div className="note mt-unit">
            <Digest label="Signed with the site’s key" value={seal.keyFingerprint} what="the key’s fingerprint" />
          </div>
        </div>
      </div>
      <p className="note mt-unit-2">
        The signed bytes:{' '}
        <Link plain to={`/draws/${draw.slug}/seal.json`}>
          seal.json
        </Link>
        ,{' '}
        <Link plain to={`/draws/${draw.slug}/seal.sig`}>
          seal.sig
        </Link>
        ,{' '}
        <Link plain to={`/draws/${draw.slug}/entries.csv`}>
          entries.csv
        </Link>
        ,{' '}
        <Link plain to={`/draws/${draw.slug}/terms.txt`}>
          terms.txt
        </Link>
        ,{' '}
        <Link plain to={`/draws/${draw.slug}/site-key.pem`}>
          site-key.pem
        </Link>
        {seal.timestamp ? (
          <>
            ,{' '}
            <Link plain to={`/draws/${draw.slug}/seal.tsr`}>
              seal.tsr
            </Link>{' '}
            (the timestamp)
          </>
        ) : null}
        . The list shows ticket counts and no names.
      </p>
    </Part>
  )
}

export function EarlierSealsPart({ draw }: { readonly draw: DrawPage }) {
  if (draw.replacedSeals.length === 0) return null
  const chain = [...draw.replacedSeals, ...(draw.seal ? [draw.seal] : [])]
  return (
    <Part title="Earlier seals" note={<p>Replaced in public, kept for good, their secrets destroyed unopened.</p>}>
      <ul className="figures">
        {draw.replacedSeals.map((old, index) => (
          <li key={old.digest}>
            <span>Seal {index + 1}</span>
            <div>
              <p>
                Sealed on {formatMoment(old.sealedAt, draw.timeZone)}, to be drawn on{' '}
                {formatMoment(old.drawAt, draw.timeZone)}.
              </p>
              {chain[index + 1]?.reason ? (
                <p className="mt-0">Why it was replaced: “{chain[index + 1]?.reason}”</p>
              ) : null}
              {chain[index + 1]?.changes ? (
                <p className="mt-0">{changeWords(chain[index + 1]?.changes ?? null)}</p>
              ) : null}
              {old.timestamp ? (
                <p className="note">
                  Timestamped by {old.timestamp.authority} on {formatMoment(old.timestamp.at, draw.timeZone, true)}.
                </p>
              ) : null}
              <div className="note">
                <Digest value={old.digest} what={`seal ${index + 1}`} />
              </div>
            </div>
          </li>
        ))}
      </ul>
    </Part>
  )
}

/** How the list that came next differs, in entrants. */
export function changeWords(changes: SealView['changes']): string {
  if (!changes) return ''
  const { added, removed, changed } = changes
  if (added + removed + changed === 0) return 'The list stayed as it was.'
  const parts = [
    `${countOf(added, 'entrant')} added`,
    `${formatNumber(removed)} removed`,
    `${formatNumber(changed)} changed`,
  ]
  return `In the list that came next: ${parts.join(', ')}.`
}

/** For entrants: how to see for themselves that they are in the list; and how many have done so. */
export function AreYouInPart({ draw }: { readonly draw: DrawPage }) {
  const over = draw.result !== null
  return (
    <Part title="Are you in it?">
      <div className="measure">
        <p>
          Every entrant with an e-mail address was sent a receipt when the list was sealed, and others can have a slip
          with a code. The receipt leads from their tickets to this seal, so it proves that they are in the list, and
          nobody else’s entry is shown by it. <Link to="/entry">Open your own entry</Link>.
        </p>
        {over ? null : (
          <p>
            If you entered and have none, ask the promoter before the draw: a mistake in a sealed list can be put right
            by a new seal until then, and not after.
          </p>
        )}
        {draw.seal && draw.receiptsOpened !== null ? (
          <p>{openedWords(draw.receiptsOpened, draw.seal.entrants, over)}</p>
        ) : null}
      </div>
    </Part>
  )
}

/** The more receipts were opened, the harder it was to leave anybody out unnoticed. */
function openedWords(opened: number, entrants: number, over: boolean): string {
  const when = over ? 'before the draw' : 'so far'
  const were =
    opened === 0 ? 'No receipt was' : opened === 1 ? '1 receipt was' : `${formatNumber(opened)} receipts were`
  return `${were} opened and checked ${when}, of ${formatNumber(entrants)}.`
}
