import { execFile } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { readCheckFiles } from '#server/adapters/archive/check-files.ts'
import { runCheck } from '#server/cli/check/run-check.ts'
import { formatVkey, noteKey } from '#shared/log/signed-note.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { publicKeyOf } from '#shared/protocol/signature.ts'
import { DEVELOPMENT_AUTHORITY_PEM } from '#shared/timestamp/development-authority.ts'
import { type Base, WITNESS } from '#tests/support/archive/test-draw.ts'
import type { Mutation } from '#tests/support/tampering/mutation.ts'
import { tamper } from '#tests/support/tampering/tamper.ts'
import {
  makeOpensslAuthority,
  opensslVerifies,
  type OpensslAuthority,
} from '#tests/support/timestamp/openssl-authority.ts'
import { testArchive } from '#tests/support/archive/test-draw.ts'

// The verdict's second half, by both checks, which share no code: who is believed decides.

let folder = ''
let other: OpensslAuthority
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'evenpenny-in-time-'))
  for (const [name, bytes] of Object.entries(await readCheckFiles())) writeFileSync(join(folder, name), bytes)
  writeFileSync(join(folder, 'development.pem'), DEVELOPMENT_AUTHORITY_PEM)
  other = makeOpensslAuthority('rsa')
  writeFileSync(join(folder, 'other.pem'), other.root)
  writeFileSync(join(folder, 'none.pem'), 'no certificate\n')
})
afterAll(() => {
  other.close()
  rmSync(folder, { recursive: true })
})

interface Said {
  readonly status: number
  readonly text: string
}

async function byShared(args: readonly string[]): Promise<Said> {
  const lines: string[] = []
  const output = { out: (line: string) => lines.push(line), error: (line: string) => lines.push(line) }
  return { status: await runCheck(args, output), text: lines.join('\n') }
}

const byShipped = (args: readonly string[]): Promise<Said> =>
  new Promise((resolve) => {
    execFile(process.execPath, [join(folder, 'check.mjs'), ...args], (error, stdout, stderr) => {
      resolve({ status: error === null ? 0 : Number(error.code), text: stdout + stderr })
    })
  })

let count = 0
async function zipOf(change: Mutation['change'], base: Base = 'beacon'): Promise<string> {
  const path = join(folder, `archive-${++count}.zip`)
  writeFileSync(path, (await tamper({ base, change })).zip)
  return path
}

/** What each check says between "Sealed in time" and the next sentence that is not about it. */
async function secondHalf(args: readonly string[]): Promise<string[]> {
  return Promise.all(
    [byShared, byShipped].map(async (check) => {
      const { status, text } = await check(['--test-beacon', ...args])
      expect(status, text).toBe(0)
      return /Sealed in time: [^]*?(?=\n(?:Signed by|This is a test: its|THIS IS A TEST: its))/.exec(text)?.[0] ?? text
    }),
  )
}

const WITNESSED = ['--witness', formatVkey(WITNESS)]
const TEST = ['--test-timestamps']
const withoutWitness = { without: ['witnessed.txt', 'witnessed-proof.json'] }

