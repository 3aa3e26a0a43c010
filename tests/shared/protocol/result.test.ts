import { describe, expect, test } from 'vitest'
import { aSeal, aTossPlan, digestOf } from '#tests/support/record/seal.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { canonicalText } from '#shared/bytes/canonical-json.ts'
import { hexBytes, toHex } from '#shared/bytes/hex.ts'
import { labelCommitment } from '#shared/protocol/commitments.ts'
import { planAwards } from '#shared/protocol/draw.ts'
import { checkLabels, labelsBytes, parseLabels } from '#shared/protocol/labels.ts'
import { LOG_EVENTS, logLeafBytes, noteDigest, parseLogLeaf } from '#shared/protocol/log-leaf.ts'
import {
  checkResultAgainstSeal,
  parseResult,
  resultBytes,
  validateResult,
  type DrawResult,
} from '#shared/protocol/result.ts'
import { parseTranscript, transcriptBytes, transcriptLine } from '#shared/protocol/transcript.ts'

const seal = aSeal()
const awards = planAwards(seal.prizes, seal.reserves)
const label = (leaf: number) => ({ label: `Winner ${leaf}`, labelSalt: digestOf(leaf), leaf })
const commitOf = (leaf: number): string => {
  const { label: words, labelSalt } = label(leaf)
  return toHex(labelCommitment(sha256, hexBytes(labelSalt), words))
}
const leaves = [2, 0, 1]
const result: DrawResult = {
  format: 'evenpenny/1',
  kind: 'result',
  seal: digestOf(8),
  drawnAt: seal.drawAt,
  reveal: {
    beacon: { round: seal.sources.beacon?.round ?? 0, signature: 'a'.repeat(96) },
    seed: digestOf(6),
    tosses: null,
  },
  picks: leaves.map((leaf, pick) => ({
    award: awards[pick] as (typeof awards)[number],
    identityCommit: digestOf(leaf + 10),
    labelCommit: commitOf(leaf),
    leaf,
    pick,
    remaining: 12 - 4 * pick,
    tickets: 4,
  })),
  transcript: digestOf(7),
}
const against = (changes: object, other = seal): string => {
  const checked = checkResultAgainstSeal({ ...result, ...changes }, other, digestOf(8))
  return checked.ok ? 'ok' : `${checked.error.code} ${checked.error.at}`
}
const pickChanged = (i: number, changes: object) => ({
  picks: result.picks.map((pick, k) => (k === i ? { ...pick, ...changes } : pick)),
})

describe('a result', () => {
  test('is read back from its bytes, and fits its seal', () => {
    expect(parseResult(resultBytes(result))).toEqual({ ok: true, value: result })
    expect(against({})).toBe('ok')
  })
  test.each([
    [{ seal: digestOf(1) }, 'seal-mismatch seal'],
    [{ drawnAt: '2030-06-15T19:29:59Z' }, 'drawn-too-soon drawnAt'],
    [{ reveal: { ...result.reveal, beacon: null } }, 'reveal-mismatch reveal.beacon'],
    [{ reveal: { ...result.reveal, seed: null } }, 'reveal-mismatch reveal.seed'],
    [{ reveal: { ...result.reveal, tosses: [] } }, 'reveal-mismatch reveal.tosses'],
    [{ reveal: { ...result.reveal, beacon: { round: 5, signature: '' } } }, 'beacon-round reveal.beacon.round'],
    [{ picks: [] }, 'picks-missing picks'],
    [{ picks: [...result.picks, ...result.picks] }, 'too-many-picks picks'],
    [pickChanged(1, { pick: 2 }), 'pick-order picks[1].pick'],
    [pickChanged(1, { award: { item: 2, prize: 'jam' } }), 'award-wrong picks[1].award'],
    [pickChanged(1, { award: { reserve: 1 } }), 'award-wrong picks[1].award'],
    [pickChanged(2, { leaf: 3 }), 'leaf-out-of-range picks[2].leaf'],
    [pickChanged(0, { remaining: 13 }), 'remaining-wrong picks[0].remaining'],
  ])('%j does not fit: %s', (changes, expected) => {
    expect(against(changes)).toBe(expected)
  })
  test('tosses that the seal names must be there', () => {
    const tossed = aSeal({ sources: { ...seal.sources, tosses: aTossPlan } })
    expect(against({}, tossed)).toBe('reveal-mismatch reveal.tosses')
  })
  test.each([
    [{ kind: 'seal' }, 'value-wrong'],
    [{ extra: 1 }, 'member-unknown'],
    [{ transcript: 'x' }, 'hex-wrong'],
    [{ reveal: { beacon: null, seed: null } }, 'member-missing'],
    [{ reveal: { ...result.reveal, tosses: [5] } }, 'text-wrong'],
    [{ reveal: { ...result.reveal, tosses: 'HHT' } }, 'list-expected'],
    [pickChanged(0, { award: { item: 1, prize: 'hamper', reserve: 1 } }), 'member-unknown'],
    [pickChanged(0, { award: { reserve: 0 } }), 'number-wrong'],
    [pickChanged(0, { award: null }), 'object-expected'],
    [pickChanged(0, { leaf: -1 }), 'number-wrong'],
    [pickChanged(0, { leaf: true }), 'number-wrong'],
    [pickChanged(0, { leaf: '0' }), 'number-wrong'],
    [pickChanged(0, { tickets: 0 }), 'number-wrong'],
    [pickChanged(0, { tickets: 2 ** 32 }), 'number-wrong'],
    [pickChanged(0, { labelCommit: 'A'.repeat(64) }), 'hex-wrong'],
  ])('%j is refused: %s', (changes, expected) => {
    expect(validateResult({ ...result, ...changes })).toMatchObject({ error: { code: expected } })
  })
})

