import { describe, expect, test } from 'vitest'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { checkLogProof, parseLogProof } from '#shared/log/log-proof.ts'
import { TestLog } from '#tests/support/log/test-log.ts'

const sealDigest = 'ab'.repeat(32)
const resultDigest = 'cd'.repeat(32)
const drawn = { draw: 'spring-hamper', sealDigest, resultDigest }

function logOf(events: readonly Parameters<TestLog['add']>[]): { log: TestLog; indexes: number[] } {
  const log = new TestLog()
  for (let i = 0; i < 3; i += 1) log.add('earlier-draw', 'opened')
  const indexes = events.map((event) => {
    log.add('between', 'closed')
    return log.add(...event)
  })
  log.add('later-draw', 'opened')
  return { log, indexes }
}
const life: Parameters<TestLog['add']>[] = [
  [drawn.draw, 'opened'],
  [drawn.draw, 'closed'],
  [drawn.draw, 'sealed', sealDigest],
  [drawn.draw, 'drawn', resultDigest],
]
function outcome(bytes: Uint8Array, log: TestLog, expected = drawn): string {
  const entries = parseLogProof(bytes)
  if (!entries.ok) return `${entries.error.code} ${entries.error.at}`
  const checked = checkLogProof(sha256, entries.value, log.head(), expected)
  return checked.ok ? `sealed at ${checked.value.sealed.index}` : `${checked.error.code} ${checked.error.at}`
}

describe('the log proof of a draw', () => {
  const { log, indexes } = logOf(life)
  const good = log.proof(indexes)
  const text = new TextDecoder().decode(good)

  test('holds for the draw that it is of', () => {
    expect(outcome(good, log)).toBe('sealed at 8')
  })
  test('does not hold for another seal, result or draw', () => {
    expect(outcome(good, log, { ...drawn, sealDigest: resultDigest })).toBe('log-event-missing entries')
    expect(outcome(good, log, { ...drawn, resultDigest: sealDigest })).toBe('log-event-missing entries')
    expect(outcome(good, log, { ...drawn, draw: 'autumn-hamper' })).toBe('log-draw entries[0].leaf draw')
  })
  test('does not hold against the head of a fork', () => {
    const fork = log.fork(8)
    while (fork.leaves.length < log.leaves.length) fork.add('x', 'opened')
    expect(outcome(good, fork)).toBe('log-inclusion entries[0].path')
  })
  test.each([
    ['a changed leaf', text.replace('closed', 'failed'), 'log-inclusion entries[1].path'],
    ['another index', text.replace('"index":6', '"index":7'), 'log-inclusion entries[1].path'],
    ['entries out of order', text.replace('"index":6', '"index":3'), 'log-order entries[1].index'],
    ['an unknown event', text.replace('closed', 'closing'), 'value-wrong entries[1].leaf event'],
    ['a leaf that is not canonical', text.replace('{\\"at\\"', '{ \\"at\\"'), 'not-canonical entries[0].leaf'],
    [
      'another format',
      text.replace('"format":"evenpenny/1","kind":"log-proof"', '"format":"evenpenny/2","kind":"log-proof"'),
      'value-wrong format',
    ],
    ['a short hash', text.replace(/"path":\["../, '"path":["'), 'hex-wrong entries[0].path[0]'],
    ['a member too many', text.replace('"entries"', '"also":1,"entries"'), 'member-unknown also'],
  ])('refuses %s', (_, changed, expected) => {
    expect(changed).not.toBe(text)
    expect(outcome(utf8(changed), log)).toBe(expected)
  })
  test('a path of 54 siblings is refused before it is hashed', () => {
    const long = `"path":[${Array.from({ length: 54 }, () => `"${'00'.repeat(32)}"`).join(',')}]`
    expect(outcome(utf8(text.replace(/"path":\[[^\]]*\]/, long)), log)).toBe('value-wrong entries[0].path')
  })
})

describe('what the log must say', () => {
  const names = (events: Parameters<TestLog['add']>[]): string => {
    const { log, indexes } = logOf(events)
    return outcome(log.proof(indexes), log)
  }
  const [opened, closed, sealed, settled] = life as [
    Parameters<TestLog['add']>,
    Parameters<TestLog['add']>,
    Parameters<TestLog['add']>,
    Parameters<TestLog['add']>,
  ]
  test('the draw was opened before everything else', () => {
    expect(names([closed, opened, sealed, settled])).toBe('log-event-missing entries')
    expect(names([closed, sealed, settled])).toBe('log-event-missing entries')
  })
  test('its result came after its seal', () => {
    expect(names([opened, settled, sealed])).toBe('log-event-missing entries')
  })
  test('no other seal came between the two; a seal that was replaced before is no fault', () => {
    const other: Parameters<TestLog['add']> = [drawn.draw, 'replaced', 'ee'.repeat(32)]
    expect(names([opened, sealed, other, settled])).toBe('log-event-missing entries')
    const replaced: Parameters<TestLog['add']> = [drawn.draw, 'replaced', sealDigest]
    expect(names([opened, [drawn.draw, 'sealed', 'ee'.repeat(32)], replaced, settled])).toBe('sealed at 8')
  })
})
