import type { ArchiveErrorCode } from '#shared/archive/archive-error.ts'
import type { SumsCode } from '#shared/archive/sums.ts'
import type { Failure, Result } from '#shared/bytes/result.ts'
import type { CheckpointCode } from '#shared/log/checkpoint.ts'
import type { LogProofCode } from '#shared/log/log-proof.ts'
import type { BeaconCode } from '#shared/protocol/beacon.ts'
import type { EntriesCode } from '#shared/protocol/entries-csv.ts'
import type { LabelsCode } from '#shared/protocol/labels.ts'
import type { ReceiptCode, ReceiptShapeCode } from '#shared/protocol/receipt.ts'
import type { ResultCode, ResultShapeCode } from '#shared/protocol/result.ts'
import type { SealCode } from '#shared/protocol/seal.ts'
import type { TossesCode } from '#shared/protocol/tosses.ts'
import type { TimestampCode } from '#shared/timestamp/verify-timestamp.ts'

/** The steps of PROTOCOL section 11, in their order. */
export const STEP_TITLES = {
  1: 'The archive and its members',
  2: 'The signatures and the key',
  3: 'The seal and the terms',
  4: 'The sealed list',
  5: 'The result',
  6: 'The seed',
  7: 'The beacon',
  8: 'The tosses',
  9: 'Every coin of every pick',
  10: 'Labels and commitments',
  11: "The transcript's digest",
  12: 'Receipts, short proofs and later members',
} as const

export type StepNumber = keyof typeof STEP_TITLES

/** Why a step does not hold, beyond what the records themselves can be refused for. */
export type StepCode =
  | 'member-too-long'
  | 'sum-missing'
  | 'sum-without-member'
  | 'sum-mismatch'
  | 'key-malformed'
  | 'key-unsound'
  | 'key-not-the-seals'
  | 'key-not-the-expected'
  | 'signature-length'
  | 'seal-signature'
  | 'result-signature'
  | 'terms-mismatch'
  | 'terms-malformed'
  | 'count-mismatch'
  | 'commitment-twice'
  | 'root-mismatch'
  | 'seed-mismatch'
  | 'line-missing'
  | 'line-wrong'
  | 'coin-wrong'
  | 'leaf-wrong'
  | 'tickets-wrong'
  | 'commitment-mismatch'
  | 'transcript-mismatch'
  | 'replaced-chain'
  | 'replaced-signature'
  | 'replaced-counts'

/** Every reason for which a check can fail: a closed list. */
export type CheckCode =
  | StepCode
  | ArchiveErrorCode
  | SumsCode
  | SealCode
  | EntriesCode
  | ResultShapeCode
  | ResultCode
  | BeaconCode
  | TossesCode
  | LabelsCode
  | ReceiptShapeCode
  | ReceiptCode
  | CheckpointCode
  | LogProofCode
  | TimestampCode

/** The first thing that fails, and where. `at` begins with the member's name; it may hold text out of the archive. */
export interface CheckFailure {
  readonly step: StepNumber
  readonly code: CheckCode
  readonly at: string
  readonly message: string
}

/** Thrown inside a step; the check turns it into a CheckFailure with the step's number. */
export class StepFailure extends Error {
  readonly code: CheckCode
  readonly at: string

  constructor(code: CheckCode, at: string, message: string) {
    super(message)
    this.name = 'StepFailure'
    this.code = code
    this.at = at
  }
}

/** The value of a result, or a StepFailure at its place inside `member`. */
export function need<T>(result: Result<T, Failure<CheckCode>>, member: string): T {
  if (result.ok) return result.value
  const { code, at, message } = result.error
  throw new StepFailure(code, `${member} ${at}`.trimEnd(), message)
}
