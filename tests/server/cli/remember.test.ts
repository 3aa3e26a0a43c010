import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { createServer, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { runCheck } from '#server/cli/check/run-check.ts'
import { isArchiveMember } from '#shared/archive/members.ts'
import { decodeUtf8, utf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { testArchive } from '#tests/support/archive/test-draw.ts'
import { rawZip } from '#tests/support/archive/zip-patch.ts'
import { TestLog } from '#tests/support/log/test-log.ts'

// A site that shows whatever log a test wants, beside an archive whose checkpoint has 8 entries.
let folder = ''
let site: Server
let page = ''
let log: TestLog
let honest: TestLog
let proofs: 'given' | 'none' | 'nonsense' | 'away' = 'given'
const at = (name: string) => join(folder, name)
const FILE = 'seen.txt'

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'evenpenny-remember-'))
  let leaves: string[] = []
  const archive = await testArchive('beacon', {
    logLeaves: (text) => {
      leaves = text.split('\n')
      return text
    },
  })
  honest = new TestLog(archive.secretKey)
  honest.leaves.push(...leaves)
  const zip = rawZip(archive.members.map(([name, bytes]) => ({ name, bytes })))
  writeFileSync(at('proof.zip'), zip)
  // As archives were before the log: without the members that came later, and without their sums.
  const old = archive.members.filter(([name]) => isArchiveMember(name))
  const sums = (text: string): string =>
    text.replace(/^.*\n/gm, (line) => (isArchiveMember(line.slice(66).trimEnd()) ? line : ''))
  const entries = old.map(([name, bytes]) => ({
    name,
    bytes: name === 'SHA256SUMS' ? utf8(sums(decodeUtf8(bytes) ?? '')) : bytes,
  }))
  writeFileSync(at('old.zip'), rawZip(entries))
  site = createServer((request, response) => {
    const url = new URL(request.url ?? '', 'http://site.example')
    if (url.pathname.endsWith('/proof.zip')) return void response.end(zip)
    if (url.pathname === '/log/checkpoint.txt') return void response.end(log.note())
    if (url.pathname !== '/api/v1/log/consistency' || proofs === 'none') return void response.writeHead(404).end()
    if (proofs === 'away') return void response.writeHead(503).end()
    if (proofs === 'nonsense') return void response.end('{"path":[1]}')
    const [first, second] = ['first', 'second'].map((name) => Number(url.searchParams.get(name)))
    const path = log.tree(second).consistencyProof(first ?? 0)
    response.end(JSON.stringify({ path: path.map(toHex) }))
  })
  await new Promise<void>((resolve) => site.listen(0, '127.0.0.1', resolve))
  page = `http://127.0.0.1:${(site.address() as AddressInfo).port}/draws/allotment-spring-draw`
})
afterAll(() => {
  site.close()
  rmSync(folder, { recursive: true })
})
beforeEach(() => {
  rmSync(at(FILE), { force: true })
  proofs = 'given'
  log = grown(4)
})

function grown(by: number): TestLog {
  const more = new TestLog(honest.secret)
  more.leaves.push(...honest.leaves)
  for (let i = 0; i < by; i += 1) more.add(`later-${i}`, 'opened')
  return more
}
async function check(...args: string[]) {
  const lines: string[] = []
  const errors: string[] = []
  const output = { out: (l: string) => void lines.push(l), error: (l: string) => void errors.push(l) }
  const status = await runCheck(['--test-beacon', '--remember', at(FILE), ...args], output)
  return { status, out: lines.join('\n'), errors: errors.join('\n') }
}
const kept = () => readFileSync(at(FILE), 'utf8')

