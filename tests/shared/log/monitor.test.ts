import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { compareHeads, isAlarm, logChangeWords, needsProof, type LogChange } from '#shared/log/monitor.ts'
import { TestLog } from '#tests/support/log/test-log.ts'

const log = new TestLog()
for (let i = 0; i < 23; i += 1) log.add(`draw-${i}`, 'opened')

function change(before: number | null, now: TestLog, size = now.leaves.length): LogChange {
  const old = before === null ? null : log.head(before)
  const head = now.head(size)
  const proof = old && needsProof(old, head) ? now.tree(size).consistencyProof(old.size) : null
  return compareHeads(sha256, old, head, proof)
}

describe('a log since it was last seen', () => {
  test('is the first, the same, or grown, for every pair of sizes', () => {
    expect(change(null, log).kind).toBe('first')
    for (let before = 0; before <= 23; before += 1) {
      for (let now = before; now <= 23; now += 1) {
        const kind = change(before, log, now).kind
        expect(kind, `${before} to ${now}`).toBe(before === now ? 'same' : 'grown')
      }
    }
  })
  test('that shows fewer entries was wound back', () => {
    for (const size of [0, 1, 22]) {
      const found = change(23, log, size)
      expect(found.kind).toBe('rewound')
      expect(isAlarm(found)).toBe(true)
      expect(logChangeWords(found)).toContain('wound back')
    }
  })
  test('that tells another story of the same length was forked', () => {
    const found = change(15, log.fork(14))
    expect(found).toMatchObject({ kind: 'forked', why: 'root' })
    expect(isAlarm(found)).toBe(true)
  })
  test('that tells another story and grew was forked, whatever proof it sends', () => {
    for (const parted of [1, 7, 13]) {
      const fork = log.fork(parted)
      while (fork.leaves.length < 30) fork.add('more', 'opened')
      const found = change(14, fork)
      expect(found).toMatchObject({ kind: 'forked', why: 'proof' })
      expect(logChangeWords(found)).toContain('was forked')
    }
  })
  test('a fork that parted behind what was seen is growth: only later heads can tell', () => {
    expect(change(14, log.fork(14)).kind).toBe('grown')
  })
  test('without a proof nothing shows that it only grew', () => {
    expect(compareHeads(sha256, log.head(5), log.head(9), null)).toMatchObject({ kind: 'forked', why: 'proof' })
  })
  test('of another origin is no alarm, but is not compared', () => {
    const other = new TestLog(log.secret, 'elsewhere.example/log')
    other.add('x', 'opened')
    expect(compareHeads(sha256, log.head(1), other.head(), null).kind).toBe('other-log')
  })
})
