import type { CheckEvent } from '#shared/protocol/check/check-archive.ts'
import type { CheckFailure } from '#shared/protocol/check/failure.ts'
import type { GivenReceipt } from '#shared/protocol/check/state.ts'
import type { CheckVerdict } from '#shared/protocol/check/verdict.ts'
import type { Award, CoinLine } from '#shared/schemas/api/public.ts'
import type { HashEngine } from './worker/fast-tools.ts'
import type { LogWatch } from './worker/watch-log.ts'

/** What to check: bytes that the page has, or an address of this site. */
export type GivenArchive =
  | { readonly kind: 'file'; readonly blob: Blob }
  | { readonly kind: 'address'; readonly url: string }

export interface StartOptions {
  /** Lets the development chain and the development authority's timestamps pass, whose secrets are public. */
  readonly allowDevelopment: boolean
  /** Texts with certificates, in PEM, of timestamp authorities that the reader trusts; each with its file's name. */
  readonly authorities: readonly { readonly name: string; readonly pem: string }[]
  /** Keys of outside witnesses of the log that the reader trusts, as C2SP signed-note writes them. */
  readonly witnesses: readonly string[]
  /** 64 lower-case hex digits, or null where there is nothing to compare with. */
  readonly expectedKey: string | null
  /** Whether the site's log is to be asked, and the note of it that this browser remembers. */
  readonly log: { readonly remembered: string | null } | null
}

/** From the page to the worker. `start` comes once, first; the rest is answered after a check that holds. */
export type ToWorker =
  | { readonly kind: 'start'; readonly archive: GivenArchive; readonly options: StartOptions }
  | { readonly kind: 'receipt'; readonly id: number; readonly receipt: GivenReceipt }
  | { readonly kind: 'picks'; readonly from: number }
  | { readonly kind: 'walk'; readonly pick: number }

/** A pick of the checked result, in the order of the draw. */
export interface PickRow {
  readonly pick: number
  readonly award: Award
  readonly leaf: number
  /** The words that announce the entrant; null where they are not open. */
  readonly label: string | null
  /** All tickets in before this pick. */
  readonly remaining: number
}

/** A receipt or short proof held against the checked seal. */
export type ReceiptFinding =
  | { readonly ok: true; readonly found: string }
  | { readonly ok: false; readonly at: string; readonly message: string; readonly code: string }

/** What the page shows of an archive that holds. */
export interface CheckedDraw {
  readonly title: string
  readonly organisation: string
  readonly drawnAt: string
  readonly entrants: number
  readonly tickets: number
  readonly pickCount: number
  readonly engine: HashEngine
}

/** From the worker to the page. */
export type FromWorker =
  | { readonly kind: 'fetched'; readonly done: number; readonly total: number | null }
  | { readonly kind: 'event'; readonly event: CheckEvent }
  | { readonly kind: 'held'; readonly verdict: CheckVerdict; readonly draw: CheckedDraw; readonly milliseconds: number }
  | { readonly kind: 'failed'; readonly failure: CheckFailure; readonly milliseconds: number }
  /** Something went wrong that says nothing about the archive. */
  | { readonly kind: 'stopped'; readonly reason: string }
  /** What became of the log, after a check that held. */
  | { readonly kind: 'log'; readonly watch: LogWatch }
  | { readonly kind: 'receipt'; readonly id: number; readonly finding: ReceiptFinding }
  | { readonly kind: 'picks'; readonly from: number; readonly rows: readonly PickRow[] }
  | { readonly kind: 'walk'; readonly pick: number; readonly coins: readonly CoinLine[] }
