import { execFile } from 'node:child_process'
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { readCheckFiles } from '#server/adapters/archive/check-files.ts'
import { checkPath } from '#server/cli/check/run-check.ts'
import { formatVkey } from '#shared/log/signed-note.ts'
import { BASES, WITNESS } from '#tests/support/archive/test-draw.ts'
import { type Mutation, mutationFile } from '#tests/support/tampering/mutation.ts'
import { tamper } from '#tests/support/tampering/tamper.ts'

// Each file under tests/tampering changes one thing in a real archive. Both checks, which share no code, must refuse it
// at the same step, the one that the file names.
const corpus = new URL('./tampering/', import.meta.url)
const files = readdirSync(corpus).sort()
const mutations = files.map((file): [string, Mutation] => [
  file,
  mutationFile.parse(JSON.parse(readFileSync(new URL(file, corpus), 'utf8'))),
])

let folder = ''
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'evenpenny-tampering-'))
  for (const [name, bytes] of Object.entries(await readCheckFiles())) writeFileSync(join(folder, name), bytes)
})
afterAll(() => rmSync(folder, { recursive: true }))

type Refusal = { step: number; code?: string; where: string } | null

async function byShared(
  zip: string,
  receipts: readonly string[],
  { key, withoutTestBeacon, giveWitness }: Partial<Mutation>,
) {
  const report = await checkPath(zip, () => {}, {
    allowDevelopmentChain: withoutTestBeacon !== true,
    receipts: receipts.map((name) => ({ name: 'receipt.json', bytes: new Uint8Array(readFileSync(name)) })),
    ...(key === undefined ? {} : { expectedKey: key }),
    ...(giveWitness ? { witnesses: [WITNESS] } : {}),
  })
  return report.ok ? null : report.failure
}

function byShipped(
  zip: string,
  receipts: readonly string[],
  { key, withoutTestBeacon, giveWitness }: Partial<Mutation>,
) {
  const flags = [
    ...(giveWitness ? ['--witness', formatVkey(WITNESS)] : []),
    ...(withoutTestBeacon ? [] : ['--test-beacon']),
    ...(key === undefined ? [] : ['--key', key]),
  ]
  return new Promise<{ status: number; refusal: Refusal }>((resolve, reject) => {
    const args = [join(folder, 'check.mjs'), '--json', ...flags, zip, ...receipts]
    execFile(process.execPath, args, (error, stdout, stderr) => {
      const status = error === null ? 0 : Number(error.code)
      if (stderr !== '') reject(new Error(stderr))
      const { ok, step, where } = JSON.parse(stdout) as { ok: boolean; step: number; where: string }
      resolve({ status, refusal: ok ? null : { step, where } })
    })
  })
}

async function write(
  name: string,
  mutation: Pick<Mutation, 'base' | 'change'>,
): Promise<[zip: string, receipt: string]> {
  const { zip, receipt } = await tamper(mutation)
  const paths: [string, string] = [join(folder, `${name}.zip`), join(folder, `${name}-receipt.json`)]
  writeFileSync(paths[0], zip)
  writeFileSync(paths[1], receipt)
  return paths
}

describe('an archive that nobody touched passes both checks', () => {
  it.each(BASES)('%s', async (base) => {
    for (const change of [{}, { shortProof: true }]) {
      const [zip, receipt] = await write(`sound-${base}`, { base, change })
      expect(await byShared(zip, [receipt], {})).toBeNull()
      expect(await byShipped(zip, [receipt], {})).toEqual({ status: 0, refusal: null })
    }
  })

  it('with a later member that neither knows', async () => {
    const [zip] = await write('later', { base: 'beacon', change: { add: { 'stub-photographs.json': '{}' } } })
    expect(await byShared(zip, [], {})).toBeNull()
    expect(await byShipped(zip, [], {})).toEqual({ status: 0, refusal: null })
  })

  it('without the log, as archives from before it are', async () => {
    const change = { without: ['checkpoint.txt', 'log-proof.json', 'witnessed.txt', 'witnessed-proof.json'] }
    const [zip] = await write('before-the-log', { base: 'beacon', change })
    expect(await byShared(zip, [], {})).toBeNull()
    expect(await byShipped(zip, [], {})).toEqual({ status: 0, refusal: null })
  })

  it('with labels withheld', async () => {
    const withheld = [{ do: 'delete-line' as const, line: 0 }]
    const [zip] = await write('withheld', { base: 'beacon', change: { labels: withheld } })
    expect(await byShared(zip, [], {})).toBeNull()
    expect(await byShipped(zip, [], {})).toEqual({ status: 0, refusal: null })
  })
})

describe('a single change is refused by both checks at its step', () => {
  it('there are enough of them, for every step', () => {
    expect(mutations.length).toBeGreaterThanOrEqual(40)
    expect(new Set(mutations.map(([, { step }]) => step)).size).toBe(12)
    for (const [file, { step }] of mutations) expect(Number(file.slice(0, 2))).toBe(step)
  })

  it.each(mutations)('%s', async (file, mutation) => {
    const [zip, receipt] = await write(file, mutation)
    const receipts = mutation.giveReceipt ? [receipt] : []
    const [shared, shipped] = await Promise.all([byShared(zip, receipts, mutation), byShipped(zip, receipts, mutation)])
    expect(shared).toMatchObject({ step: mutation.step, code: mutation.code })
    expect(shipped).toMatchObject({ status: 1, refusal: { step: mutation.step } })
  })
})
