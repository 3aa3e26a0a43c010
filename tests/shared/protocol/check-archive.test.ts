import { sha256 as nobleSha256 } from '@noble/hashes/sha2.js'
import { describe, expect, it } from 'vitest'
import { memorySource } from '#shared/archive/byte-source.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { checkArchive, type CheckEvent } from '#shared/protocol/check/check-archive.ts'
import { CheckCancelled } from '#shared/protocol/check/state.ts'
import { portableTools } from '#shared/protocol/check/tools.ts'
import { duplicateCommit } from '#shared/protocol/duplicate-commit.ts'
import { testArchive } from '#tests/support/archive/test-draw.ts'
import { rawZip } from '#tests/support/archive/zip-patch.ts'

async function zipOf(...args: Parameters<typeof testArchive>) {
  const { members } = await testArchive(...args)
  return rawZip(members.map(([name, bytes]) => ({ name, bytes })))
}

describe('checkArchive with nothing of Node', () => {
  it('tells each step, its progress and its time by the clock that it is given', async () => {
    const zip = await zipOf('beacon-and-tosses')
    let clock = 0
    const events: CheckEvent[] = []
    const report = await checkArchive({
      open: () => openZip(memorySource(zip)),
      tools: portableTools(() => (clock += 5)),
      options: { allowDevelopmentChain: true },
      onEvent: (event) => events.push(event),
    })
    expect(report).toMatchObject({
      ok: true,
      verdict: {
        arithmetic: 'holds',
        sealedInTime: {
          shown: false,
          why: [
            expect.stringContaining('no certificate given here vouches'),
            expect.stringContaining('whose keys were not given'),
          ],
        },
        developmentChain: true,
        keyCompared: false,
      },
      seal: { draw: 'allotment-spring-draw' },
    })
    const passed = events.filter((event) => event.kind === 'step-passed')
    expect(passed.map(({ step }) => step)).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12])
    expect(passed.map(({ milliseconds }) => milliseconds)).toEqual(Array(12).fill(5))
    for (const event of events) {
      if (event.kind === 'progress') expect(event.done).toBeLessThanOrEqual(event.total)
    }
  })

  it('names winners whose label is withheld, and members that it does not know', async () => {
    const zip = await zipOf('beacon', {
      labels: (text) => text.slice(text.indexOf('\n') + 1),
      extraMembers: () => [['stub-photographs.json', new Uint8Array([123, 125])]],
    })
    const report = await checkArchive({
      open: () => openZip(memorySource(zip)),
      tools: portableTools(() => 0),
      options: { allowDevelopmentChain: true },
    })
    expect(report.ok && report.verdict.withheld).toEqual([report.ok && report.result.picks[0]?.leaf])
    expect(report.ok && report.verdict.notExamined).toEqual(['stub-photographs.json'])
  })

  it('stops when told to, without a verdict', async () => {
    const zip = await zipOf('beacon')
    const signal = { aborted: false }
    const steps: number[] = []
    const checking = checkArchive({
      open: () => openZip(memorySource(zip)),
      tools: portableTools(() => 0),
      options: { allowDevelopmentChain: true, signal },
      onEvent: (event) => {
        steps.push(event.step)
        if (event.kind === 'step-passed' && event.step === 3) signal.aborted = true
      },
    })
    await expect(checking).rejects.toBeInstanceOf(CheckCancelled)
    expect(Math.max(...steps)).toBe(3)
  })

  it('passes on what is wrong with the machine, not with the archive', async () => {
    const broken = { open: () => Promise.reject(new Error('the disk is gone')), tools: portableTools(() => 0) }
    await expect(checkArchive(broken)).rejects.toThrow('the disk is gone')
  })
})

describe('duplicateCommit', () => {
  const commits = (count: number) => {
    const bytes = new Uint8Array(32 * count)
    for (let i = 0; i < count; i++) bytes.set(nobleSha256(Uint8Array.of(i, i >> 8)), 32 * i)
    return bytes
  }
  const key = nobleSha256(Uint8Array.of(1))

  it('finds the first leaf that stands twice, and nothing in a list without one', () => {
    const list = commits(3000)
    expect(duplicateCommit(list, key)).toBeNull()
    list.copyWithin(32 * 2000, 32 * 17, 32 * 18)
    list.copyWithin(32 * 2500, 32 * 5, 32 * 6)
    expect(duplicateCommit(list, key)).toBe(2000)
  })

  it('is not fooled by commitments that differ in their last bit', () => {
    const list = commits(2)
    list.copyWithin(32, 0, 32)
    expect(duplicateCommit(list, key)).toBe(1)
    list[63] = (list[63] ?? 0) ^ 1
    expect(duplicateCommit(list, key)).toBeNull()
  })
})
