import { describe, expect, it } from 'vitest'
import { utf8 } from '#shared/bytes/bytes.ts'
import { portableTools } from '#shared/protocol/check/tools.ts'
import type { FromWorker, StartOptions } from '#src/features/check/messages.ts'
import { blobSource } from '#src/features/check/worker/blob-source.ts'
import { browserTools } from '#src/features/check/worker/fast-tools.ts'
import { fetchArchive } from '#src/features/check/worker/fetch-archive.ts'
import { answer, runCheck } from '#src/features/check/worker/run-check.ts'
import { testArchive } from '#tests/support/archive/test-draw.ts'
import { rawZip } from '#tests/support/archive/zip-patch.ts'

const OPTIONS: StartOptions = {
  allowDevelopment: true,
  authorities: [],
  witnesses: [],
  expectedKey: null,
  log: null,
}

async function check(options = OPTIONS, ...args: Parameters<typeof testArchive>) {
  const { members, receipt } = await testArchive(...args)
  const zip = rawZip(members.map(([name, bytes]) => ({ name, bytes })))
  const told: FromWorker[] = []
  const blob = new Blob([new Uint8Array(zip)])
  const checked = await runCheck(
    { kind: 'start', archive: { kind: 'file', blob }, options },
    await browserTools(),
    (message) => told.push(message),
  )
  const ask = async (question: Parameters<typeof answer>[1]) => {
    told.length = 0
    if (checked) await answer(checked, question, (message) => told.push(message))
    return told[0]
  }
  return { told, checked, ask, receipt, members: new Map(members.map(([name, bytes]) => [name, bytes])) }
}

describe('the check in a worker', () => {
  it('runs the shared check to its verdict, then answers for picks, walks and receipts', async () => {
    const { told, ask, receipt, members } = await check(OPTIONS, 'beacon')
    const last = told.at(-1)
    expect(last).toMatchObject({ kind: 'held', draw: { engine: 'webassembly' }, verdict: { developmentChain: true } })
    const steps = told.flatMap((message) => (message.kind === 'event' ? [message.event] : []))
    expect(steps.filter(({ kind }) => kind === 'step-passed').map(({ step }) => step)).toEqual([
      1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12,
    ])

    const line = JSON.parse(
      Buffer.from(members.get('transcript.jsonl') ?? [])
        .toString()
        .split('\n')[1] ?? '',
    )
    expect(await ask({ kind: 'walk', pick: 1 })).toEqual({ kind: 'walk', pick: 1, coins: line.coins })
    const label = JSON.parse(
      Buffer.from(members.get('labels.jsonl') ?? [])
        .toString()
        .split('\n')[0] ?? '',
    )
    const picks = await ask({ kind: 'picks', from: 0 })
    expect(picks?.kind === 'picks' && picks.rows[0]).toMatchObject({ pick: 0, leaf: label.leaf, label: label.label })

    const holds = await ask({ kind: 'receipt', id: 4, receipt: { name: 'mine.json', bytes: receipt } })
    expect(holds).toMatchObject({ kind: 'receipt', id: 4, finding: { ok: true } })
    const bad = utf8(
      Buffer.from(receipt)
        .toString()
        .replace(/"tickets":(\d+)}$/, (_, n) => `"tickets":${Number(n) + 1}}`),
    )
    const refused = await ask({ kind: 'receipt', id: 5, receipt: { name: 'mine.json', bytes: bad } })
    expect(refused).toMatchObject({ finding: { ok: false, at: expect.stringContaining('mine.json') } })
  })

  it('stops at the first place that fails', async () => {
    const { told, checked } = await check({ ...OPTIONS, expectedKey: 'ab'.repeat(32) }, 'beacon')
    expect(told.at(-1)).toMatchObject({ kind: 'failed', failure: { step: 2, code: 'key-not-the-expected' } })
    expect(checked).toBeNull()
    const unticked = await check({ ...OPTIONS, allowDevelopment: false }, 'beacon')
    expect(unticked.told.at(-1)).toMatchObject({ kind: 'failed', failure: { step: 3, code: 'development-chain' } })
  })

  it('says of a file that cannot be read that this is not the archive’s fault', async () => {
    const told: FromWorker[] = []
    const blob = {
      size: 1000,
      slice: () => ({ arrayBuffer: () => Promise.reject(new DOMException('gone', 'NotReadableError')) }),
    } as unknown as Blob
    const machine = { tools: portableTools(() => 0), engine: 'javascript' } as const
    await runCheck({ kind: 'start', archive: { kind: 'file', blob }, options: OPTIONS }, machine, (m) => told.push(m))
    expect(told.at(-1)).toMatchObject({ kind: 'stopped', reason: expect.stringContaining('choose it again') })
  })
})

