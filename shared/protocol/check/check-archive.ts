import type { MembersSource } from '#shared/archive/members-source.ts'
import { checkMembers } from '#shared/protocol/check/archive-step.ts'
import { checkEntries } from '#shared/protocol/check/entries-step.ts'
import { type CheckFailure, STEP_TITLES, type StepNumber } from '#shared/protocol/check/failure.ts'
import { checkLabelsAndCommitments } from '#shared/protocol/check/labels-step.ts'
import { checkReceipts } from '#shared/protocol/check/receipts-step.ts'
import { checkResult } from '#shared/protocol/check/result-step.ts'
import { checkSeal } from '#shared/protocol/check/seal-step.ts'
import { checkSignatures } from '#shared/protocol/check/signatures-step.ts'
import { checkBeacon, checkSeed, checkTossRounds } from '#shared/protocol/check/sources-steps.ts'
import {
  asStepFailure,
  type CheckOptions,
  type CheckState,
  type CheckStep,
  throwIfCancelled,
} from '#shared/protocol/check/state.ts'
import type { CheckTools } from '#shared/protocol/check/tools.ts'
import { stepFacts, type StepFacts } from '#shared/protocol/check/step-facts.ts'
import { checkTranscriptDigest } from '#shared/protocol/check/transcript-step.ts'
import { type CheckVerdict, verdictOf } from '#shared/protocol/check/verdict.ts'
import { checkWalks } from '#shared/protocol/check/walks-step.ts'
import type { DrawResult } from '#shared/protocol/result.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'

const STEPS: Readonly<Record<StepNumber, CheckStep>> = {
  1: checkMembers,
  2: checkSignatures,
  3: checkSeal,
  4: checkEntries,
  5: checkResult,
  6: checkSeed,
  7: checkBeacon,
  8: checkTossRounds,
  9: checkWalks,
  10: checkLabelsAndCommitments,
  11: checkTranscriptDigest,
  12: checkReceipts,
}
const ORDER = Object.keys(STEPS).map((step) => Number(step) as StepNumber)

/** What a check tells while it runs. `done` and `total` are bytes or picks. Times in milliseconds. */
export type CheckEvent =
  | { readonly kind: 'step-started'; readonly step: StepNumber; readonly title: string }
  | { readonly kind: 'progress'; readonly step: StepNumber; readonly done: number; readonly total: number }
  | {
      readonly kind: 'step-passed'
      readonly step: StepNumber
      readonly title: string
      readonly found: string
      readonly facts: StepFacts
      readonly milliseconds: number
    }
  | {
      readonly kind: 'step-failed'
      readonly step: StepNumber
      readonly title: string
      readonly failure: CheckFailure
      readonly facts: StepFacts
      readonly milliseconds: number
    }

/** How a check ended. On success also the records it read, for whoever wants to show them. */
export type CheckReport =
  | {
      readonly ok: true
      readonly verdict: CheckVerdict
      readonly seal: Seal
      readonly result: DrawResult
      /** The raw key that signed both. */
      readonly publicKey: Uint8Array
      readonly log: CheckState['log']
    }
  | { readonly ok: false; readonly failure: CheckFailure }

export interface CheckInput {
  /** Opens the archive: a zip, a folder, memory. Its ArchiveErrors are failures of step 1. */
  readonly open: () => Promise<MembersSource>
  readonly tools: CheckTools
  readonly options?: CheckOptions
  readonly onEvent?: (event: CheckEvent) => void
}

/**
 * Checks a proof archive: PROTOCOL section 11, step by step, up to the first that fails. Everything in the archive is
 * hostile input. Throws CheckCancelled when stopped, and whatever the machine throws (a file that cannot be read); what
 * is wrong with the archive never throws.
 */
export async function checkArchive(input: CheckInput): Promise<CheckReport> {
  const { tools, options = {}, onEvent = () => {} } = input
  let current: StepNumber = 1
  // The steps fill the rest in, in their order.
  const state = {
    tools,
    options,
    open: input.open,
    progress: (done: number, total: number) => onEvent({ kind: 'progress', step: current, done, total }),
  } as CheckState
  for (const step of ORDER) {
    throwIfCancelled(state)
    current = step
    const title = STEP_TITLES[step]
    onEvent({ kind: 'step-started', step, title })
    const started = tools.now()
    try {
      const found = await STEPS[step](state)
      const milliseconds = tools.now() - started
      onEvent({ kind: 'step-passed', step, title, found, facts: stepFacts(step, state), milliseconds })
    } catch (error) {
      const reason = asStepFailure(error)
      if (reason === null) throw error
      const failure = { step, code: reason.code, at: reason.at, message: reason.message }
      const milliseconds = tools.now() - started
      onEvent({ kind: 'step-failed', step, title, failure, facts: stepFacts(step, state), milliseconds })
      return { ok: false, failure }
    }
  }
  const { seal, result, publicKey, log } = state
  return { ok: true, verdict: verdictOf(state), seal, result, publicKey, log }
}
