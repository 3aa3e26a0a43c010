import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import type { LogWatch } from '../worker/watch-log.ts'
import { printable } from '../words.ts'

/** Whether the site's log still holds what was seen of it before. */
export function LogPart({ log }: { readonly log: LogWatch }) {
  const alarms = log.lines.filter(({ alarm }) => alarm)
  return (
    <Part title="The site’s log" note={<p>Compared with this archive, and with what this browser remembers</p>}>
      {log.lines
        .filter(({ alarm }) => !alarm)
        .map(({ words }) => (
          <p className="measure" key={words}>
            {printable(words)}
          </p>
        ))}
      {alarms.length > 0 ? (
        <Notice title="The log does not hold what it held" fault>
          {alarms.map(({ words }) => (
            <p key={words}>{printable(words)}</p>
          ))}
          {log.evidence.map((note, index) => (
            <code className="command" tabIndex={0} key={index}>
              {note.trimEnd()}
            </code>
          ))}
        </Notice>
      ) : null}
    </Part>
  )
}
