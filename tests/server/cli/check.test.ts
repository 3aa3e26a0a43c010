import { execFileSync } from 'node:child_process'
import { createHash } from 'node:crypto'
import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, symlinkSync, writeFileSync } from 'node:fs'
import { createServer, type Server } from 'node:http'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { runCheck } from '#server/cli/check/run-check.ts'
import { type TestArchive, testArchive } from '#tests/support/archive/test-draw.ts'
import { rawZip } from '#tests/support/archive/zip-patch.ts'

let folder = ''
let archive: TestArchive
let zip: Uint8Array
const at = (name: string) => join(folder, name)

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'evenpenny-cli-'))
  archive = await testArchive('beacon')
  zip = rawZip(archive.members.map(([name, bytes]) => ({ name, bytes })))
  writeFileSync(at('proof.zip'), zip)
  writeFileSync(at('receipt.json'), archive.receipt)
  mkdirSync(at('unpacked'))
  for (const [name, bytes] of archive.members) writeFileSync(join(at('unpacked'), name), bytes)
})
afterAll(() => rmSync(folder, { recursive: true }))

async function check(...args: string[]) {
  const lines: string[] = []
  const errors: string[] = []
  const limits = { maxBytes: zip.length, timeout: 1000 }
  const status = await runCheck(args, { out: (l) => void lines.push(l), error: (l) => void errors.push(l) }, limits)
  return { status, out: lines.join('\n'), errors: errors.join('\n') }
}

describe('npm run check', () => {
  it('prints twelve steps, both halves of the verdict and what no check can show', async () => {
    const { status, out } = await check('--test-beacon', at('proof.zip'), at('receipt.json'))
    expect(status).toBe(0)
    const steps = [...out.matchAll(/^step (\d+) {2}/gm)].map((match) => Number(match[1]))
    expect(steps).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12])
    expect(out).toContain('The arithmetic holds')
    expect(out).toContain('Sealed in time: not shown')
    expect(out).toContain('development chain, whose secret is public')
    expect(out).toContain(`Signed by an unknown key. Compare all 64 digits`)
    expect(out).toContain(archive.fingerprint)
    expect(out).toContain('receipt.json holds: leaf 2')
    expect(out).toContain('Whether every ticket sold was entered')
  })

  it('compares the fingerprint that it is given, in groups and capitals too', async () => {
    const grouped = archive.fingerprint
      .toUpperCase()
      .replace(/(....)/g, '$1 ')
      .trim()
    const { status, out } = await check('--test-beacon', '--key', grouped, at('proof.zip'))
    expect(status).toBe(0)
    expect(out).toContain('Signed by the key whose fingerprint was given.')
    const other = await check('--test-beacon', '--key', '0'.repeat(64), at('proof.zip'))
    expect(other.status).toBe(1)
    expect(other.out).toContain('FAILED at step 2: site-key.pem')
  })

  it('refuses the development chain unless it is allowed', async () => {
    const { status, out } = await check(at('proof.zip'))
    expect(status).toBe(1)
    expect(out).toContain('FAILED at step 3: seal.json sources.beacon')
    expect(out).not.toContain('The arithmetic holds')
  })

  it('checks a folder, and leaves alone what does not belong to the archive', async () => {
    writeFileSync(join(at('unpacked'), 'my notes.txt'), 'x')
    const { status, out } = await check('--test-beacon', at('unpacked'))
    expect(status).toBe(0)
    expect(out).toContain('Not examined: my notes.txt.')
    rmSync(join(at('unpacked'), 'terms.txt'))
    symlinkSync(at('receipt.json'), join(at('unpacked'), 'terms.txt'))
    expect((await check('--test-beacon', at('unpacked'))).out).toContain('FAILED at step 1: terms.txt')
    rmSync(join(at('unpacked'), 'SHA256SUMS'))
    expect((await check('--test-beacon', at('unpacked'))).out).toContain('FAILED at step 1: SHA256SUMS')
  })

  it.each([
    [[], 'Say which proof archive to check'],
    [['--colour', 'x.zip'], "Unknown option '--colour'"],
    [['--key', 'abc', 'x.zip'], '--key wants all 64'],
    [['no-such.zip'], 'There is no no-such.zip.'],
    [['--url', 'spring-draw'], '--url wants the whole address'],
    [['--url', 'ftp://site.example/draws/a'], 'begins with https://'],
  ])('answers wrong usage %j with a sentence and status 2', async (args, sentence) => {
    const { status, errors, out } = await check(...args)
    expect(status).toBe(2)
    expect(errors).toContain(sentence)
    expect(errors).toContain('Usage: npm run check')
    expect(out).toBe('')
  })

  it('says so where a receipt is not there', async () => {
    const { status, errors } = await check('--test-beacon', at('proof.zip'), at('none.json'))
    expect([status, errors.includes('There is no receipt')]).toEqual([2, true])
  })

  it('does not let an archive steer the terminal', async () => {
    writeFileSync(at('escape.zip'), rawZip([{ name: '\x1b[2Jx', bytes: new Uint8Array(1) }]))
    const { status, out } = await check(at('escape.zip'))
    expect(status).toBe(1)
    expect(out).not.toContain('\x1b')
  })
})

