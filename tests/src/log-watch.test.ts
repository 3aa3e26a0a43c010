import { describe, expect, it } from 'vitest'
import { LOG_MEMORY } from '#src/lib/log-memory.ts'
import { type LogWatch, type Memory, watchLog } from '#src/lib/log-watch.ts'
import { toHex } from '#shared/bytes/hex.ts'
import type { ApiClient } from '#shared/schemas/endpoint.ts'
import { Problem } from '#shared/schemas/problem.ts'
import { TestLog } from '#tests/support/log/test-log.ts'
import { drawLogOf, headOf } from '#tests/support/public-pages/log-fixtures.ts'

function longLog(): TestLog {
  const log = new TestLog()
  for (let index = 0; index < 21; index += 1) log.add(`draw-${index}`, 'opened')
  return log
}
function memory(): Memory & { kept: Map<string, string> } {
  const kept = new Map<string, string>()
  return { kept, getItem: (key) => kept.get(key) ?? null, setItem: (key, value) => void kept.set(key, value) }
}
const gone = (status: number) => new Problem({ type: 'about:blank', title: 'No', status, detail: 'No.' })

/** A site that shows this log. */
function siteOf(log: TestLog, down: number | null = null): ApiClient & { calls: string[] } {
  const calls: string[] = []
  const call = async (endpoint: { name: string }, input: { query?: { first: number; second: number } } = {}) => {
    calls.push(endpoint.name)
    if (down !== null) throw gone(down)
    if (endpoint.name === 'getLogCheckpointV1') return headOf(log)
    const { first = 0, second = 0 } = input.query ?? {}
    if (second > log.leaves.length) throw gone(404)
    return { path: log.tree(second).consistencyProof(first).map(toHex) }
  }
  return { calls, call: call as never }
}
const watch = (log: TestLog, kept: Memory | null, size = log.leaves.length, api = siteOf(log)) =>
  watchLog(api, { head: headOf(log, size), entries: [] }, kept)
const say = (found: LogWatch) => (found.kind === 'alarm' ? `alarm: ${found.title}` : found.kind)

describe('the memory of a browser', () => {
  it('keeps the first checkpoint, and finds the same log and a grown one sound', async () => {
    const [log, kept] = [longLog(), memory()]
    expect(await watch(log, kept, 9)).toMatchObject({ kind: 'sound', size: 9 })
    expect([...kept.kept.values()]).toEqual([log.note(9)])
    expect(await watch(log, kept, 9)).toMatchObject({ words: expect.stringContaining('stands as it was seen before') })
    const grown = await watch(log, kept)
    expect(grown).toMatchObject({ kind: 'sound', words: expect.stringContaining('only grew, from 9 entries to 21') })
    expect([...kept.kept.values()]).toEqual([log.note(21)])
  })

  it('names a log that was wound back, with both checkpoints, and keeps the older one', async () => {
    const [log, kept] = [longLog(), memory()]
    await watch(log, kept)
    const short = longLog()
    short.leaves.length = 14
    const found = await watch(short, kept)
    expect(found).toMatchObject({
      kind: 'alarm',
      title: 'The log was wound back',
      evidence: [log.note(), short.note()],
    })
    expect([...kept.kept.values()]).toEqual([log.note()])
  })

  it('raises no alarm over a page that is only older than the last one seen', async () => {
    const [log, kept] = [longLog(), memory()]
    await watch(log, kept)
    const api = siteOf(log)
    expect(say(await watch(log, kept, 9, api))).toBe('sound')
    expect(api.calls).toEqual(['getLogCheckpointV1'])
    expect([...kept.kept.values()]).toEqual([log.note()])
  })

  it('names a log that was forked: another root, another story, or no proof', async () => {
    const log = longLog()
    const seen = async (size: number) => {
      const kept = memory()
      await watch(log, kept, size)
      return kept
    }
    const fork = log.fork(12)
    expect(say(await watch(fork, await seen(13)))).toBe('alarm: The log was forked')
    while (fork.leaves.length < 30) fork.add('more', 'opened')
    const kept = await seen(21)
    expect(say(await watch(fork, kept))).toBe('alarm: The log was forked')
    expect([...kept.kept.values()]).toEqual([log.note()])
    // The site says that it has no such proof.
    expect(say(await watch(log, await seen(9), 21, siteOf(log, 404)))).toBe('alarm: The log was forked')
  })

  it('does not call a site that is away dishonest', async () => {
    const [log, kept] = [longLog(), memory()]
    await watch(log, kept, 9)
    expect(say(await watch(log, kept, 21, siteOf(log, 0)))).toBe('unknown')
    expect(say(await watch(log, kept, 21, siteOf(log, 503)))).toBe('unknown')
    expect([...kept.kept.values()]).toEqual([log.note(9)])
  })

  it('does without where the browser keeps nothing, or something else', async () => {
    const log = longLog()
    expect(say(await watch(log, null))).toBe('sound')
    const forbidden: Memory = {
      getItem: () => {
        throw new Error('forbidden')
      },
      setItem: () => {
        throw new Error('forbidden')
      },
    }
    expect(say(await watch(log, forbidden))).toBe('sound')
    const odd = memory()
    odd.setItem(LOG_MEMORY, 'nonsense')
    expect(say(await watch(log, odd))).toBe('sound')
  })
})

describe('what a browser verifies first', () => {
  const head = headOf(longLog())
  it.each([
    ['another size', { ...head, size: 20 }],
    ['another root', { ...head, root: 'ab'.repeat(32) }],
    ['another fingerprint', { ...head, keyFingerprint: 'ab'.repeat(32) }],
    ['a note that was changed', { ...head, note: head.note.replace('\n21\n', '\n22\n') }],
    ['a note of another log', { ...head, origin: 'elsewhere.example/log' }],
  ])('refuses a head with %s', async (_, changed) => {
    const kept = memory()
    expect(say(await watchLog(siteOf(longLog()), { head: changed, entries: [] }, kept))).toBe(
      'alarm: The log is not sound',
    )
    expect(kept.kept.size).toBe(0)
  })
  it('refuses an entry that does not lead to the root', async () => {
    const history = [{ index: 4, at: '2026-05-01T08:00:00Z', event: 'opened', note: null, digest: null }]
    const good = drawLogOf({ slug: 'spring-bells', history })
    const site = siteOf(new TestLog())
    expect(say(await watchLog(site, good, memory()))).toBe('sound')
    const entries = good.entries.map((entry) => ({ ...entry, leaf: entry.leaf.replace('opened', 'closed') }))
    expect(await watchLog(site, { ...good, entries }, memory())).toMatchObject({
      kind: 'alarm',
      words: expect.stringContaining('Entry 4 does not lead to the root'),
    })
  })
})
