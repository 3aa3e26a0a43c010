import { utf8 } from '#shared/bytes/bytes.ts'
import { hexBytes, isHex } from '#shared/bytes/hex.ts'
import type { Sha256 } from '#shared/bytes/hashing.ts'
import { type Checkpoint, openCheckpoint, parseCheckpoint } from '#shared/log/checkpoint.ts'
import { compareHeads, isAlarm, logChangeWords, needsProof } from '#shared/log/monitor.ts'

/** What the site's log shows beside the heads of it that are known here. */
export interface LogWatch {
  readonly lines: readonly { readonly words: string; readonly alarm: boolean }[]
  /** The notes to keep where there is an alarm: the older and the newer one, as they are signed. */
  readonly evidence: readonly string[]
  /** The note to remember from now on; null where the one remembered stays. */
  readonly remember: string | null
}

export interface LogParts {
  readonly sha256: Sha256
  /** The raw key that signed the archive's seal. */
  readonly publicKey: Uint8Array
  /** The checkpoint that lies in the archive, verified; null without one. */
  readonly archived: { readonly checkpoint: Checkpoint; readonly note: string } | null
  /** The note that this browser remembers, verified when it was remembered; null without one. */
  readonly remembered: string | null
  readonly request?: typeof fetch
}

/**
 * Fetches the head of the site's log and proves that it holds all of the archive's head and of the one remembered
 * (PROTOCOL section 13). An alarm leaves what is remembered as it is. Never throws.
 */
export async function watchLog(parts: LogParts): Promise<LogWatch> {
  const { sha256, publicKey, archived, remembered, request = fetch } = parts
  const note = await textOf('/log/checkpoint.txt', request)
  if (note === null) {
    return quiet('The site’s log could not be reached, so it was not compared with what was seen of it before.')
  }
  const opened = openCheckpoint(sha256, utf8(note), { publicKeys: [publicKey] })
  if (!opened.ok) {
    return quiet(
      'The log’s newest checkpoint is not signed by the key in this archive. The site may have changed its key since: compare on the page of the log.',
    )
  }
  const now = opened.value.checkpoint
  const before: { readonly checkpoint: Checkpoint; readonly note: string }[] = []
  if (archived) before.push(archived)
  const known = remembered === null ? null : parseCheckpoint(utf8(remembered))
  if (known?.ok && remembered !== null) before.push({ checkpoint: known.value.checkpoint, note: remembered })

  const lines: { words: string; alarm: boolean }[] = []
  const evidence: string[] = []
  let unproven = false
  for (const older of before) {
    const proof = needsProof(older.checkpoint, now) ? await proofBetween(older.checkpoint, now, request) : null
    if (proof === 'unreachable') {
      unproven = true
      lines.push({ words: 'The site gave no proof that its log only grew. Try again in a minute.', alarm: false })
      continue
    }
    const change = compareHeads(sha256, older.checkpoint, now, proof)
    lines.push({ words: logChangeWords(change), alarm: isAlarm(change) })
    if (isAlarm(change)) evidence.push(older.note, note)
  }
  if (before.length === 0) lines.push({ words: logChangeWords({ kind: 'first', now }), alarm: false })
  return { lines, evidence, remember: unproven || evidence.length > 0 ? null : note }
}

const quiet = (words: string): LogWatch => ({ lines: [{ words, alarm: false }], evidence: [], remember: null })

async function textOf(path: string, request: typeof fetch): Promise<string | null> {
  try {
    const response = await request(path, { credentials: 'omit', cache: 'no-store' })
    return response.ok ? await response.text() : null
  } catch {
    return null
  }
}

/** The proof, or null where the site says something that is none; `unreachable` where it says nothing. */
async function proofBetween(
  before: Checkpoint,
  now: Checkpoint,
  request: typeof fetch,
): Promise<readonly Uint8Array[] | null | 'unreachable'> {
  const address = `/api/v1/log/consistency?first=${before.size}&second=${now.size}`
  const response = await request(address, { credentials: 'omit' }).catch(() => null)
  // A site that knows of no proof is no better than one that gives a wrong one.
  if (response?.status === 404) return null
  if (!response?.ok) return 'unreachable'
  try {
    const { path } = (await response.json()) as { path?: unknown }
    if (!Array.isArray(path) || path.length > 64) return null
    return path.every((hash): hash is string => typeof hash === 'string' && isHex(hash, 32))
      ? path.map((hash) => hexBytes(hash, 32))
      : null
  } catch {
    return null
  }
}