describe('npm run check -- --remember FILE --url DRAW_PAGE', () => {
  it('remembers the newest checkpoint, and proves the next time that the log only grew', async () => {
    const first = await check('--url', page)
    expect(first.status).toBe(0)
    expect(first.out).toContain(
      'The checkpoint in the archive: The log ravelin-hall.example/log only grew, from 8 entries to 12',
    )
    expect(kept()).toBe(log.note())
    log = grown(9)
    const second = await check('--url', page)
    expect(second.status).toBe(0)
    expect(second.out).toContain('only grew, from 12 entries to 17')
    expect(kept()).toBe(log.note())
  })

  it('names a log that was wound back, and keeps what it remembers', async () => {
    await check('--url', page)
    const before = kept()
    log = grown(2)
    const { status, out } = await check('--url', page)
    expect(status).toBe(1)
    expect(out).toContain('was wound back: it showed 12 entries before, and shows 10 now')
    expect(out).toContain('[log-rewound]')
    expect(out).toContain('The arithmetic above holds all the same.')
    expect(kept()).toBe(before)
  })

  it('names a log that was forked behind the archive, whether it is longer or as long', async () => {
    await check('--url', page)
    const before = kept()
    for (const length of [12, 20]) {
      log = grown(1).fork(9)
      while (log.leaves.length < length) log.add('another-story', 'opened')
      const { status, out } = await check('--url', page)
      expect(status).toBe(1)
      expect(out).toContain('[log-forked]')
      expect(out).toContain('The checkpoint in the archive: The log ravelin-hall.example/log only grew')
      expect(kept()).toBe(before)
    }
  })

  it('names a log that does not hold the archive’s own checkpoint, with nothing remembered', async () => {
    log = honest.fork(5)
    while (log.leaves.length < 12) log.add('another-story', 'opened')
    const { status, out } = await check('--url', page)
    expect(status).toBe(1)
    expect(out).toContain('The checkpoint in the archive: The log ravelin-hall.example/log was forked')
    expect(() => kept()).toThrow()
  })

  it.each(['none', 'nonsense'] as const)('takes a proof that is %s for a fork', async (kind) => {
    proofs = kind
    const { status, out } = await check('--url', page)
    expect(status).toBe(1)
    expect(out).toContain('[log-forked]')
  })

  it('does not call a site that is away dishonest, but has not shown anything either', async () => {
    proofs = 'away'
    const { status, out, errors } = await check('--url', page)
    expect(status).toBe(1)
    expect(errors).toContain('answered with status 503')
    expect(out).not.toContain('[log-')
    expect(() => kept()).toThrow()
  })

  it('refuses a checkpoint that the archive’s key did not sign, and another log', async () => {
    log = new TestLog(new Uint8Array(32).fill(9))
    log.leaves.push(...grown(4).leaves)
    const other = await check('--url', page)
    expect(other.status).toBe(1)
    expect(other.out).toContain('is not signed by the key of this archive')
    log = new TestLog(honest.secret, 'elsewhere.example/log')
    log.leaves.push(...grown(4).leaves)
    const elsewhere = await check('--url', page)
    expect(elsewhere.status).toBe(1)
    expect(elsewhere.out).toContain('two logs cannot be compared')
  })
})

describe('npm run check -- --remember FILE without the site', () => {
  it('remembers the archive’s checkpoint, and finds it again', async () => {
    expect((await check(at('proof.zip'))).status).toBe(0)
    expect(kept()).toBe(honest.note())
    const again = await check(at('proof.zip'))
    expect(again.status).toBe(0)
    expect(again.out).toContain('stands as it was seen before')
  })
  it('names a fork of the same size, and says what it cannot compare', async () => {
    const fork = honest.fork(7)
    expect(fork.leaves).toHaveLength(8)
    writeFileSync(at(FILE), fork.note())
    const forked = await check(at('proof.zip'))
    expect(forked.status).toBe(1)
    expect(forked.out).toContain('[log-forked]')
    writeFileSync(at(FILE), grown(3).note())
    const newer = await check(at('proof.zip'))
    expect(newer.status).toBe(0)
    expect(newer.out).toContain('Only the site can prove')
    expect(kept()).toBe(grown(3).note())
  })
  it('has nothing to compare in an archive from before the log', async () => {
    const { status, out } = await check(at('old.zip'))
    expect(status).toBe(0)
    expect(out).toContain('The archive has no checkpoint of the log')
    expect(() => kept()).toThrow()
  })
  it('refuses a file that holds something else, and leaves it alone', async () => {
    writeFileSync(at(FILE), 'my shopping list\n')
    const { status, errors } = await check(at('proof.zip'))
    expect(status).toBe(2)
    expect(errors).toContain('holds no checkpoint of a log')
    expect(kept()).toBe('my shopping list\n')
  })
})