describe('npm run check -- --url', () => {
  let server: Server
  let base = ''
  beforeAll(async () => {
    server = createServer((request, response) => {
      if (request.url === '/draws/spring/proof.zip') response.end(zip)
      else if (request.url === '/draws/long/proof.zip') response.end(Buffer.concat([zip, Buffer.alloc(1)]))
      else if (request.url === '/draws/slow/proof.zip') response.write('PK')
      else response.writeHead(404).end()
    })
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
    const address = server.address()
    base = typeof address === 'object' && address ? `http://127.0.0.1:${address.port}` : ''
  })
  afterAll(() => {
    server.closeAllConnections()
    server.close()
  })

  it.each(['/draws/spring', '/draws/spring/', '/draws/spring/proof.zip', '/draws/spring?from=mail#coins'])(
    'finds the archive of %s',
    async (page) => {
      const { status, out } = await check('--test-beacon', '--url', `${base}${page}`, at('receipt.json'))
      expect(status).toBe(0)
      expect(out).toContain('The arithmetic holds')
    },
  )

  it.each([
    ['/draws/none', 'is not there'],
    ['/draws/long', 'is longer than any proof archive can be'],
    ['/draws/slow', 'did not answer in time'],
  ])('says what is wrong with %s', async (page, sentence) => {
    const { status, errors } = await check('--test-beacon', '--url', `${base}${page}`)
    expect(status).toBe(1)
    expect(errors).toContain(sentence)
  })

  it('says so where nothing answers', async () => {
    const { status, errors } = await check('--url', 'http://127.0.0.1:1/draws/x')
    expect([status, errors.includes('could not be fetched')]).toEqual([1, true])
  })
})

// What CHECKING.txt tells people to type, with programs that are not ours.
describe.skipIf(!existsSync('/usr/bin/sha256sum') || !existsSync('/usr/bin/openssl'))('CHECKING.txt', () => {
  it('gives commands that work', () => {
    const here = at('plain')
    mkdirSync(here)
    for (const [name, bytes] of archive.members) writeFileSync(join(here, name), bytes)
    const text = readFileSync(join(here, 'CHECKING.txt'), 'utf8')
    const all = [...text.matchAll(/^ {4}((?:sha256sum|openssl) .*)$/gm)].map((match) => match[1] ?? '')
    // A rehearsal has no timestamp: the command for it is shown, and not run here.
    expect(all.filter((command) => command.startsWith('openssl ts '))).toHaveLength(1)
    const commands = all.filter((command) => !command.startsWith('openssl ts '))
    expect(commands).toHaveLength(6)
    const outputs = commands.map((command) => execFileSync('sh', ['-c', command], { cwd: here, encoding: 'utf8' }))
    expect(outputs[0]).not.toContain('FAILED')
    expect(outputs[1]).toContain('Signature Verified Successfully')
    expect(outputs[2]).toContain('Signature Verified Successfully')
    expect(outputs[3]).toContain(archive.fingerprint)
    const seal = archive.members.find(([name]) => name === 'seal.json')?.[1] ?? new Uint8Array()
    expect(outputs[4]).toContain(createHash('sha256').update(seal).digest('hex'))
    writeFileSync(join(here, 'seal.json'), '{}')
    expect(() => execFileSync('sh', ['-c', commands[1] ?? ''], { cwd: here, stdio: 'pipe' })).toThrow()
  })
})
