import { createHash, generateKeyPairSync, sign } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { utf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { signCheckpoint } from '#shared/log/checkpoint.ts'
import { buildLogTree, logLeafHash } from '#shared/merkle/rfc9162.ts'
import { watchLog } from '#src/features/check/worker/watch-log.ts'

const sha256 = (bytes: Uint8Array) => new Uint8Array(createHash('sha256').update(bytes).digest())
const { publicKey: keyObject, privateKey } = generateKeyPairSync('ed25519')
const publicKey = new Uint8Array(Buffer.from(keyObject.export({ format: 'jwk' }).x ?? '', 'base64url'))
const ORIGIN = 'draws.example/log'

/** A log of entries `name 0`, `name 1`, …; the first `shared` of them are those of every other log here. */
function log(name: string, size: number, shared = 0) {
  const leaves = Array.from({ length: size }, (_, i) => logLeafHash(sha256, utf8(`${i < shared ? 'all' : name} ${i}`)))
  const head = (at: number) => {
    const checkpoint = { origin: ORIGIN, size: at, root: buildLogTree(sha256, leaves.slice(0, at)).root }
    const key = { publicKey, sign: (message: Uint8Array) => new Uint8Array(sign(null, message, privateKey)) }
    return { checkpoint, note: signCheckpoint(sha256, checkpoint, key) }
  }
  const proof = (first: number, second: number) => buildLogTree(sha256, leaves.slice(0, second)).consistencyProof(first)
  return { head, proof }
}

/** The site, showing a log at a size. */
function site(shown: ReturnType<typeof log>, size: number): typeof fetch {
  return (address) => {
    const url = new URL(String(address), 'http://site.example')
    if (url.pathname === '/log/checkpoint.txt') return Promise.resolve(new Response(shown.head(size).note))
    const [first, second] = ['first', 'second'].map((name) => Number(url.searchParams.get(name)))
    if (first === undefined || second !== size || first > size)
      return Promise.resolve(new Response('', { status: 400 }))
    const path = shown.proof(first, second).map(toHex)
    return Promise.resolve(new Response(JSON.stringify({ first, second, path })))
  }
}

/** Its first 20 entries stand in the forked log below as well. */
const honest = log('honest', 40, 20)
const watch = (archivedSize: number, remembered: string | null, request: typeof fetch) =>
  watchLog({ sha256, publicKey, archived: honest.head(archivedSize), remembered, request })

describe('the log beside what was seen of it', () => {
  it('is proven to have grown from the archive’s head and from the one remembered, and is then remembered', async () => {
    const { lines, evidence, remember } = await watch(13, honest.head(29).note, site(honest, 40))
    expect(lines.map(({ alarm }) => alarm)).toEqual([false, false])
    expect(lines[0]?.words).toContain('only grew, from 13 entries to 40')
    expect(lines[1]?.words).toContain('only grew, from 29 entries to 40')
    expect(evidence).toEqual([])
    expect(remember).toBe(honest.head(40).note)
  })

  it('raises the alarm for a log that was wound back, and goes on remembering the longer one', async () => {
    const { lines, evidence, remember } = await watch(13, honest.head(29).note, site(honest, 20))
    expect(lines.map(({ alarm }) => alarm)).toEqual([false, true])
    expect(lines[1]?.words).toContain('wound back')
    expect(evidence).toEqual([honest.head(29).note, honest.head(20).note])
    expect(remember).toBeNull()
  })

  it('raises the alarm for a fork, longer or of the same size', async () => {
    const fork = log('forked', 40, 20)
    const longer = await watch(13, honest.head(29).note, site(fork, 40))
    expect(longer.lines.map(({ alarm }) => alarm)).toEqual([false, true])
    expect(longer.lines.at(-1)).toMatchObject({ alarm: true, words: expect.stringContaining('forked') })
    expect(longer.remember).toBeNull()
    const same = await watch(40, null, site(fork, 40))
    expect(same.lines).toEqual([{ alarm: true, words: expect.stringContaining('another root') }])
    expect(same.evidence).toHaveLength(2)
  })

  it('compares nothing with a head that another key signed, and remembers nothing of it', async () => {
    const stranger = new Uint8Array(
      Buffer.from(generateKeyPairSync('ed25519').publicKey.export({ format: 'jwk' }).x ?? '', 'base64url'),
    )
    const { lines, remember } = await watchLog({
      sha256,
      publicKey: stranger,
      archived: null,
      remembered: null,
      request: site(honest, 40),
    })
    expect(lines).toEqual([{ alarm: false, words: expect.stringContaining('not signed by the key') }])
    expect(remember).toBeNull()
  })

  it('says so where the site cannot be reached or gives no proof, and never takes that for an alarm', async () => {
    const dead: typeof fetch = () => Promise.reject(new TypeError('failed'))
    expect(await watch(13, null, dead)).toMatchObject({ evidence: [], remember: null, lines: [{ alarm: false }] })
    const mute: typeof fetch = (address) =>
      String(address).includes('checkpoint')
        ? site(honest, 40)(address)
        : Promise.resolve(new Response('', { status: 503 }))
    expect(await watch(13, null, mute)).toMatchObject({ evidence: [], remember: null, lines: [{ alarm: false }] })
  })

  it('takes a site that knows of no proof for forked', async () => {
    const without: typeof fetch = (address) =>
      String(address).includes('checkpoint')
        ? site(honest, 40)(address)
        : Promise.resolve(new Response('', { status: 404 }))
    expect((await watch(13, null, without)).lines).toEqual([{ alarm: true, words: expect.stringContaining('forked') }])
  })

  it('takes a proof that is none for a fork', async () => {
    const junk: typeof fetch = (address) =>
      String(address).includes('checkpoint')
        ? site(honest, 40)(address)
        : Promise.resolve(new Response('{"path":["zz"]}'))
    expect((await watch(13, null, junk)).lines).toEqual([{ alarm: true, words: expect.stringContaining('forked') }])
  })

  it('takes a first head as the first', async () => {
    const parts = { sha256, publicKey, archived: null, remembered: null, request: site(honest, 40) }
    const { lines, remember } = await watchLog(parts)
    expect(lines).toEqual([{ alarm: false, words: expect.stringContaining('first checkpoint') }])
    expect(remember).toBe(honest.head(40).note)
  })
})
