import { openZip } from '#shared/archive/zip-reader.ts'
import { checkArchive, type CheckEvent } from '#shared/protocol/check/check-archive.ts'
import type { FromWorker, GivenArchive, ToWorker } from '../messages.ts'
import { blobSource } from './blob-source.ts'
import { CheckedArchive } from './checked-draw.ts'
import type { BrowserTools } from './fast-tools.ts'
import { FetchError, fetchArchive } from './fetch-archive.ts'
import { inflateInBrowser } from './native-inflate.ts'
import { checkOptions, TrustError } from './trust.ts'

type Post = (message: FromWorker) => void
type Start = Extract<ToWorker, { readonly kind: 'start' }>

/** Milliseconds between two tellings of progress: the page redraws no faster. */
const TELL_EVERY = 80

/**
 * Runs the shared check over an archive and tells the page of each step. Returns the archive, open for questions, where
 * it holds. Never throws: what the machine could not do is told as `stopped`.
 */
export async function runCheck(start: Start, machine: BrowserTools, post: Post): Promise<CheckedArchive | null> {
  const { tools, engine } = machine
  const began = tools.now()
  const telling = seldom(tools.now)
  const { log } = start.options
  try {
    const options = checkOptions(tools.sha256, start.options)
    const blob = await blobOf(start.archive, (done, total) => {
      if (done === total || telling()) post({ kind: 'fetched', done, total })
    })
    const open = () => openZip(blobSource(blob), { inflate: inflateInBrowser })
    const report = await checkArchive({
      open,
      tools,
      options,
      onEvent: (event) => {
        if (!isMidway(event) || telling()) post({ kind: 'event', event })
      },
    })
    const milliseconds = tools.now() - began
    if (!report.ok) {
      post({ kind: 'failed', failure: report.failure, milliseconds })
      return null
    }
    const checked = new CheckedArchive(report, open, tools)
    post({ kind: 'held', verdict: report.verdict, draw: checked.summary(engine), milliseconds })
    // Beside the questions, which need not wait for the network.
    if (log !== null) {
      void checked.watchLog(log.remembered).then(
        (watch) => post({ kind: 'log', watch }),
        (error) => post({ kind: 'stopped', reason: reasonOf(error) }),
      )
    }
    return checked
  } catch (error) {
    post({ kind: 'stopped', reason: reasonOf(error) })
    return null
  }
}

/** Answers a question about an archive that has held. Never throws. */
export async function answer(
  checked: CheckedArchive,
  asked: Exclude<ToWorker, { readonly kind: 'start' }>,
  post: Post,
): Promise<void> {
  try {
    switch (asked.kind) {
      case 'receipt':
        return post({ kind: 'receipt', id: asked.id, finding: checked.receipt(asked.receipt) })
      case 'picks':
        return post({ kind: 'picks', from: asked.from, rows: await checked.picks(asked.from) })
      case 'walk':
        return post({ kind: 'walk', pick: asked.pick, coins: await checked.walk(asked.pick) })
    }
  } catch (error) {
    post({ kind: 'stopped', reason: reasonOf(error) })
  }
}

function blobOf(archive: GivenArchive, tell: (done: number, total: number | null) => void): Promise<Blob> {
  return archive.kind === 'file' ? Promise.resolve(archive.blob) : fetchArchive(archive.url, tell)
}

const isMidway = (event: CheckEvent) => event.kind === 'progress' && event.done < event.total

/** True at most once in so many milliseconds. */
function seldom(now: () => number): () => boolean {
  let told = Number.NEGATIVE_INFINITY
  return () => {
    const at = now()
    if (at - told < TELL_EVERY) return false
    told = at
    return true
  }
}

function reasonOf(error: unknown): string {
  if (error instanceof FetchError || error instanceof TrustError) return error.message
  const name = error instanceof Error ? error.name : ''
  if (name === 'NotReadableError' || name === 'NotFoundError') {
    return 'The file could not be read to its end. It may have been changed or moved meanwhile: choose it again.'
  }
  if (error instanceof RangeError) {
    return 'This browser has too little memory left for this archive. Close other pages, or check it by the command.'
  }
  return `The check broke off through no fault of the archive (${error instanceof Error ? error.message : String(error)}).`
}
