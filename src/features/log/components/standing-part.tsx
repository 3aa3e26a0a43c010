import { useMemo } from 'react'
import type { LogHead, LogState } from '#shared/schemas/api/log.ts'
import { useApp } from '#src/lib/app-context.ts'
import { useLogWatch } from '#src/lib/use-log-watch.ts'
import { ButtonLink } from '#src/ui/button.tsx'
import { CopyButton } from '#src/ui/copy-button.tsx'
import { Digest } from '#src/ui/digest.tsx'
import { Figures } from '#src/ui/figures.tsx'
import { formatNumber } from '#src/ui/format-number.ts'
import { formatMoment } from '#src/ui/format-time.ts'
import { LogAlarm } from '#src/ui/log-alarm.tsx'
import { Part } from '#src/ui/page.tsx'

/** The head of the log, and what this browser finds when it compares it with the last one that it saw. */
export function StandingPart({ state }: { readonly state: LogState }) {
  const { head, kept } = state
  const watch = useLogWatch(useMemo(() => ({ head, entries: [] }), [head]))
  return (
    <Part title="How it stands" note={<p>The checkpoint: one number and one root for all that is below.</p>}>
      <Figures
        items={[
          { figure: formatNumber(head.size), words: head.size === 1 ? 'entry in the log' : 'entries in the log' },
        ]}
      />
      <Digest value={head.root} what="the root of the log" label="Root over all of them" />
      <Digest value={head.keyFingerprint} what="the fingerprint of the key" label="Signed by the site’s key" />
      <div className="mt-unit" role="status">
        {watch?.kind === 'alarm' ? (
          <LogAlarm title={watch.title} words={watch.words} evidence={watch.evidence} />
        ) : (
          <p className="measure">
            {watch === null
              ? 'A browser with JavaScript remembers this checkpoint, and proves on every visit that the log only grew.'
              : watch.kind === 'sound'
                ? `This browser has verified the signature. ${watch.words} It remembers this checkpoint for your next visit.`
                : watch.words}
          </p>
        )}
      </div>
      {kept ? (
        <p className="note mt-unit">
          The newest checkpoint under the lock of the archive has {formatNumber(kept.size)}{' '}
          {kept.size === 1 ? 'entry' : 'entries'}, signed on {formatMoment(kept.at, 'UTC')}.
        </p>
      ) : null}
    </Part>
  )
}

/** How somebody else checks the log, with tools of their own. */
export function CheckLogPart({ head }: { readonly head: LogHead }) {
  const { origin } = useApp()
  const ask = `curl ${origin}/log/checkpoint.txt`
  const prove = `curl '${origin}/api/v1/log/consistency?first=1&second=${Math.max(1, head.size)}'`
  return (
    <Part title="Check the log yourself">
      <div className="measure">
        <p>
          The entries are the leaves of one tree of hashes (RFC 9162). Its root changes with any change of any entry, so
          whoever remembers one root can prove later that everything before it is still there, unchanged.
        </p>
        <ul className="dashes mt-unit">
          <li>
            Ask for the checkpoint: the name of the log, its size, its root, and the site’s signature (a C2SP signed
            note). Keep it.
          </li>
          <li>
            The next time, ask for another one, and for the consistency proof between the two sizes. It leads from your
            root to the new one only if nothing that you saw was changed or taken out.
          </li>
          <li>
            An archive holds what the log says of its draw, with the paths to a checkpoint. Compare that checkpoint with
            the ones that you and others remember.
          </li>
        </ul>
      </div>
      <code className="command mt-unit" tabIndex={0}>
        {ask}
        {'\n'}
        {prove}
      </code>
      <p className="mt-unit">
        <CopyButton value={`${ask}\n${prove}`} what="the commands" text="Copy the commands" />
      </p>
      <p className="mt-unit">
        <ButtonLink plain to="/log/checkpoint.txt" quiet>
          See the checkpoint
        </ButtonLink>
      </p>
      <p className="measure mt-unit-2">
        What the log cannot show: whether the site shows everybody the same log. That takes people who compare their
        checkpoints, or witnesses who sign them.
      </p>
    </Part>
  )
}
