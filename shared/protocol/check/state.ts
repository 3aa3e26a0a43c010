import { ArchiveError } from '#shared/archive/archive-error.ts'
import { type MembersSource, readMember } from '#shared/archive/members-source.ts'
import type { ReadEntries } from '#shared/protocol/check/entries-reader.ts'
import type { CheckTools } from '#shared/protocol/check/tools.ts'
import { StepFailure } from '#shared/protocol/check/failure.ts'
import type { CheckpointNote } from '#shared/log/checkpoint.ts'
import type { ProvenEntry } from '#shared/log/log-proof.ts'
import type { NoteKey } from '#shared/log/signed-note.ts'
import type { Shower } from '#shared/protocol/check/time-members.ts'
import type { DrawResult } from '#shared/protocol/result.ts'
import type { Seal } from '#shared/protocol/seal-types.ts'
import type { Certificate } from '#shared/timestamp/certificate.ts'

/** A receipt or short proof to be checked against the archive; `name` is for the report only. */
export interface GivenReceipt {
  readonly name: string
  readonly bytes: Uint8Array
}

/** Stops a check from outside; an AbortSignal is one. */
export interface CancelSignal {
  readonly aborted: boolean
}

export interface CheckOptions {
  /** Lets the development chain pass, whose secret is public; the verdict then says so. */
  readonly allowDevelopmentChain?: boolean
  /** The fingerprint that the site publishes, 64 lower-case hex digits. */
  readonly expectedKey?: string
  readonly receipts?: readonly GivenReceipt[]
  /** Certificates of timestamp authorities, or of those who issued theirs, that the checker trusts. */
  readonly trustedAuthorities?: readonly Certificate[]
  /** Lets the development authority vouch for a timestamp, whose key is public; the verdict then says so. */
  readonly allowDevelopmentAuthority?: boolean
  /** Keys of outside witnesses of the site's log that the checker trusts, of type 4. */
  readonly witnesses?: readonly NoteKey[]
  readonly signal?: CancelSignal
}

/** The check was stopped from outside: it has no verdict. */
export class CheckCancelled extends Error {
  constructor() {
    super('The check was stopped before its end.')
    this.name = 'CheckCancelled'
  }
}

/** What each step leaves for the later ones. A step reads only what steps before it have set. */
export interface CheckState {
  readonly tools: CheckTools
  readonly options: CheckOptions
  /** Opens the archive; throws ArchiveError. */
  readonly open: () => Promise<MembersSource>
  readonly progress: (done: number, total: number) => void
  source: MembersSource
  /** SHA-256 of each member, in hex, in the archive's order, as far as step 1 has come. */
  digests: ReadonlyMap<string, string>
  publicKey: Uint8Array
  fingerprint: string
  seal: Seal
  sealDigest: Uint8Array
  sealDigestHex: string
  /** The list: read in step 1, where its bytes go by anyway, and sound from step 4 on. */
  entries: ReadEntries
  /** The root to which `entries` leads. */
  entriesRoot: Uint8Array
  result: DrawResult
  beaconRandomness: Uint8Array | null
  tossBits: readonly number[] | null
  /** What all flips are derived from; null where they were tossed. */
  drawKey: Uint8Array | null
  walked: { readonly picks: number; readonly coins: number; readonly flips: number }
  transcriptDigest: string
  /** The head of the site's log and the entry in it that sealed the draw, where the archive has them: from step 12 on. */
  log: { readonly head: CheckpointNote; readonly sealed: ProvenEntry } | null
  /** Who, other than the site, saw the seal in time; and why others in the archive do not show it. From step 12 on. */
  shownBy: Shower[]
  notShown: string[]
  /** Winning leaves whose label is not open. */
  withheld: readonly number[]
  /** What the archive or the folder holds and this version does not read. */
  notExamined: readonly string[]
}

/** One step: throws StepFailure or ArchiveError where it does not hold; returns what it found, in a sentence. */
export type CheckStep = (state: CheckState) => string | Promise<string>

/** Longest members, in bytes, that are read into memory whole. The rest of the archive's 1 GiB is entries and coins. */
export const MEMBER_LIMITS = {
  SHA256SUMS: 2 ** 20,
  'seal.json': 2 ** 26,
  'seal.sig': 64,
  'terms.txt': 2 ** 24,
  'result.json': 2 ** 26,
  'result.sig': 64,
  'labels.jsonl': 2 ** 26,
  'site-key.pem': 2 ** 12,
  'checkpoint.txt': 2 ** 18,
  'log-proof.json': 2 ** 24,
  'witnessed.txt': 2 ** 18,
  'witnessed-proof.json': 2 ** 16,
  'seal.tsr': 2 ** 16,
  'replaced.json': 2 ** 18,
} as const

/** A whole member; fails where it passes its limit. */
export async function memberBytes(state: CheckState, name: keyof typeof MEMBER_LIMITS): Promise<Uint8Array> {
  const bytes = await readMember(state.source, name, MEMBER_LIMITS[name])
  if (bytes !== null) return bytes
  throw new StepFailure('member-too-long', name, `${name} is longer than the ${MEMBER_LIMITS[name]} bytes it may have.`)
}

/** Throws where the check was stopped. */
export function throwIfCancelled(state: CheckState): void {
  if (state.options.signal?.aborted) throw new CheckCancelled()
}

/** An ArchiveError as the failure of the step in which it came up. */
export function asStepFailure(error: unknown): StepFailure | null {
  if (error instanceof StepFailure) return error
  if (error instanceof ArchiveError) return new StepFailure(error.code, error.member ?? 'the archive', error.message)
  return null
}
