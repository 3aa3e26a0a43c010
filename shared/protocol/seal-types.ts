import type { WalkRule } from '../sampling/walk.ts'

/** A prize as sealed; `quantity` items of it, 1 at least. */
export interface SealPrize {
  readonly id: string
  readonly name: string
  readonly quantity: number
}

/** The public beacon round of a draw. `chain`, `publicKey` in hex; times in seconds. */
export interface Beacon {
  readonly chain: string
  readonly genesisTime: number
  readonly period: number
  readonly publicKey: string
  readonly round: number
  readonly scheme: string
}

/** How a real coin is tossed for a draw. */
export interface TossPlan {
  /** Fair bits that must come out at least. */
  readonly minimumBits: number
  /** Tosses in a round: 8 to 256. */
  readonly roundLength: number
  /** Roles of the witnesses, one at least. */
  readonly witnesses: readonly string[]
}

/** Where a draw's flips come from. */
export interface SealSources {
  readonly beacon: Beacon | null
  readonly flips: 'derived' | 'tossed'
  readonly seedCommit: string | null
  readonly tosses: TossPlan | null
}

/** A seal (PROTOCOL section 3). Digests and keys in lower-case hex, times as the record writes them. */
export interface Seal {
  readonly format: 'evenpenny/1'
  readonly kind: 'seal'
  readonly draw: string
  readonly organisation: { readonly name: string; readonly registration: string | null }
  readonly title: string
  readonly key: string
  readonly terms: string
  readonly sealedAt: string
  readonly drawAt: string
  readonly revealBy: string | null
  readonly entries: { readonly count: number; readonly root: string; readonly tickets: number }
  readonly prizes: readonly SealPrize[]
  readonly reserves: number
  readonly rule: WalkRule
  readonly sources: SealSources
  readonly supersedes: string | null
  readonly reason: string | null
}
