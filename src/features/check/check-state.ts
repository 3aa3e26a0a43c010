import { type CheckFailure, STEP_TITLES } from '#shared/protocol/check/failure.ts'
import type { StepFacts } from '#shared/protocol/check/step-facts.ts'
import type { CheckVerdict } from '#shared/protocol/check/verdict.ts'
import type { CoinLine } from '#shared/schemas/api/public.ts'
import type { CheckedDraw, FromWorker, PickRow, ReceiptFinding } from './messages.ts'
import type { LogWatch } from './worker/watch-log.ts'

export interface Progress {
  readonly done: number
  /** Null where it is not known. */
  readonly total: number | null
}

export type StepState = 'waiting' | 'running' | 'holds' | 'fails' | 'left'

export interface StepView {
  readonly step: number
  readonly title: string
  /** `left`: the check ended before it. */
  readonly state: StepState
  readonly progress: Progress | null
  readonly found: string | null
  readonly facts: StepFacts | null
  readonly milliseconds: number | null
}

export interface ReceiptView {
  readonly id: number
  readonly name: string
  /** Null while it waits for the archive, `unexamined` where no archive held. */
  readonly finding: ReceiptFinding | 'unexamined' | null
}

export type Phase = 'ready' | 'running' | 'held' | 'failed' | 'stopped' | 'cancelled'

/** A check as the page shows it. */
export interface CheckView {
  readonly phase: Phase
  /** The download, where there is one. */
  readonly fetched: Progress | null
  readonly steps: readonly StepView[]
  readonly failure: CheckFailure | null
  readonly held: { readonly verdict: CheckVerdict; readonly draw: CheckedDraw } | null
  /** What became of the site's log; null until it was asked. */
  readonly log: LogWatch | null
  /** What went wrong without being the archive's fault. */
  readonly trouble: string | null
  readonly milliseconds: number | null
  readonly receipts: readonly ReceiptView[]
  readonly picks: readonly PickRow[]
  /** The pick whose walk was asked for, and its coins once they are there. */
  readonly walk: { readonly pick: number; readonly coins: readonly CoinLine[] | null } | null
}

export type CheckAction =
  | { readonly kind: 'begun'; readonly download: boolean }
  | { readonly kind: 'cancelled' }
  | { readonly kind: 'receipt-given'; readonly id: number; readonly name: string }
  | { readonly kind: 'walk-asked'; readonly pick: number }
  | FromWorker

/** Nothing has run yet: the steps stand there and say what they will do. */
export const READY: CheckView = {
  phase: 'ready',
  fetched: null,
  steps: Object.entries(STEP_TITLES).map(([step, title]) => ({
    step: Number(step),
    title,
    state: 'waiting',
    progress: null,
    found: null,
    facts: null,
    milliseconds: null,
  })),
  failure: null,
  held: null,
  log: null,
  trouble: null,
  milliseconds: null,
  receipts: [],
  picks: [],
  walk: null,
}

export function checkReducer(view: CheckView, action: CheckAction): CheckView {
  switch (action.kind) {
    case 'begun': {
      const receipts = view.receipts.map((receipt) => ({ ...receipt, finding: null }))
      const fetched = action.download ? { done: 0, total: null } : null
      return { ...READY, phase: 'running', fetched, receipts }
    }
    case 'cancelled':
      return ended(view, 'cancelled')
    case 'receipt-given': {
      const waits = view.phase === 'ready' || view.phase === 'running' || view.phase === 'held'
      const receipt = { id: action.id, name: action.name, finding: waits ? null : ('unexamined' as const) }
      return { ...view, receipts: [...view.receipts, receipt] }
    }
    case 'walk-asked':
      return { ...view, walk: { pick: action.pick, coins: null } }
    case 'fetched':
      return { ...view, fetched: { done: action.done, total: action.total } }
    case 'event':
      return { ...view, steps: afterEvent(view.steps, action.event) }
    case 'held':
      return {
        ...view,
        phase: 'held',
        held: { verdict: action.verdict, draw: action.draw },
        milliseconds: action.milliseconds,
      }
    case 'failed':
      return { ...ended(view, 'failed'), failure: action.failure, milliseconds: action.milliseconds }
    case 'stopped':
      // After a verdict it is only a question that could not be answered.
      if (view.phase === 'held') return { ...view, trouble: action.reason, walk: view.walk?.coins ? view.walk : null }
      return { ...ended(view, 'stopped'), trouble: action.reason }
    case 'log':
      return { ...view, log: action.watch }
    case 'receipt': {
      const found = (receipt: ReceiptView) =>
        receipt.id === action.id ? { ...receipt, finding: action.finding } : receipt
      return { ...view, receipts: view.receipts.map(found) }
    }
    case 'picks':
      // The same page asked for twice is shown once.
      return { ...view, picks: [...view.picks.slice(0, action.from), ...action.rows] }
    case 'walk':
      return view.walk?.pick === action.pick ? { ...view, walk: { pick: action.pick, coins: action.coins } } : view
  }
}

type Event = Extract<FromWorker, { readonly kind: 'event' }>['event']

function afterEvent(steps: readonly StepView[], event: Event): readonly StepView[] {
  return steps.map((step) => (step.step === event.step ? { ...step, ...changes(event) } : step))
}

function changes(event: Event): Partial<StepView> {
  switch (event.kind) {
    case 'step-started':
      return { state: 'running' }
    case 'progress':
      return { progress: { done: event.done, total: event.total } }
    case 'step-passed':
      return {
        state: 'holds',
        found: event.found,
        facts: event.facts,
        milliseconds: event.milliseconds,
        progress: null,
      }
    case 'step-failed':
      return { state: 'fails', facts: event.facts, milliseconds: event.milliseconds, progress: null }
  }
}

/** A check without a verdict: what has not run is left, and no receipt can be held against anything. */
function ended(view: CheckView, phase: 'failed' | 'stopped' | 'cancelled'): CheckView {
  return {
    ...view,
    phase,
    steps: view.steps.map((step) =>
      step.state === 'waiting' || step.state === 'running' ? { ...step, state: 'left', progress: null } : step,
    ),
    receipts: view.receipts.map((receipt) => ({ ...receipt, finding: receipt.finding ?? 'unexamined' })),
  }
}

/** How far a running check has come, from 0 to 1: the steps by their number, and within one by its own count. */
export function shareDone(steps: readonly StepView[]): number {
  const share = steps.reduce((sum, { state, progress }) => {
    if (state === 'holds') return sum + 1
    if (state === 'running' && progress?.total) return sum + Math.min(1, progress.done / progress.total)
    return sum
  }, 0)
  return steps.length === 0 ? 0 : share / steps.length
}
