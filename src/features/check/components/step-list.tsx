import type { CheckFailure } from '#shared/protocol/check/failure.ts'
import type { StepFact } from '#shared/protocol/check/step-facts.ts'
import { digestGroups } from '#src/ui/digest.tsx'
import { formatNumber } from '#src/ui/format-number.ts'
import type { StepState, StepView } from '../check-state.ts'
import { durationWords, printable, stateWords, stepWords } from '../words.ts'

interface StepListProps {
  readonly steps: readonly StepView[]
  readonly failure: CheckFailure | null
  /** Before the first run the steps only say what they do. */
  readonly plain: boolean
}

/** The steps in their order: what each does, how it went, and, opened, what it worked on. */
export function StepList({ steps, failure, plain }: StepListProps) {
  return (
    <ol className="check-steps">
      {steps.map((step) => (
        <li key={step.step} className={step.state}>
          <p className="step-state">{plain ? null : <StepMark state={step.state} />}</p>
          <div>
            <h3>
              {step.step}. {step.title}
            </h3>
            <p className="measure">{stepWords(step.step)}</p>
            {step.state === 'running' ? <StepProgress step={step} /> : null}
            {failure && failure.step === step.step ? <FailurePlace failure={failure} /> : null}
            <StepFigures step={step} />
          </div>
        </li>
      ))}
    </ol>
  )
}

const OUTLINE = 'M2 3.5h20v3.2a2.4 2.4 0 0 0 0 4.6v3.2H2v-3.2a2.4 2.4 0 0 0 0-4.6z'

function StepMark({ state }: { readonly state: StepState }) {
  return (
    <span className="state">
      <svg viewBox="0 0 24 18" width="27" height="20" aria-hidden="true">
        <path
          d={OUTLINE}
          className={state === 'holds' ? 'fill' : undefined}
          strokeDasharray={state === 'waiting' || state === 'left' ? '2.6 2.2' : undefined}
        />
        {state === 'running' ? <path className="fill" d="M2 3.5h10v11H2v-3.2a2.4 2.4 0 0 0 0-4.6z" /> : null}
        {state === 'fails' ? <path d="M8.6 5.6l6.8 6.8M15.4 5.6l-6.8 6.8" /> : null}
      </svg>
      {stateWords(state)}
    </span>
  )
}

function StepProgress({ step }: { readonly step: StepView }) {
  const { progress } = step
  const known = progress !== null && progress.total !== null && progress.total > 0
  return (
    <progress
      className="check-progress"
      aria-label={`Step ${step.step}: ${step.title}`}
      {...(known ? { value: progress.done, max: progress.total ?? 1 } : {})}
    />
  )
}

export function FailurePlace({ failure }: { readonly failure: CheckFailure }) {
  return (
    <div className="failure-place">
      <p>{printable(failure.message)}</p>
      <p className="note">
        Where: <code>{printable(failure.at)}</code>
        <br />
        Code: <code>{failure.code}</code>
      </p>
    </div>
  )
}

function StepFigures({ step }: { readonly step: StepView }) {
  const { facts, found, milliseconds } = step
  if (facts === null) return null
  return (
    <details className="fold step-figures">
      <summary>
        Its figures<span className="vh"> of step {step.step}</span>
      </summary>
      {found ? <p className="measure">{printable(found)}</p> : null}
      <FactList title="What went in" facts={facts.inputs} />
      <FactList title="What came out" facts={facts.outputs} />
      {milliseconds === null ? null : <p className="note">It took {durationWords(milliseconds)}.</p>}
    </details>
  )
}

function FactList({ title, facts }: { readonly title: string; readonly facts: readonly StepFact[] }) {
  if (facts.length === 0) return null
  return (
    <>
      <h4>{title}</h4>
      <dl className="step-facts">
        {facts.map(({ name, value }, index) => (
          <div key={index}>
            <dt>{printable(name)}</dt>
            <dd>{factValue(value)}</dd>
          </div>
        ))}
      </dl>
    </>
  )
}

function factValue(value: string | number) {
  if (typeof value === 'number') return formatNumber(value)
  if (/^[0-9a-f]{32,}$/.test(value)) return <span className="hex fine">{digestGroups(value).join(' ')}</span>
  return printable(value)
}