describe('sealed in time', () => {
  it('is not shown by a timestamp and a cosignature that nobody given vouches for, and says whose they are', async () => {
    for (const said of await secondHalf([await zipOf({})])) {
      expect(said).toMatch(/^Sealed in time: not shown\./)
      expect(said).toContain('Development timestamps - worthless')
      expect(said).toContain('lighthouse.example/witness')
      expect(said).not.toContain('shown by')
    }
  })
  it('is not shown by the development authority unless the check is told to, and then the verdict names it', async () => {
    const zip = await zipOf(withoutWitness)
    for (const said of await secondHalf([...TEST, zip])) {
      expect(said).toMatch(
        /^Sealed in time: shown by the timestamp of Development timestamps - worthless at 2026-05-09T17:30:02Z/,
      )
      expect(said).toMatch(/this is a test: the timestamp is of the development authority, whose key is public/i)
    }
    // Given as a certificate to trust, it is the same authority.
    for (const said of await secondHalf(['--tsa', join(folder, 'development.pem'), zip])) {
      expect(said).toMatch(/this is a test: the timestamp is of the development authority/i)
    }
    for (const said of await secondHalf(['--tsa', join(folder, 'other.pem'), zip])) {
      expect(said).toMatch(/^Sealed in time: not shown\./)
    }
  })
  it('is shown by the cosignature of a witness that is given, and by both', async () => {
    const zip = await zipOf({})
    for (const said of await secondHalf([...WITNESSED, zip])) {
      expect(said).toMatch(
        /^Sealed in time: shown by the cosignature of the witness lighthouse.example\/witness at 2026-05-09T17:40:00Z/,
      )
      expect(said).not.toContain('timestamp')
    }
    for (const said of await secondHalf([...WITNESSED, ...TEST, zip])) {
      expect(said).toMatch(/shown by the timestamp of .*, and by the cosignature of/)
    }
    const stranger = noteKey(sha256, WITNESS.name, 4, publicKeyOf(new Uint8Array(32).fill(8)))
    for (const said of await secondHalf(['--witness', formatVkey(stranger), zip])) {
      expect(said).toMatch(/^Sealed in time: not shown\./)
    }
  })
  it.each<[string, Mutation['change'], string[], Base?]>([
    ['a timestamp with the very second of the draw', { stamp: { beforeDraw: 0 }, ...withoutWitness }, TEST],
    ['one whose accuracy reaches it', { stamp: { beforeDraw: 1 }, ...withoutWitness }, TEST],
    ['one from after it', { stamp: { beforeDraw: -60 }, ...withoutWitness }, TEST],
    ['a cosignature with its very second', { witnessedBeforeDraw: 0 }, WITNESSED],
    // The tosses may have begun: rounds come at most four hours before the beacon's.
    ['a timestamp from when a coin may have been tossed', withoutWitness, TEST, 'beacon-and-tosses'],
    ['a cosignature from then', {}, WITNESSED, 'beacon-and-tosses'],
  ])('is not shown by %s', async (_name, change, flags, base) => {
    for (const said of await secondHalf([...flags, await zipOf(change, base)])) {
      expect(said).toMatch(/^Sealed in time: not shown\./)
      expect(said).toMatch(/does not come before the draw/)
    }
  })
  it.each<[string, Mutation['change'], string[], Base?]>([
    ['a timestamp two seconds before', { stamp: { beforeDraw: 2 }, ...withoutWitness }, TEST],
    ['a cosignature one second before', { witnessedBeforeDraw: 1 }, WITNESSED],
    [
      'a timestamp before any toss',
      { stamp: { beforeDraw: 4 * 3600 + 60 }, ...withoutWitness },
      TEST,
      'beacon-and-tosses',
    ],
    ['a timestamp where no coin is tossed before the draw', withoutWitness, TEST, 'hall'],
    ['a timestamp of a list that was corrected', withoutWitness, TEST, 'corrected'],
  ])('is shown by %s', async (_name, change, flags, base) => {
    for (const said of await secondHalf([...flags, await zipOf(change, base)])) {
      expect(said).toMatch(/^Sealed in time: shown by/)
    }
  })
  it('is shown by an authority that OpenSSL runs, to whoever trusts its certificate', async () => {
    const { members } = await testArchive('hall')
    const seal = members.find(([name]) => name === 'seal.json')?.[1] ?? new Uint8Array()
    // Its time is of today, long after this draw: only a draw still to come could be shown.
    const response = other.reply(seal)
    expect(opensslVerifies(seal, response, other.root)).toBe(true)
    const path = join(folder, 'by-openssl.zip')
    writeFileSync(
      path,
      (await tamper({ base: 'hall', change: { stampBytes: Buffer.from(response).toString('hex') } })).zip,
    )
    for (const said of await secondHalf(['--tsa', join(folder, 'other.pem'), path])) {
      expect(said).toMatch(/The timestamp by Throw-away signer, of 20[0-9TZ:-]+, does not come before the draw\./)
    }
    for (const said of await secondHalf([path])) expect(said).toMatch(/The timestamp is by Throw-away signer, for whom/)
  })
})

describe('the options of both checks', () => {
  it.each([
    [['--tsa', 'no-such-file.pem'], /--tsa wants a file with certificates; there is no no-such-file\.pem/],
    [['--tsa', 'none.pem'], /none\.pem holds no certificate in PEM/],
    [['--witness', 'lighthouse'], /--witness/],
    [['--witness', formatVkey({ ...WITNESS, id: '00000000' })], /the id of this name and key is/i],
    [['--witness', formatVkey(noteKey(sha256, 'x.example', 1, WITNESS.publicKey))], /of type 4/],
  ])('%j is refused as wrong usage', async (args, words) => {
    const zip = await zipOf({})
    const located = args.map((arg) => (arg === 'none.pem' ? join(folder, arg) : arg))
    for (const check of [byShared, byShipped]) {
      const { status, text } = await check([...located, zip])
      expect(status, text).toBe(2)
      expect(text).toMatch(words)
      expect(text).toContain('Usage:')
    }
  })
})
