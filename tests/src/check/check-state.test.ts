import { describe, expect, it } from 'vitest'
import type { CheckEvent } from '#shared/protocol/check/check-archive.ts'
import { type CheckAction, checkReducer, type CheckView, READY, shareDone } from '#src/features/check/check-state.ts'
import type { FromWorker } from '#src/features/check/messages.ts'

const after = (...actions: readonly CheckAction[]) => actions.reduce<CheckView>(checkReducer, READY)
const event = (value: CheckEvent): CheckAction => ({ kind: 'event', event: value })
const begun: CheckAction = { kind: 'begun', download: false }
const started = (step: 1 | 2 | 3) => event({ kind: 'step-started', step, title: 'any' })
const facts = { inputs: [], outputs: [{ name: 'Root', value: 'aa' }] }
const passed = (step: 1 | 2) =>
  event({ kind: 'step-passed', step, title: 'any', found: `found ${step}`, facts, milliseconds: 3 })
const failure = { step: 2, code: 'seal-signature', at: 'seal.sig', message: 'no' } as const
const failed: readonly CheckAction[] = [
  event({ kind: 'step-failed', step: 2, title: 'any', failure, facts, milliseconds: 3 }),
  { kind: 'failed', failure, milliseconds: 9 },
]
const held = {
  kind: 'held',
  verdict: {} as Extract<FromWorker, { kind: 'held' }>['verdict'],
  draw: {} as Extract<FromWorker, { kind: 'held' }>['draw'],
  milliseconds: 9,
} as const satisfies CheckAction
const states = (view: CheckView) => view.steps.slice(0, 3).map(({ state }) => state)

describe('a check as the page shows it', () => {
  it('moves each step from waiting over under way to its end, and keeps what it found', () => {
    const view = after(begun, started(1), passed(1), started(2))
    expect(states(view)).toEqual(['holds', 'running', 'waiting'])
    expect(view.steps[0]).toMatchObject({ found: 'found 1', facts, milliseconds: 3, progress: null })
    expect(view.phase).toBe('running')
  })

  it('counts finished steps and the part of the running one', () => {
    const view = after(
      begun,
      started(1),
      passed(1),
      started(2),
      event({ kind: 'progress', step: 2, done: 1, total: 4 }),
    )
    expect(shareDone(view.steps)).toBeCloseTo(1.25 / view.steps.length)
    expect(shareDone(READY.steps)).toBe(0)
  })

  it('marks what stands behind a failure as not reached, and says so of receipts too', () => {
    const view = after(
      { kind: 'receipt-given', id: 0, name: 'mine.json' },
      begun,
      started(1),
      passed(1),
      started(2),
      ...failed,
    )
    expect(view.phase).toBe('failed')
    expect(states(view)).toEqual(['holds', 'fails', 'left'])
    expect(view.failure).toEqual(failure)
    expect(view.receipts).toEqual([{ id: 0, name: 'mine.json', finding: 'unexamined' }])
  })

  it('leaves no step under way when it is cancelled or breaks off', () => {
    expect(states(after(begun, started(1), { kind: 'cancelled' }))).toEqual(['left', 'left', 'left'])
    const stopped = after(begun, started(1), { kind: 'stopped', reason: 'The line went dead.' })
    expect(stopped).toMatchObject({ phase: 'stopped', trouble: 'The line went dead.' })
    expect(states(stopped)).toEqual(['left', 'left', 'left'])
  })

  it('begins anew without anything of the run before but the receipts', () => {
    const view = after(
      { kind: 'receipt-given', id: 0, name: 'mine.json' },
      begun,
      started(1),
      passed(1),
      ...failed,
      begun,
    )
    expect(view).toMatchObject({ phase: 'running', failure: null, milliseconds: null })
    expect(states(view)).toEqual(['waiting', 'waiting', 'waiting'])
    expect(view.receipts).toEqual([{ id: 0, name: 'mine.json', finding: null }])
  })

  it('keeps the verdict where only a question could not be answered', () => {
    const view = after(begun, held, { kind: 'walk-asked', pick: 3 }, { kind: 'stopped', reason: 'The file is gone.' })
    expect(view).toMatchObject({ phase: 'held', trouble: 'The file is gone.', walk: null })
    expect(view.held).not.toBeNull()
  })

  it('shows a page of picks once, however often it came, and drops a walk that is no longer asked for', () => {
    const row = (pick: number) => ({
      pick,
      award: { kind: 'reserve' as const, reserve: 1 },
      leaf: 1,
      label: null,
      remaining: 2,
    })
    const first: CheckAction = { kind: 'picks', from: 0, rows: [row(0), row(1)] }
    const second: CheckAction = { kind: 'picks', from: 2, rows: [row(2)] }
    expect(after(begun, held, first, second, second).picks.map(({ pick }) => pick)).toEqual([0, 1, 2])
    const late = after(begun, held, { kind: 'walk-asked', pick: 1 }, { kind: 'walk', pick: 0, coins: [] })
    expect(late.walk).toEqual({ pick: 1, coins: null })
  })

  it('gives each receipt its own finding', () => {
    const given = (id: number): CheckAction => ({ kind: 'receipt-given', id, name: `${id}.json` })
    const view = after(begun, held, given(0), given(1), {
      kind: 'receipt',
      id: 1,
      finding: { ok: true, found: 'It holds.' },
    })
    expect(view.receipts.map(({ finding }) => finding)).toEqual([null, { ok: true, found: 'It holds.' }])
  })
})