describe('the fast hash', () => {
  it('keeps streams apart, also more of them than it has hashers, and one-shot digests between them', async () => {
    const { tools } = await browserTools()
    const portable = portableTools(() => 0)
    const texts = Array.from({ length: 9 }, (_, index) => utf8(`stream ${index} `.repeat(20_000)))
    const streams = texts.map(() => tools.createSha256())
    for (const half of [0, 1]) {
      texts.forEach((text, index) => {
        const middle = text.length >> 1
        streams[index]?.update(half === 0 ? text.subarray(0, middle) : text.subarray(middle))
        expect(tools.sha256(text)).toEqual(portable.sha256(text))
      })
    }
    expect(streams.map((stream) => stream.digest())).toEqual(texts.map((text) => portable.sha256(text)))
    // Those given back serve again.
    expect(tools.createSha256().digest()).toEqual(portable.sha256(new Uint8Array(0)))
  })
})

describe('a file as a source of bytes', () => {
  it('gives the very bytes at any place, within its window, across it and beyond', async () => {
    const bytes = Uint8Array.from({ length: 3_000_000 }, (_, index) => (index * 7) % 251)
    const source = blobSource(new Blob([bytes]))
    for (const [offset, length] of [
      [0, 10],
      [1_048_570, 20],
      [2_999_990, 10],
      [5, 2_500_000],
      [3_000_000, 0],
      [17, 3],
    ] as const) {
      expect(Buffer.compare(await source.read(offset, length), bytes.subarray(offset, offset + length))).toBe(0)
    }
    await expect(source.read(2_999_999, 2)).rejects.toBeInstanceOf(RangeError)
  })
})

describe('fetching an archive', () => {
  const reply = (body: BodyInit | null, init?: ResponseInit) => () => Promise.resolve(new Response(body, init))
  const tell = () => {}

  it('tells how far it is and gives the bytes whole', async () => {
    const bytes = new Uint8Array(9_000_000).fill(7)
    const told: [number, number | null][] = []
    const headers = { 'content-length': String(bytes.length) }
    const blob = await fetchArchive('/proof.zip', (...args) => told.push(args), reply(bytes, { headers }))
    expect(Buffer.compare(new Uint8Array(await blob.arrayBuffer()), bytes)).toBe(0)
    expect(told.at(-1)).toEqual([bytes.length, bytes.length])
  })

  it.each([
    ['no connection', () => Promise.reject(new TypeError('failed')), /could not be reached/],
    ['404', reply(null, { status: 404 }), /no archive at this address/],
    ['503', reply('later', { status: 503 }), /status 503/],
    [
      'a line that breaks',
      reply(
        new ReadableStream({
          pull(controller) {
            controller.error(new Error('reset'))
          },
        }),
      ),
      /broke off/,
    ],
  ])('says in plain words: %s', async (_what, request, words) => {
    await expect(fetchArchive('/proof.zip', tell, request)).rejects.toThrow(words)
  })
})

describe('whom the reader trusts', () => {
  const stopped = async (change: Partial<StartOptions>) =>
    (await check({ ...OPTIONS, ...change }, 'beacon')).told.at(-1)

  it('is refused by name where it cannot be read, before anything is checked', async () => {
    const junk = await stopped({ authorities: [{ name: 'authority.pem', pem: 'no certificate' }] })
    expect(junk).toEqual({ kind: 'stopped', reason: expect.stringContaining('authority.pem holds no certificate') })
    const broken = '-----BEGIN CERTIFICATE-----\nMAA=\n-----END CERTIFICATE-----\n'
    const damaged = await stopped({ authorities: [{ name: 'authority.pem', pem: broken }] })
    expect(damaged).toEqual({ kind: 'stopped', reason: expect.stringContaining('authority.pem cannot be read') })
    const key = await stopped({ witnesses: ['quayside.example+00000000+abc'] })
    expect(key).toEqual({ kind: 'stopped', reason: expect.stringContaining('quayside.example+00000000+abc') })
  })
})
