import { spawn } from 'node:child_process'
import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { halfMadeProblem, inspectPlace, outsidePlace } from '#server/setup/lib/cluster-place.mjs'
import { ensureKeys, KEY_FILES, missingKeysProblem, readKey } from '#server/setup/lib/keys.mjs'
import { markOf, processesIn, startOf, stillRuns } from '#server/setup/lib/processes.mjs'
import { takeRunLock } from '#server/setup/lib/run-lock.mjs'

let folder = ''
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'evenpenny-unit-'))
})
afterEach(() => rmSync(folder, { recursive: true, force: true }))

const put = (name: string, content = '') => {
  mkdirSync(join(folder, name, '..'), { recursive: true })
  writeFileSync(join(folder, name), content)
}

describe('inspectPlace', () => {
  it('tells a missing cluster, a finished one and one that was cut off', () => {
    expect(inspectPlace(folder)).toEqual({ state: 'absent' })
    put('cluster/PG_VERSION', '15\n')
    put('cluster/base/1/112')
    expect(inspectPlace(folder)).toEqual({ state: 'half-made', found: ['PG_VERSION', 'base'] })
    put('made.json', '{"postgresql":15}')
    expect(inspectPlace(folder)).toEqual({ state: 'made', major: 15 })
  })
  it('says what it found and how to move it away, and leaves it where it is', () => {
    put('cluster/PG_VERSION', '15\n')
    const state = inspectPlace(folder)
    const problem = halfMadeProblem(folder, state.state === 'half-made' ? state.found : [])
    expect(problem).toContain('1 entries (PG_VERSION)')
    expect(problem).toContain(`mv ${folder} ${folder}-half-made`)
    expect(existsSync(join(folder, 'cluster/PG_VERSION'))).toBe(true)
  })
  it('gives each data folder a place of its own outside', () => {
    expect(outsidePlace('/a/.data')).not.toBe(outsidePlace('/b/.data'))
    expect(outsidePlace('/a/.data')).toMatch(/^\/var\/lib\/evenpenny-[0-9a-f]{12}$/)
  })
})

describe('ensureKeys', () => {
  it('makes every key once, for this user alone', () => {
    ensureKeys(folder, null)
    const before = Object.keys(KEY_FILES).map((name) => readKey(folder, name))
    expect(new Set(before).size).toBe(before.length)
    for (const name of Object.keys(KEY_FILES)) {
      expect(statSync(join(folder, 'keys', name)).mode & 0o777, name).toBe(0o600)
    }
    expect(statSync(join(folder, 'keys')).mode & 0o777).toBe(0o700)
    ensureKeys(folder, join(folder, 'postgres'))
    expect(Object.keys(KEY_FILES).map((name) => readKey(folder, name))).toEqual(before)
  })
  it('makes no new key beside an old database', () => {
    ensureKeys(folder, null)
    rmSync(join(folder, 'keys', 'encryption-keys'))
    expect(() => ensureKeys(folder, join(folder, 'postgres'))).toThrow(/encryption-keys is missing/)
    expect(existsSync(join(folder, 'keys', 'encryption-keys'))).toBe(false)
  })
  it('says to move the database away too where it lies elsewhere', () => {
    const inside = missingKeysProblem('/home/a/.data', '/home/a/.data/postgres', ['x'])
    expect(inside.match(/^ {2}mv /gm)).toHaveLength(1)
    expect(missingKeysProblem('/home/a/.data', '/var/lib/b', ['x'])).toContain('mv /var/lib/b /var/lib/b-without-keys')
  })
})

describe('takeRunLock', () => {
  const nothing = () => {}
  it('refuses a second start while the first one lives, and names it', async () => {
    const lock = await takeRunLock(folder, nothing)
    await expect(takeRunLock(folder, nothing)).rejects.toThrow(`process ${process.pid} started it`)
    lock.release()
    const again = await takeRunLock(folder, nothing)
    again.release()
    expect(existsSync(join(folder, 'run.lock'))).toBe(false)
  })
  it('takes over from one whose number has gone to another process', async () => {
    put('run.lock', JSON.stringify({ owner: { pid: process.pid, start: '1' }, services: [] }))
    const lock = await takeRunLock(folder, nothing)
    expect(JSON.parse(readFileSync(join(folder, 'run.lock'), 'utf8'))).toMatchObject({ owner: markOf(process.pid) })
    lock.release()
  })
  it('ends services that outlived a killed start, and nobody else', async () => {
    const left = spawn('sleep', ['60'])
    const other = spawn('sleep', ['60'])
    const leftPid = left.pid ?? 0
    const otherPid = other.pid ?? 0
    const ended = new Promise((resolve) => left.once('exit', (_code, signal) => resolve(signal)))
    const services = [markOf(leftPid), { pid: otherPid, start: '1' }]
    put('run.lock', JSON.stringify({ owner: { pid: 1, start: 'never' }, services }))
    const said: string[] = []
    const lock = await takeRunLock(folder, (line: string) => said.push(line))
    expect(await ended).toBe('SIGTERM')
    expect(startOf(otherPid)).not.toBeNull()
    expect(said.join()).toContain('left 1 of its services')
    other.kill()
    lock.release()
  })
})

describe('processes', () => {
  it('knows a process by its number and its start', () => {
    expect(stillRuns(markOf(process.pid))).toBe(true)
    expect(stillRuns({ pid: process.pid, start: '1' })).toBe(false)
    expect(stillRuns({ pid: 2 ** 22 + 1, start: null })).toBe(false)
  })
  it('finds the processes that stand in a folder', async () => {
    const child = spawn('sleep', ['60'], { cwd: folder })
    await new Promise((resolve) => child.once('spawn', resolve))
    expect(processesIn(folder)).toEqual([child.pid])
    child.kill()
  })
})
