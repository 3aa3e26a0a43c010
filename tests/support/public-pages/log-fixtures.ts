import { sha256 } from '#server/adapters/hash/sha256.ts'
import { decodeUtf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { logLeafBytes, type LogEvent } from '#shared/protocol/log-leaf.ts'
import { keyFingerprint, publicKeyOf } from '#shared/protocol/signature.ts'
import type { DrawLog, LogHead, LogState } from '#shared/schemas/api/log.ts'
import type { DrawPage } from '#shared/schemas/api/public.ts'
import { TestLog } from '#tests/support/log/test-log.ts'

/** The head of a log as the site shows it. */
export function headOf(log: TestLog, size = log.leaves.length): LogHead {
  const publicKey = publicKeyOf(log.secret)
  return {
    origin: log.origin,
    size,
    root: toHex(log.tree(size).root),
    note: log.note(size),
    keyFingerprint: keyFingerprint(sha256, publicKey),
    publicKey: toHex(publicKey),
  }
}

/** A log in which the history of a draw stands at its numbers, and other draws between. */
export function logWith(draw: Pick<DrawPage, 'slug' | 'history'>): TestLog {
  const log = new TestLog()
  const last = draw.history.at(-1)?.index ?? 0
  for (let index = 0; index <= last + 3; index += 1) log.add(`other-draw-${index}`, 'opened')
  for (const { index, at, event, digest } of draw.history) {
    const names = { draw: draw.slug, organisation: 'larkmoor-bells', note: null, supersedes: null } as const
    const leaf = { at, digest, event: event as LogEvent, format: 'evenpenny/1', kind: 'log', ...names } as const
    log.leaves[index] = decodeUtf8(logLeafBytes(leaf)) ?? ''
  }
  return log
}

/** What the log says of a draw, proven to its head. */
export function drawLogOf(draw: Pick<DrawPage, 'slug' | 'history'>, log = logWith(draw)): DrawLog {
  const tree = log.tree()
  const entries = draw.history.map(({ index }) => ({
    index,
    leaf: log.leaves[index] ?? '',
    path: tree.inclusionProof(index).map(toHex),
  }))
  return { head: headOf(log), entries }
}

export function logStateFixture(): LogState {
  const log = new TestLog()
  for (let index = 0; index < 130; index += 1) log.add(`draw-${index}`, 'opened')
  return {
    head: headOf(log),
    kept: { size: 128, at: '2026-06-17T16:58:00Z' },
    overdue: [
      {
        slug: 'waiting-2026',
        title: 'Larkmoor Bells Draw',
        organisation: { slug: 'larkmoor-bells', name: 'Larkmoor Bell Trust' },
        drawAt: '2026-06-19T18:30:00Z',
        seal: 'ab'.repeat(32),
      },
    ],
  }
}
