import type { CheckFailure } from '#shared/protocol/check/failure.ts'
import { BEYOND_ANY_CHECK, verdictSentences } from '#shared/protocol/check/verdict.ts'
import { countOf } from '#src/ui/format-number.ts'
import { Notice } from '#src/ui/notice.tsx'
import { Part } from '#src/ui/page.tsx'
import type { CheckView } from '../check-state.ts'
import { durationWords, headAndRest, printable } from '../words.ts'
import { FailurePlace } from './step-list.tsx'

/** How a check ended: both halves of the verdict, or the first place that fails. */
export function VerdictPart({ view }: { readonly view: CheckView }) {
  if (view.phase === 'held' && view.held) return <Held held={view.held} milliseconds={view.milliseconds ?? 0} />
  if (view.phase === 'failed' && view.failure) return <Failed failure={view.failure} title={stepTitle(view)} />
  if (view.phase === 'stopped') {
    return (
      <Part title="No verdict">
        <Notice title="The check broke off" fault>
          <p>{view.trouble}</p>
        </Notice>
      </Part>
    )
  }
  if (view.phase === 'cancelled') {
    return (
      <Part title="No verdict">
        <p className="measure">You stopped the check before its end. It says nothing about the archive.</p>
      </Part>
    )
  }
  return null
}

const stepTitle = ({ steps, failure }: CheckView) => steps.find(({ step }) => step === failure?.step)?.title ?? ''

interface HeldProps {
  readonly held: NonNullable<CheckView['held']>
  readonly milliseconds: number
}

function Held({ held: { verdict, draw }, milliseconds }: HeldProps) {
  const sentences = verdictSentences(verdict).map(headAndRest)
  const halves = sentences.filter(({ head }) => head !== null)
  const others = sentences.filter(({ head }) => head === null)
  const engine = draw.engine === 'webassembly' ? 'WebAssembly' : 'JavaScript'
  return (
    <Part
      title="The verdict"
      note={
        <p>
          {countOf(draw.entrants, 'entrant')} and {countOf(draw.pickCount, 'pick')}, in {durationWords(milliseconds)},
          hashed in {engine}
        </p>
      }
    >
      <p className="note">
        {printable(draw.title)}, by {printable(draw.organisation)}
      </p>
      {halves.map(({ head, rest }) => (
        <div className="verdict-half" key={head}>
          <h3 className="display">{head}</h3>
          <p className="measure">{rest}</p>
        </div>
      ))}
      <ul className="dashes measure mt-unit-2">
        {others.map(({ rest }) => (
          <li key={rest}>{printable(rest)}</li>
        ))}
      </ul>
      <div className="mt-unit-2">
        <Notice title="What no check can show">
          <ul className="dashes">
            {BEYOND_ANY_CHECK.map((sentence) => (
              <li key={sentence}>{sentence}</li>
            ))}
          </ul>
        </Notice>
      </div>
    </Part>
  )
}

function Failed({ failure, title }: { readonly failure: CheckFailure; readonly title: string }) {
  return (
    <Part title="The verdict">
      <Notice title={`Step ${failure.step} fails: ${title.charAt(0).toLowerCase()}${title.slice(1)}`} fault>
        <FailurePlace failure={failure} />
        {failure.code === 'development-chain' ? (
          <p>This is a demonstration. To check the rest of it, tick “This is a demonstration” and start again.</p>
        ) : null}
        <p>
          The arithmetic does not hold, or cannot be read. Nothing behind this step was looked at. Fetch the archive
          anew and check it again. If it fails in the same place, keep the file and tell the promoter and the witnesses.
        </p>
      </Notice>
    </Part>
  )
}
