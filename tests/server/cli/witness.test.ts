import { type ChildProcess, execFile, execFileSync, spawn } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'
import { promisify } from 'node:util'
import { asc, eq } from 'drizzle-orm'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { readCheckFiles } from '#server/adapters/archive/check-files.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { postponeDraw } from '#server/commands/draws/postpone-draw.ts'
import { goOn } from '#server/jobs/crash-points.ts'
import { cosignCheckpoints, cosigningIsDue } from '#server/jobs/cosign-checkpoints.ts'
import { settleDraw } from '#server/jobs/settle-draw.ts'
import { storeArchive } from '#server/jobs/store-archive.ts'
import { storeCheckpoints } from '#server/jobs/store-checkpoints.ts'
import { createServices, type OpenServices } from '#server/services.ts'
import { createTimestamper } from '#server/adapters/timestamp/timestamper.ts'
import { draw } from '#server/store/schema/draw.ts'
import { logEvent, logWitness } from '#server/store/schema/record.ts'
import { localFromInstant } from '#server/time/local-time.ts'
import { unwrap } from '#shared/bytes/result.ts'
import { addCheckpointBody } from '#shared/log/add-checkpoint.ts'
import { logKey, logOrigin, signCheckpoint } from '#shared/log/checkpoint.ts'
import { formatVkey, noteKey, parseVkey } from '#shared/log/signed-note.ts'
import { buildLogTree, logLeafHash } from '#shared/merkle/rfc9162.ts'
import { makeOffice, makeSealed, type Office, versionOf } from '#tests/support/draws.ts'
import { checkPublicArchive } from '#tests/support/public-archive.ts'
import { settableClock, startTestSite, type TestSite } from '#tests/support/site.ts'

const ROOT = fileURLToPath(new URL('../../..', import.meta.url))
const run = promisify(execFile)

// The site's log, and the witness as another organisation runs it: a process of its own.
const clock = settableClock(new Date())
let folder: string
let site: TestSite
let services: OpenServices
let office: Office
let witness: { readonly process: ChildProcess; readonly vkey: string; readonly url: string }

async function startWitness(args: readonly string[] = []) {
  const origin = logOrigin(site.config.origin)
  const log = formatVkey(logKey(sha256, origin, site.services.signing.current.publicKey))
  const files = ['--key', join(folder, 'witness.pem'), '--state', join(folder, 'state.json')]
  const process_ = spawn(
    process.execPath,
    [
      '--import',
      'tsx',
      'server/cli/witness.ts',
      ...files,
      '--name',
      'lantern.example',
      '--log',
      log,
      '--listen',
      '0',
      ...args,
    ],
    { cwd: ROOT, stdio: ['ignore', 'pipe', 'inherit'] },
  )
  const said: string[] = []
  const url = await new Promise<string>((resolve, reject) => {
    process_.once('exit', () => reject(new Error(said.join('\n'))))
    createInterface({ input: process_.stdout }).on('line', (line) => {
      said.push(line)
      const [, listening] = /^It listens at (\S+)\/add-checkpoint$/.exec(line) ?? []
      if (listening) resolve(listening)
    })
  })
  const vkey = said.map((line) => /^The witness's key: (\S+)$/.exec(line)?.[1]).find((found) => found !== undefined)
  return { process: process_, vkey: vkey ?? '', url }
}

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'evenpenny-witness-'))
  execFileSync('openssl', ['genpkey', '-algorithm', 'ed25519', '-out', join(folder, 'witness.pem')])
  site = await startTestSite({ clock })
  witness = await startWitness()
  const key = unwrap(parseVkey(sha256, witness.vkey))
  services = createServices(
    { ...site.config, witnesses: [{ key, url: witness.url }] },
    { name: 'evenpenny witnessed', clock, timestamps: createTimestamper({ ...site.config.timestamps, clock }) },
  )
  office = await makeOffice(services, { demo: true })
}, 90_000)
afterAll(async () => {
  witness.process.kill('SIGTERM')
  await services.close()
  await site.close()
  rmSync(folder, { recursive: true, force: true })
})

const post = async (body: string) => {
  const response = await fetch(`${witness.url}/add-checkpoint`, { method: 'POST', body })
  return { status: response.status, type: response.headers.get('content-type'), body: await response.text() }
}
/** The log's leaves, and a head over some of them, signed by the site's own key. */
const leavesOfLog = async () =>
  (await services.db.select({ leaf: logEvent.leaf }).from(logEvent).orderBy(asc(logEvent.index))).map(
    ({ leaf }) => leaf,
  )
const treeOf = (leaves: readonly Uint8Array[]) =>
  buildLogTree(
    sha256,
    leaves.map((leaf) => logLeafHash(sha256, leaf)),
  )
