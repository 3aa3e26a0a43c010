import { createHash } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { memorySource } from '#shared/archive/byte-source.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { checkArchive, type CheckEvent } from '#shared/protocol/check/check-archive.ts'
import type { StepFacts } from '#shared/protocol/check/step-facts.ts'
import { portableTools } from '#shared/protocol/check/tools.ts'
import { testArchive } from '#tests/support/archive/test-draw.ts'
import { rawZip } from '#tests/support/archive/zip-patch.ts'

const sha256 = (bytes: Uint8Array) => createHash('sha256').update(bytes).digest('hex')

async function factsOf(...args: Parameters<typeof testArchive>) {
  const { members } = await testArchive(...args)
  const bytes = new Map(members.map(([name, content]) => [name, content]))
  const steps = new Map<number, StepFacts>()
  await checkArchive({
    open: () => openZip(memorySource(rawZip(members.map(([name, content]) => ({ name, bytes: content }))))),
    tools: portableTools(() => 0),
    options: { allowDevelopmentChain: true },
    onEvent: (event: CheckEvent) => {
      if ('facts' in event) steps.set(event.step, event.facts)
    },
  })
  const value = (step: number, side: 'inputs' | 'outputs', name: string) =>
    steps.get(step)?.[side].find((fact) => fact.name === name)?.value
  return { bytes, steps, value }
}

describe('what the steps of a check tell of themselves', () => {
  it('gives the figures and digests that the members have, by another SHA-256', async () => {
    const { bytes, value } = await factsOf('beacon-and-tosses')
    const file = (name: string) => bytes.get(name) ?? new Uint8Array()
    const text = (name: string) => Buffer.from(file(name)).toString('utf8')
    const seal = JSON.parse(text('seal.json'))
    const result = JSON.parse(text('result.json'))
    const coins = text('transcript.jsonl')
      .trim()
      .split('\n')
      .flatMap((line) => JSON.parse(line).coins as [number, number, string, string][])

    expect(value(1, 'inputs', 'Bytes of entries.csv')).toBe(file('entries.csv').length)
    expect(value(1, 'outputs', 'SHA-256 of entries.csv')).toBe(sha256(file('entries.csv')))
    expect(value(2, 'outputs', 'Fingerprint of the key')).toBe(seal.key)
    expect(value(3, 'outputs', 'Digest of the seal')).toBe(sha256(file('seal.json')))
    expect(value(4, 'inputs', 'Sealed root')).toBe(seal.entries.root)
    expect(value(4, 'outputs', 'Root of entries.csv')).toBe(seal.entries.root)
    expect(value(4, 'outputs', 'Tickets in entries.csv')).toBe(seal.entries.tickets)
    expect(value(6, 'outputs', 'Seed, opened')).toBe(result.reveal.seed)
    expect(value(7, 'inputs', 'Sealed round')).toBe(seal.sources.beacon.round)
    expect(value(7, 'outputs', 'Randomness of the round')).toBe(
      sha256(Buffer.from(result.reveal.beacon.signature, 'hex')),
    )
    expect(value(9, 'outputs', 'Coins')).toBe(coins.length)
    expect(value(9, 'outputs', 'Flips')).toBe(coins.reduce((sum, coin) => sum + coin[2].length, 0))
    expect(value(11, 'outputs', 'Digest of transcript.jsonl')).toBe(sha256(file('transcript.jsonl')))
  })

  it('tells, where a step fails, how far it came and nothing of what it did not reach', async () => {
    const { steps, value } = await factsOf('beacon', {
      entries: (text) => text.replace(/\n(\d+),/, (_, tickets) => `\n${Number(tickets) + 1},`),
    })
    const last = Math.max(...steps.keys())
    expect(last).toBe(4)
    expect(value(4, 'inputs', 'Sealed tickets')).toBeTypeOf('number')
    expect(value(4, 'outputs', 'Root of entries.csv')).toBeUndefined()
  })
})
