import { useEffect, useReducer, useRef } from 'react'
import { beginCheck, type CheckRun, type WorkerLike } from './check-run.ts'
import { checkReducer, type CheckView, READY } from './check-state.ts'
import { rememberHead } from './log-memory.ts'
import type { GivenArchive, StartOptions, ToWorker } from './messages.ts'

export interface CheckControl {
  readonly view: CheckView
  start(archive: GivenArchive, options: StartOptions): void
  cancel(): void
  /** Takes receipts: they are held against the seal once an archive has held. */
  giveReceipts(files: readonly File[]): Promise<void>
  askPicks(from: number): void
  askWalk(pick: number): void
}

type Question = Extract<ToWorker, { readonly kind: 'receipt' }>

/** A check and its worker, for a page. The worker ends with the page. */
export function useCheck(createWorker: () => WorkerLike): CheckControl {
  const [view, dispatch] = useReducer(checkReducer, READY)
  const run = useRef<CheckRun | null>(null)
  const receipts = useRef<Question[]>([])
  // Known at once, while the view that is drawn may still be the one before.
  const held = useRef(false)
  useEffect(() => () => run.current?.end(), [])

  return {
    view,
    start(archive, options) {
      run.current?.end()
      held.current = false
      dispatch({ kind: 'begun', download: archive.kind === 'address' })
      const begun = beginCheck(createWorker, { kind: 'start', archive, options }, (message) => {
        dispatch(message)
        if (message.kind === 'log' && message.watch.remember !== null) rememberHead(message.watch.remember)
        if (message.kind !== 'held') return
        held.current = true
        begun.ask({ kind: 'picks', from: 0 })
        for (const question of receipts.current) begun.ask(question)
      })
      run.current = begun
    },
    cancel() {
      run.current?.end()
      run.current = null
      held.current = false
      dispatch({ kind: 'cancelled' })
    },
    async giveReceipts(files) {
      for (const file of files) {
        const bytes = new Uint8Array(await file.arrayBuffer())
        const id = receipts.current.length
        const question: Question = { kind: 'receipt', id, receipt: { name: file.name, bytes } }
        receipts.current.push(question)
        dispatch({ kind: 'receipt-given', id, name: file.name })
        if (held.current) run.current?.ask(question)
      }
    },
    askPicks: (from) => run.current?.ask({ kind: 'picks', from }),
    askWalk(pick) {
      dispatch({ kind: 'walk-asked', pick })
      run.current?.ask({ kind: 'walk', pick })
    },
  }
}
