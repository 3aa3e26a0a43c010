import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest'
import { beginCheck, LONGEST_SILENCE_MS, type WorkerLike } from '#src/features/check/check-run.ts'
import type { FromWorker, ToWorker } from '#src/features/check/messages.ts'

class FakeWorker implements WorkerLike {
  readonly sent: ToWorker[] = []
  ended = false
  onmessage: WorkerLike['onmessage'] = null
  onerror: WorkerLike['onerror'] = null
  postMessage(message: ToWorker) {
    this.sent.push(message)
  }
  terminate() {
    this.ended = true
  }
  say(data: FromWorker) {
    this.onmessage?.({ data } as MessageEvent<FromWorker>)
  }
}

const START: Extract<ToWorker, { kind: 'start' }> = {
  kind: 'start',
  archive: { kind: 'address', url: '/proof.zip' },
  options: { allowDevelopment: false, authorities: [], witnesses: [], expectedKey: null, log: null },
}
const progress: FromWorker = { kind: 'event', event: { kind: 'progress', step: 1, done: 1, total: 9 } }
const held = { kind: 'held' } as FromWorker

function begin() {
  const worker = new FakeWorker()
  const heard: FromWorker[] = []
  const run = beginCheck(
    () => worker,
    START,
    (message) => heard.push(message),
  )
  return { worker, heard, run }
}

beforeEach(() => vi.useFakeTimers())
afterEach(() => vi.useRealTimers())

describe('a worker that checks', () => {
  it('is ended when it falls silent, and not while it tells progress', () => {
    const { worker, heard } = begin()
    expect(worker.sent).toEqual([START])
    for (let i = 0; i < 5; i++) {
      vi.advanceTimersByTime(LONGEST_SILENCE_MS - 1)
      worker.say(progress)
    }
    expect(worker.ended).toBe(false)
    vi.advanceTimersByTime(LONGEST_SILENCE_MS)
    expect(worker.ended).toBe(true)
    expect(heard.at(-1)).toMatchObject({ kind: 'stopped' })
  })

  it('may rest after the verdict, and is watched again while a question is open', () => {
    const { worker, heard, run } = begin()
    worker.say(held)
    vi.advanceTimersByTime(10 * LONGEST_SILENCE_MS)
    expect(worker.ended).toBe(false)
    run.ask({ kind: 'walk', pick: 2 })
    vi.advanceTimersByTime(LONGEST_SILENCE_MS)
    expect(worker.ended).toBe(true)
    expect(heard.map(({ kind }) => kind)).toEqual(['held', 'stopped'])
  })

  it('is ended by a failure, but a question without an answer leaves it be', () => {
    const failing = begin()
    failing.worker.say({
      kind: 'failed',
      failure: { step: 1, code: 'not-a-zip', at: '', message: '' },
      milliseconds: 1,
    })
    expect(failing.worker.ended).toBe(true)
    const asking = begin()
    asking.worker.say(held)
    asking.run.ask({ kind: 'picks', from: 0 })
    asking.worker.say({ kind: 'stopped', reason: 'The file is gone.' })
    expect(asking.worker.ended).toBe(false)
    vi.advanceTimersByTime(10 * LONGEST_SILENCE_MS)
    expect(asking.worker.ended).toBe(false)
  })

  it('says nothing any more once the page has ended it, and takes no question', () => {
    const { worker, heard, run } = begin()
    run.end()
    worker.say(held)
    run.ask({ kind: 'picks', from: 0 })
    vi.advanceTimersByTime(2 * LONGEST_SILENCE_MS)
    expect(worker.ended).toBe(true)
    expect(heard).toEqual([])
    expect(worker.sent).toEqual([START])
  })

  it('tells of a worker that the browser ended', () => {
    const { worker, heard } = begin()
    worker.onerror?.({ preventDefault: () => {} } as ErrorEvent)
    expect(heard).toEqual([{ kind: 'stopped', reason: expect.stringContaining('memory') }])
    expect(worker.ended).toBe(true)
  })
})
