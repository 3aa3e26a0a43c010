import { keepPreviousData, useQuery } from '@tanstack/react-query'
import type { DrawLog } from '#shared/schemas/api/log.ts'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import { useApp } from '#src/lib/app-context.ts'
import { eventMeaning, eventTitle } from '#src/lib/event-words.ts'
import { useLogWatch } from '#src/lib/use-log-watch.ts'
import { Digest } from '#src/ui/digest.tsx'
import { countOf, formatNumber } from '#src/ui/format-number.ts'
import { formatBrief, zoneName } from '#src/ui/format-time.ts'
import { Link } from '#src/ui/link.tsx'
import { LogAlarm } from '#src/ui/log-alarm.tsx'
import { Part } from '#src/ui/page.tsx'
import { drawLogQuery } from '../api/get-draw-log.ts'

/** Everything that the log says of a draw, each line proven against a checkpoint. */
export function HistoryPart({ draw }: { readonly draw: DrawPage }) {
  const { api } = useApp()
  const { data: log } = useQuery({ ...drawLogQuery(api, draw), placeholderData: keepPreviousData })
  const watch = useLogWatch(log)
  if (draw.history.length === 0) return null
  const year = new Date(draw.now).getUTCFullYear()
  const proven = new Set(provenLines(draw, log))
  return (
    <Part
      title={draw.state === 'drawn' || draw.state === 'concluded' ? 'The whole history' : 'What has happened'}
      note={<p>Nothing is ever taken away. Times are those of {zoneName(draw.timeZone)}.</p>}
    >
      <ol className="account">
        {draw.history.map((line) => (
          <li key={line.index}>
            <time dateTime={line.at}>{formatBrief(line.at, draw.timeZone, year)}</time>
            <div>
              <h3>{eventTitle(line)}</h3>
              <p>{eventMeaning(line)}</p>
              {line.note ? <p className="mt-0">“{line.note}”</p> : null}
              <div className="exact">
                <Link to={`/log?at=${line.index}#entry-${line.index}`}>
                  Entry {formatNumber(line.index)} of the log
                </Link>
                {log && proven.has(line.index)
                  ? `, proven against the checkpoint of size ${formatNumber(log.head.size)}`
                  : ''}
                {line.digest ? <Digest value={line.digest} what={`the digest of log entry ${line.index}`} /> : null}
              </div>
            </div>
          </li>
        ))}
      </ol>
      {log && proven.size > 0 ? (
        <div className="mt-unit-2" role="status">
          {watch?.kind === 'alarm' ? (
            <LogAlarm title={watch.title} words={watch.words} evidence={watch.evidence} />
          ) : (
            <p className="measure">
              {watch === null
                ? `The site has proven ${linesWords(proven.size, draw.history.length)} against the signed checkpoint of its log, ${countOf(log.head.size, 'entry', 'entries')}.`
                : `This browser has proven ${linesWords(proven.size, draw.history.length)} itself, against the signed checkpoint of ${countOf(log.head.size, 'entry', 'entries')}. ${watch.words}`}{' '}
              <Link to="/log">What the log is, and how to check it</Link>.
            </p>
          )}
        </div>
      ) : null}
    </Part>
  )
}

function linesWords(proven: number, all: number): string {
  if (proven === all) return all === 1 ? 'this line' : 'each of these lines'
  return `${proven} of these ${all} lines`
}

/** The lines for which the log has an entry that says the same. */
function provenLines(draw: DrawPage, log: DrawLog | undefined): number[] {
  const leaves = new Map(log?.entries.map(({ index, leaf }) => [index, leaf]))
  return draw.history.flatMap((line) => {
    const leaf = leaves.get(line.index)
    return leaf !== undefined && entrySays(leaf, line) ? [line.index] : []
  })
}

function entrySays(leaf: string, line: DrawPage['history'][number]): boolean {
  const said = JSON.parse(leaf) as Record<string, unknown>
  return said.event === line.event && said.at === line.at && said.digest === line.digest
}