const noteOf = (leaves: readonly Uint8Array[], origin = logOrigin(site.config.origin)) =>
  signCheckpoint(
    sha256,
    { origin, size: leaves.length, root: Uint8Array.from(treeOf(leaves).root) },
    site.services.signing.current,
  )
const seenSize = async () =>
  Number(
    /^(\d+)\n$/.exec(
      (await post(addCheckpointBody({ oldSize: 99_000, proof: [], note: noteOf(await longer()) }))).body,
    )?.[1],
  )
/** Leaves enough that any old size passes. */
const longer = async () => [...(await leavesOfLog()), ...Array.from({ length: 100_000 }, () => new Uint8Array(1))]

describe('an outside witness of the site’s log', () => {
  let id: string
  it('cosigns its checkpoints as they come, each from the last one on', async () => {
    id = await makeSealed(services, office, { title: 'Witnessed' })
    await storeCheckpoints(services)
    expect(await cosigningIsDue(services)).toBe(true)
    expect(await cosignCheckpoints(services)).toBe(1)
    expect(await cosigningIsDue(services)).toBe(false)
    await makeSealed(services, office, { title: 'Another' })
    await storeCheckpoints(services)
    expect(await cosignCheckpoints(services)).toBe(1)
    expect(await cosignCheckpoints(services)).toBe(0)
    const [state] = await services.db.select().from(logWitness)
    expect(state).toMatchObject({ ok: true, witness: witness.vkey })
    expect(state?.size).toBe(await seenSize())
  })

  it('says which size it knows to whoever states another, and the site goes on from there', async () => {
    await services.db.update(logWitness).set({ size: 0 })
    await makeSealed(services, office, { title: 'Forgotten' })
    await storeCheckpoints(services)
    const leaves = await leavesOfLog()
    const answer = await post(addCheckpointBody({ oldSize: 0, proof: [], note: noteOf(leaves) }))
    expect(answer).toMatchObject({ status: 409, type: 'text/x.tlog.size', body: expect.stringMatching(/^[1-9]\d*\n$/) })
    expect(await cosignCheckpoints(services)).toBe(1)
  })

  it('refuses a log that was forked, or wound back, however well it is signed, and goes on with the real one', async () => {
    const size = await seenSize()
    const leaves = await leavesOfLog()
    const forged = [...leaves.slice(0, size - 1), new TextEncoder().encode('another story'), ...leaves.slice(size - 1)]
    const proof = treeOf(forged).consistencyProof(size)
    expect(await post(addCheckpointBody({ oldSize: size, proof, note: noteOf(forged) }))).toMatchObject({
      status: 422,
      body: 'The proof does not show that the log only grew.\n',
    })
    const sameSize = forged.slice(0, size)
    expect(await post(addCheckpointBody({ oldSize: size, proof: [], note: noteOf(sameSize) }))).toMatchObject({
      status: 409,
      body: 'A checkpoint of this size with another root was cosigned.\n',
    })
    const shorter = leaves.slice(0, size - 1)
    expect(await post(addCheckpointBody({ oldSize: size, proof: [], note: noteOf(shorter) }))).toMatchObject({
      status: 400,
    })
    expect(await post(addCheckpointBody({ oldSize: size - 1, proof: [], note: noteOf(shorter) }))).toMatchObject({
      status: 409,
      body: `${size}\n`,
    })
    expect(await seenSize()).toBe(size)
    const real = treeOf(leaves).consistencyProof(size)
    const good = await post(addCheckpointBody({ oldSize: size, proof: real, note: noteOf(leaves) }))
    expect(good).toMatchObject({
      status: 200,
      body: expect.stringMatching(/^\u2014 lantern\.example [A-Za-z0-9+/=]+\n$/),
    })
  })

  it('refuses what is not signed by the log, another log, and nonsense', async () => {
    const leaves = await leavesOfLog()
    const note = noteOf(leaves)
    const unsigned = note.replace(/(.)(.{40}\n)$/, (_, one: string, rest: string) => (one === 'A' ? 'B' : 'A') + rest)
    expect(unsigned).not.toBe(note)
    expect((await post(addCheckpointBody({ oldSize: 0, proof: [], note: unsigned }))).status).toBe(403)
    expect(
      (await post(addCheckpointBody({ oldSize: 0, proof: [], note: noteOf(leaves, 'elsewhere.example/log') }))).status,
    ).toBe(404)
    for (const body of [
      '',
      'old 1',
      `old 01\n\n${note}`,
      `old -1\n\n${note}`,
      `old 0\nnot base64\n\n${note}`,
      `old 0\n${note}`,
    ]) {
      expect((await post(body)).status, body.slice(0, 20)).toBe(400)
    }
    expect((await post('x'.repeat(70_000))).status).toBe(413)
    expect((await fetch(`${witness.url}/add-checkpoint`)).status).toBe(405)
    expect((await fetch(`${witness.url}/elsewhere`, { method: 'POST' })).status).toBe(404)
  })

  it('cosigns one of several that ask at once from the same size, and remembers it over a restart', async () => {
    const leaves = await leavesOfLog()
    const size = await seenSize()
    const grown = [1, 2, 3].map((more) => [...leaves, ...Array.from({ length: more }, () => Uint8Array.of(more))])
    const answers = await Promise.all(
      grown.map((one) =>
        post(addCheckpointBody({ oldSize: size, proof: treeOf(one).consistencyProof(size), note: noteOf(one) })),
      ),
    )
    expect(answers.map(({ status }) => status).sort()).toEqual([200, 409, 409])
    const before = await seenSize()
    witness.process.kill('SIGTERM')
    await new Promise((resolve) => witness.process.once('exit', resolve))
    const state = JSON.parse(readFileSync(join(folder, 'state.json'), 'utf8')) as Record<string, { size: number }>
    expect(state[logOrigin(site.config.origin)]?.size).toBe(before)
    writeFileSync(join(folder, 'state.json'), '{"broken')
    await expect(startWitness()).rejects.toThrow()
    // What this test made the witness cosign was no log of the site's: start it anew with nothing seen.
    rmSync(join(folder, 'state.json'))
    const { port } = new URL(witness.url)
    witness = await startWitness(['--listen', port])
    expect(await seenSize()).toBe(0)
  }, 60_000)

  it('makes the archive’s verdict "shown" in both checks, to whoever trusts its key', async () => {
    await services.db.update(logWitness).set({ ok: true, size: 0 })
    const version = await versionOf(services, id)
    const [row] = await services.db.select().from(draw).where(eq(draw.id, id))
    const drawAt = new Date((row?.drawAt.getTime() ?? 0) + 3600_000)
    const postponed = { draw: id, version, reason: 'Snow.', drawAt: localFromInstant(drawAt, 'Europe/London') }
    await postponeDraw(services, office.promoter, postponed)
    await storeCheckpoints(services)
    expect(await cosignCheckpoints(services)).toBe(1)
    clock.set(new Date(drawAt.getTime() + 4000))
    expect(await settleDraw(services, goOn, { draw: id })).toEqual({ kind: 'drawn' })
    expect(await storeArchive(services, goOn, { draw: id })).toBe('stored')
    const keep = join(folder, 'proof.zip')
    const witnesses = [unwrap(parseVkey(sha256, witness.vkey))]
    const report = await checkPublicArchive(site, id, [], { witnesses, allowDevelopmentAuthority: true, keep })
    expect(report).toMatchObject({
      ok: true,
      verdict: {
        sealedInTime: {
          shown: true,
          by: [
            { kind: 'timestamp', name: 'Development timestamps - worthless', development: true },
            { kind: 'witness', name: 'lantern.example', development: false },
          ],
        },
        notExamined: [],
      },
    })
    const stranger = noteKey(sha256, 'lantern.example', 4, site.services.signing.current.publicKey)
    expect(await checkPublicArchive(site, id, [], { witnesses: [stranger] })).toMatchObject({
      ok: true,
      verdict: { sealedInTime: { shown: false } },
    })
    for (const [name, bytes] of Object.entries(await readCheckFiles())) writeFileSync(join(folder, name), bytes)
    const args = [join(folder, 'check.mjs'), '--test-beacon', '--witness', witness.vkey, keep]
    const { stdout } = await run(process.execPath, args, { cwd: ROOT }).catch((error: { stdout: string }) => error)
    expect(stdout).toMatch(/Sealed in time: shown by the cosignature of the witness lantern\.example at 20/)
    expect(stdout).toContain('1 seal was replaced before this one.')
    const unzip = ['-Z1', keep]
    const names = execFileSync('unzip', unzip, { encoding: 'utf8' }).trim().split('\n')
    expect(names).toEqual(
      expect.arrayContaining(['seal.tsr', 'witnessed.txt', 'witnessed-proof.json', 'replaced.json', 'replaced-1.tsr']),
    )
  })
})

describe('the command line of a witness', () => {
  it.each([
    [[], /Give --key and --name/],
    [['--key', 'none.pem', '--name', 'x.example'], /Say with --log which log to follow/],
    [['--key', 'none.pem', '--name', 'x.example', '--log', 'x'], /There is no key none\.pem/],
    [['--nonsense'], /nonsense/],
  ])('%j is refused with the usage', async (args, words) => {
    const done = await run(process.execPath, ['--import', 'tsx', 'server/cli/witness.ts', ...args], {
      cwd: ROOT,
    }).catch((error: { code: number; stderr: string }) => error)
    expect(done).toMatchObject({ code: 2, stderr: expect.stringMatching(words) })
    expect(done.stderr).toContain('Usage: npm run witness')
  })
})
