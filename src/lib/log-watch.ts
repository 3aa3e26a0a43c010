import { sha256 } from '@noble/hashes/sha2.js'
import { utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { type Checkpoint, openCheckpoint, parseCheckpoint } from '#shared/log/checkpoint.ts'
import { entryIsIn } from '#shared/log/log-proof.ts'
import { compareHeads, isAlarm, logChangeWords, needsProof } from '#shared/log/monitor.ts'
import { keyFingerprint } from '#shared/protocol/signature.ts'
import { getLogCheckpointV1, getLogConsistencyV1, type DrawLog, type LogHead } from '#shared/schemas/api/log.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { LOG_MEMORY } from './log-memory.ts'
import { problemOf } from './problem-of.ts'

/** What this browser found out about the site's log, in whole sentences. */
export type LogWatch =
  | { readonly kind: 'sound'; readonly size: number; readonly words: string }
  | {
      readonly kind: 'alarm'
      readonly title: string
      readonly words: string
      /** The signed checkpoints that do not go together, as text: the older one first. */
      readonly evidence: readonly string[]
    }
  /** The site did not answer, so nothing was found out. */
  | { readonly kind: 'unknown'; readonly words: string }

/** What is kept between visits: the part of `localStorage` that is used here. */
export type Memory = Pick<Storage, 'getItem' | 'setItem'>

export interface Watched {
  readonly head: LogHead
  readonly entries: DrawLog['entries']
}

/**
 * Verifies a head of the log and the entries that came with it, compares the head with the last one that this browser
 * remembers, asking the site for the proof between the two, and remembers it unless that is an alarm.
 */
export async function watchLog(api: ApiClient, { head, entries }: Watched, memory: Memory | null): Promise<LogWatch> {
  const opened = open(head)
  if (opened === null) return unsound('Its checkpoint is not signed by the key that the site shows.', [head.note])
  const untrue = entries.find(
    ({ index, leaf, path }) =>
      !entryIsIn(sha256, { index, text: leaf, path: path.map((h) => hexBytes(h, 32)) }, opened),
  )
  if (untrue) return unsound(`Entry ${untrue.index} does not lead to the root of the checkpoint.`, [head.note])
  try {
    return await compare(api, { checkpoint: opened, note: head.note }, memory)
  } catch (error) {
    if (problemOf(error) === null) throw error
    return {
      kind: 'unknown',
      words: 'The site did not give what is needed to compare its log with what was seen before.',
    }
  }
}

interface Seen {
  readonly checkpoint: Checkpoint
  readonly note: string
}

async function compare(api: ApiClient, shown: Seen, memory: Memory | null): Promise<LogWatch> {
  const before = recall(memory)
  // This page may be older than the last one seen, from another tab or the browser's own store: ask how things stand.
  const now = before && shown.checkpoint.size < before.checkpoint.size ? await fresh(api) : shown
  if (now === null) return unsound('Its newest checkpoint is not signed by the key that the site shows.', [])
  const proof = needsProof(before?.checkpoint ?? null, now.checkpoint) ? await proofOf(api, before, now) : null
  const change = compareHeads(sha256, before?.checkpoint ?? null, now.checkpoint, proof)
  const words = logChangeWords(change)
  if (isAlarm(change)) {
    const title = change.kind === 'rewound' ? 'The log was wound back' : 'The log was forked'
    return { kind: 'alarm', title, words, evidence: before ? [before.note, now.note] : [now.note] }
  }
  remember(memory, now)
  return { kind: 'sound', size: now.checkpoint.size, words }
}

async function fresh(api: ApiClient): Promise<Seen | null> {
  const head = await api.call(getLogCheckpointV1)
  const checkpoint = open(head)
  return checkpoint && { checkpoint, note: head.note }
}

/** The consistency proof; null where the site says that it has none. */
async function proofOf(api: ApiClient, before: Seen | null, now: Seen): Promise<readonly Uint8Array[] | null> {
  try {
    const query = { first: before?.checkpoint.size ?? 0, second: now.checkpoint.size }
    const { path } = await api.call(getLogConsistencyV1, { query })
    return path.map((hash) => hexBytes(hash, 32))
  } catch (error) {
    if (problemOf(error)?.status === 404) return null
    throw error
  }
}

/** The checkpoint of a head, if its parts agree and its key signed it; null otherwise. */
function open(head: LogHead): Checkpoint | null {
  const publicKey = hexBytes(head.publicKey, 32)
  if (keyFingerprint(sha256, publicKey) !== head.keyFingerprint) return null
  const opened = openCheckpoint(sha256, utf8(head.note), { publicKeys: [publicKey], origin: head.origin })
  if (!opened.ok) return null
  const { checkpoint } = opened.value
  return checkpoint.size === head.size && toHex(checkpoint.root) === head.root ? checkpoint : null
}

function unsound(words: string, evidence: readonly string[]): LogWatch {
  return { kind: 'alarm', title: 'The log is not sound', words: `${words} Keep a copy of this page.`, evidence }
}

/** The last checkpoint seen; null where there is none, or where the browser keeps nothing. */
function recall(memory: Memory | null): Seen | null {
  try {
    const note = memory?.getItem(LOG_MEMORY) ?? null
    const parsed = note === null ? null : parseCheckpoint(utf8(note))
    return note !== null && parsed?.ok ? { checkpoint: parsed.value.checkpoint, note } : null
  } catch {
    return null
  }
}

function remember(memory: Memory | null, seen: Seen): void {
  // Another tab may have come further meanwhile.
  const last = recall(memory)
  if (last && last.checkpoint.origin === seen.checkpoint.origin && last.checkpoint.size >= seen.checkpoint.size) return
  try {
    memory?.setItem(LOG_MEMORY, seen.note)
  } catch {
    // Full, or forbidden: the next visit compares with what there is.
  }
}