describe('opened labels', () => {
  const check = (...order: number[]): string => {
    const checked = checkLabels(sha256, order.map(label), result.picks)
    return checked.ok ? 'ok' : checked.error.code
  }
  test('are read back, open their commitments, and may be withheld', () => {
    const parsed = parseLabels(labelsBytes(leaves.map(label)))
    expect(parsed).toEqual({ ok: true, value: leaves.map(label) })
    expect(parseLabels(new Uint8Array(0))).toEqual({ ok: true, value: [] })
    expect([check(2, 0, 1), check(2, 1), check(), check(0)]).toEqual(['ok', 'ok', 'ok', 'ok'])
  })
  test('stand in the order of first picks, once each, and only for picked leaves', () => {
    expect([check(0, 2), check(2, 2), check(2, 5)]).toEqual(['label-order', 'label-twice', 'leaf-not-picked'])
    const wrong = [{ ...label(2), label: 'Somebody else' }]
    expect(checkLabels(sha256, wrong, result.picks)).toMatchObject({ error: { code: 'label-mismatch' } })
  })
  test.each([
    ['no line feed at the end', (text: string) => text.trimEnd(), 'unfinished-line'],
    ['an empty line', (text: string) => `${text}\n`, 'empty-line'],
    ['a space', (text: string) => text.replace(':', ': '), 'not-canonical'],
    ['carriage returns', (text: string) => text.replaceAll('\n', '\r\n'), 'not-canonical'],
    ['another member', (text: string) => text.replace('}', ',"zone":1}'), 'member-unknown'],
    ['a control character', (text: string) => text.replace('Winner', 'Win\\tner'), 'text-wrong'],
  ])('with %s are refused', (_, change, expected) => {
    const text = change(new TextDecoder().decode(labelsBytes(leaves.map(label))))
    expect(parseLabels(utf8(text))).toMatchObject({ error: { code: expected } })
  })
})

describe('a transcript', () => {
  const picks = [
    { pick: 0, leaf: 2, coins: [[3, 9, '01', 'T'] as const, [0, 4, '', 'T'] as const] },
    { pick: 1, leaf: 0, coins: [] },
  ]
  test('is JCS line by line, and read back', () => {
    for (const pick of picks) expect(transcriptLine(pick)).toBe(`${canonicalText(pick)}\n`)
    expect(parseTranscript(transcriptBytes(picks))).toEqual({ ok: true, value: picks })
  })
  test.each([
    ['"pick":0', '"pick":1', 'pick-order'],
    ['"leaf":2', '"leaf":2.0', 'number-not-canonical'],
    ['"leaf":2', '"leaf":-2', 'number-wrong'],
    ['"01"', '"0 1"', 'text-wrong'],
    ['"01"', '1', 'text-wrong'],
    ['"T"', '"t"', 'value-wrong'],
    ['[3,9,"01","T"]', '[3,9,"01"]', 'value-wrong'],
    ['[3,9,"01","T"]', '{}', 'list-expected'],
    ['{', '{"at":1,', 'member-unknown'],
    ['"leaf":2', '"leaf":2,"leaf":2', 'duplicate-member'],
    ['}\n', '}', 'not-json'],
  ])('with %j as %j is refused', (from, to, expected) => {
    const text = new TextDecoder().decode(transcriptBytes(picks))
    expect(parseTranscript(utf8(text.replace(from, to)))).toMatchObject({ error: { code: expected } })
  })
})

describe('a leaf of the log', () => {
  const leaf = {
    at: '2030-06-15T19:30:04Z',
    digest: digestOf(1),
    draw: 'spring-hamper',
    event: 'drawn',
    format: 'evenpenny/1',
    kind: 'log',
    note: null,
    organisation: 'larkwater-choir',
    supersedes: null,
  } as const
  test('is JCS of exactly its members', () => {
    expect(new TextDecoder().decode(logLeafBytes(leaf))).toBe(
      `{"at":"2030-06-15T19:30:04Z","digest":"${digestOf(1)}","draw":"spring-hamper","event":"drawn",` +
        '"format":"evenpenny/1","kind":"log","note":null,"organisation":"larkwater-choir","supersedes":null}',
    )
    for (const event of LOG_EVENTS) expect(parseLogLeaf(logLeafBytes({ ...leaf, event })).ok).toBe(true)
    expect(parseLogLeaf(utf8(canonicalText({ ...leaf, event: 'won' })))).toMatchObject({
      error: { code: 'value-wrong' },
    })
    expect(parseLogLeaf(utf8(canonicalText({ ...leaf, by: 'x' })))).toMatchObject({ error: { code: 'member-unknown' } })
  })
  test('a note depends on its salt and its text', () => {
    const salt = new Uint8Array(32).fill(1)
    const bytes = Buffer.concat([Buffer.from([7]), salt, Buffer.from('Two stubs.')])
    expect(toHex(noteDigest(sha256, salt, 'Two stubs.'))).toBe(toHex(sha256(bytes)))
    expect(() => noteDigest(sha256, new Uint8Array(31), 'x')).toThrow(RangeError)
  })
})
