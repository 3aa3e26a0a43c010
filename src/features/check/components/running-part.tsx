import { formatBytes } from '#src/ui/format-number.ts'
import { Part } from '#src/ui/page.tsx'
import type { Progress, StepView } from '../check-state.ts'

interface RunningPartProps {
  readonly fetched: Progress | null
  /** Of all steps, from 0 to 1. */
  readonly share: number
  readonly steps: readonly StepView[]
}

/** A check under way: the download first, then all the steps as one bar. */
export function RunningPart({ fetched, share, steps }: RunningPartProps) {
  const current = steps.find(({ state }) => state === 'running')
  const loading = fetched !== null && current === undefined && share === 0
  return (
    <Part title="Under way">
      {loading ? (
        <>
          <p>
            {fetched.total === null
              ? `Fetching the archive: ${formatBytes(fetched.done)} so far.`
              : `Fetching the archive: ${formatBytes(fetched.done)} of ${formatBytes(fetched.total)}.`}
          </p>
          <progress
            className="check-progress"
            aria-label="Fetching the archive"
            {...(fetched.total === null ? {} : { value: fetched.done, max: fetched.total })}
          />
        </>
      ) : (
        <>
          <p>{current ? `Step ${current.step} of ${steps.length}: ${current.title}.` : 'Opening the archive.'}</p>
          <progress className="check-progress" aria-label="All steps" value={share} max={1} />
        </>
      )}
    </Part>
  )
}
