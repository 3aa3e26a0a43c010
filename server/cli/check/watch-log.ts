import { readFile, rename, writeFile } from 'node:fs/promises'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { UsageError } from '#server/cli/check/arguments.ts'
import { FetchError } from '#server/cli/check/fetch-archive.ts'
import { decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { fromHex } from '#shared/bytes/hex.ts'
import { type Checkpoint, openCheckpoint, parseCheckpoint } from '#shared/log/checkpoint.ts'
import { compareHeads, isAlarm, type LogChange, logChangeWords, needsProof } from '#shared/log/monitor.ts'
import { formatNote, MAX_NOTE_BYTES } from '#shared/log/signed-note.ts'
import type { CheckState } from '#shared/protocol/check/state.ts'

export interface LogWatchInput {
  /** Where the last checkpoint seen is kept: the signed note, as text. */
  readonly file: string
  /** Scheme, host and port of the site; null where the archive was not fetched from it. */
  readonly site: string | null
  /** The head that lies in the archive, verified; null in archives from before the log. */
  readonly archived: CheckState['log']
  /** The key that signed the archive's seal. */
  readonly publicKey: Uint8Array
  readonly timeout?: number
}

export interface LogWatchOutcome {
  readonly lines: readonly string[]
  /** The log was wound back, or forked, or is another one: the check has failed, and what is remembered stays. */
  readonly alarm: boolean
}

const MAX_ANSWER = 2 ** 16

/**
 * Compares the log with the last checkpoint that a file remembers, and with the archive's own: with the site's help it
 * proves that the log only grew, and remembers the newest. Without the site only equal sizes can be compared. Throws
 * UsageError where the file holds something else, and FetchError where the site does not answer.
 */
export async function watchLog(input: LogWatchInput): Promise<LogWatchOutcome> {
  const remembered = await recall(input.file)
  const older: Known[] = []
  if (remembered) older.push({ ...remembered, what: `The checkpoint in ${input.file}` })
  if (input.archived) {
    const { checkpoint, note } = input.archived.head
    older.push({ checkpoint, note: formatNote(note), what: 'The checkpoint in the archive' })
  }
  return input.site === null ? withoutSite(input.file, remembered, older) : withSite(input, input.site, older)
}

interface Known {
  readonly checkpoint: Checkpoint
  readonly note: string
  readonly what: string
}

async function withSite(input: LogWatchInput, site: string, older: readonly Known[]): Promise<LogWatchOutcome> {
  const note = decodeUtf8(await get(`${site}/log/checkpoint.txt`, input.timeout))
  const opened = openCheckpoint(sha256, utf8(note ?? ''), { publicKeys: [input.publicKey] })
  if (note === null || !opened.ok) {
    const why = opened.ok ? 'It is not text.' : opened.error.message
    return { lines: [`The site's newest checkpoint is not signed by the key of this archive. ${why}`], alarm: true }
  }
  const now = opened.value.checkpoint
  const lines: string[] = []
  let alarm = false
  for (const { checkpoint, what } of older) {
    const proof = needsProof(checkpoint, now) ? await proofBetween(site, checkpoint, now, input.timeout) : null
    const change = compareHeads(sha256, checkpoint, now, proof)
    lines.push(`${what}: ${changeWords(change)}`)
    alarm ||= isFault(change)
  }
  if (older.length === 0) lines.push(logChangeWords({ kind: 'first', now }))
  if (!alarm) {
    await remember(input.file, note)
    lines.push(`${input.file} remembers the checkpoint of ${now.size} entries from now on.`)
  }
  return { lines, alarm }
}

async function withoutSite(
  file: string,
  remembered: { readonly checkpoint: Checkpoint } | null,
  older: readonly Known[],
): Promise<LogWatchOutcome> {
  const archived = older.at(-1)
  if (!archived || archived.checkpoint === remembered?.checkpoint) {
    return { lines: ['The archive has no checkpoint of the log, so there is nothing to compare.'], alarm: false }
  }
  if (!remembered) {
    await remember(file, archived.note)
    const { size } = archived.checkpoint
    return { lines: [`${file} remembers the archive's checkpoint of ${size} entries from now on.`], alarm: false }
  }
  const [before, now] = [remembered.checkpoint, archived.checkpoint]
  if (before.origin === now.origin && before.size !== now.size) {
    const words =
      `The archive's checkpoint has ${now.size} entries, and ${file} remembers ${before.size}. ` +
      'Only the site can prove that one is the beginning of the other: give its draw page with --url.'
    return { lines: [words], alarm: false }
  }
  const change = compareHeads(sha256, before, now, null)
  return { lines: [changeWords(change)], alarm: isFault(change) }
}

/** Another log in the place of the one remembered is no alarm of a log, but nothing that a check may pass over. */
const isFault = (change: LogChange): boolean => isAlarm(change) || change.kind === 'other-log'

const changeWords = (change: LogChange): string => {
  const named = change.kind === 'rewound' || change.kind === 'forked' ? ` [log-${change.kind}]` : ''
  return `${logChangeWords(change)}${named}`
}

/** The consistency proof; null where the site says that there is none, or gives something else. */
async function proofBetween(
  site: string,
  before: Checkpoint,
  now: Checkpoint,
  timeout?: number,
): Promise<readonly Uint8Array[] | null> {
  const address = `${site}/api/v1/log/consistency?first=${before.size}&second=${now.size}`
  const bytes = await get(address, timeout, [404])
  if (bytes.length === 0) return null
  try {
    const { path } = JSON.parse(decodeUtf8(bytes) ?? '') as { path?: unknown }
    if (!Array.isArray(path)) return null
    const hashes = path.map((hash) => (typeof hash === 'string' ? fromHex(hash, 32) : null))
    return hashes.every((hash) => hash !== null) ? hashes : null
  } catch {
    return null
  }
}

/** A short answer; empty for a status that is taken for "no". Throws FetchError. */
async function get(address: string, timeout = 30_000, no: readonly number[] = []): Promise<Uint8Array> {
  try {
    const response = await fetch(address, { signal: AbortSignal.timeout(timeout), redirect: 'error' })
    if (no.includes(response.status)) return new Uint8Array(0)
    if (!response.ok) throw new FetchError(`${address} answered with status ${response.status}.`)
    const bytes = new Uint8Array(await response.arrayBuffer())
    if (bytes.length > Math.max(MAX_ANSWER, MAX_NOTE_BYTES)) throw new FetchError(`${address} is far too long.`)
    return bytes
  } catch (error) {
    if (error instanceof FetchError) throw error
    throw new FetchError(`${address} could not be fetched, so the log was not compared.`)
  }
}

/** What a file remembers; null where there is none yet. */
async function recall(file: string): Promise<{ readonly checkpoint: Checkpoint; readonly note: string } | null> {
  const bytes = await readFile(file).catch((error: NodeJS.ErrnoException) => {
    if (error.code === 'ENOENT') return null
    throw new UsageError(`--remember: ${file} cannot be read.`)
  })
  if (bytes === null) return null
  const parsed = parseCheckpoint(new Uint8Array(bytes))
  if (!parsed.ok) throw new UsageError(`--remember: ${file} holds no checkpoint of a log. ${parsed.error.message}`)
  return { checkpoint: parsed.value.checkpoint, note: formatNote(parsed.value.note) }
}

/** In one step, so that a run that breaks off leaves the old one or the new one. */
async function remember(file: string, note: string): Promise<void> {
  const beside = `${file}.new`
  try {
    await writeFile(beside, note)
    await rename(beside, file)
  } catch {
    throw new UsageError(`--remember: ${file} cannot be written.`)
  }
}
