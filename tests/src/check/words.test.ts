import { describe, expect, it } from 'vitest'
import { memorySource } from '#shared/archive/byte-source.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { checkArchive } from '#shared/protocol/check/check-archive.ts'
import { STEP_TITLES } from '#shared/protocol/check/failure.ts'
import { portableTools } from '#shared/protocol/check/tools.ts'
import { verdictSentences } from '#shared/protocol/check/verdict.ts'
import { readFingerprint } from '#src/features/check/fingerprint.ts'
import { durationWords, headAndRest, phaseWords, printable, stepWords } from '#src/features/check/words.ts'
import { testArchive } from '#tests/support/archive/test-draw.ts'
import { rawZip } from '#tests/support/archive/zip-patch.ts'

describe('words of the check', () => {
  it('has plain words for every step that the shared check runs', () => {
    for (const step of Object.keys(STEP_TITLES)) expect(stepWords(Number(step)), step).toMatch(/^[A-Z].{40,}\.$/)
    expect(stepWords(99)).toBe('')
  })

  it('parts both halves of the verdict into a heading and a sentence, and leaves other sentences whole', async () => {
    const { members } = await testArchive('beacon')
    const report = await checkArchive({
      open: () => openZip(memorySource(rawZip(members.map(([name, bytes]) => ({ name, bytes }))))),
      tools: portableTools(() => 0),
      options: { allowDevelopmentChain: true },
    })
    if (!report.ok) throw new Error(report.failure.message)
    const parted = verdictSentences(report.verdict).map(headAndRest)
    expect(parted.slice(0, 2).map(({ head }) => head)).toEqual(['The arithmetic holds', 'Sealed in time: not shown'])
    for (const { rest } of parted) expect(rest).toMatch(/^[A-Z]/)
    expect(parted.slice(2).every(({ head }) => head === null)).toBe(true)
    expect(headAndRest('Sealed in time: shown by the timestamp of Quayside Time, over the seal ab.')).toEqual({
      head: 'Sealed in time: shown',
      rest: 'By the timestamp of Quayside Time, over the seal ab.',
    })
  })

  it('tells times in the unit that fits', () => {
    const spoken = [0.2, 1, 23, 999, 1000, 2149, 9940, 12_345].map(durationWords)
    expect(spoken).toEqual([
      'less than a millisecond',
      '1 millisecond',
      '23 milliseconds',
      '999 milliseconds',
      '1 second',
      '2.1 seconds',
      '9.9 seconds',
      '12 seconds',
    ])
  })

  it('names the step that fails to those who hear the page', () => {
    expect(phaseWords('failed', 9)).toBe('The check is done. Step 9 fails.')
    expect(phaseWords('held', null)).toContain('holds')
    expect(phaseWords('ready', null)).toBe('')
  })

  it('makes visible what would steer the reader', () => {
    expect(printable('a\u202Eb\u0007c\nd')).toBe('a\uFFFDb\uFFFDc\uFFFDd')
    expect(printable('Łódź – 東京')).toBe('Łódź – 東京')
  })
})

describe('a fingerprint that somebody typed', () => {
  const digits = '0123456789abcdef'.repeat(4)
  it('is taken with spaces and capitals, as posters group it', () => {
    expect(readFingerprint(`  ${digits.toUpperCase().replace(/(.{4})/g, '$1 ')}\n`)).toEqual({ key: digits })
    expect(readFingerprint('   ')).toEqual({ key: null })
  })
  it('is refused with what is wrong', () => {
    expect(readFingerprint(digits.slice(1))).toEqual({ error: expect.stringContaining('this one has 63') })
    expect(readFingerprint(`${digits.slice(1)}g`)).toEqual({ error: expect.stringContaining('letters a to f') })
  })
})
