import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { localEnvironment, ownServicesProblem, testEnvironment } from '#server/setup/lib/environment.mjs'
import { readLogLine } from '#server/setup/lib/log-lines.mjs'
import { startService, waitReady } from '#server/setup/lib/service.mjs'
import { interruption } from '#server/setup/lib/signals.mjs'
import { welcome } from '#server/setup/lib/welcome.mjs'

const ports = { site: 1, database: 2, s3: 3, smtp: 4, mailPage: 5, beacon: 6, timestamp: 7 }

describe('readLogLine', () => {
  it('shows warnings and errors with the reason, and keeps the rest in the file', () => {
    expect(readLogLine('{"level":30,"msg":"listening"}', false)).toBeNull()
    expect(readLogLine('{"level":40,"msg":"slow"}', false)).toBe('warning: slow')
    expect(readLogLine('{"level":50,"msg":"no mail","err":{"message":"refused"}}', false)).toBe(
      'error: no mail (refused)',
    )
    expect(readLogLine('plain words', false)).toBeNull()
    expect(readLogLine('TypeError: x', true)).toBe('TypeError: x')
    expect(readLogLine('{"level":', true)).toBe('{"level":')
  })
})

describe('interruption', () => {
  it('takes the signal that npm passes on for the same press, and a later one for a second', async () => {
    let now = 0
    const calls: string[] = []
    const { interrupted, receive, isInterrupted } = interruption({
      onFirst: (signal: string) => calls.push(signal),
      onSecond: () => calls.push('second'),
      now: () => now,
    })
    expect(isInterrupted()).toBe(false)
    receive('SIGINT')
    now = 20
    receive('SIGINT')
    expect(calls).toEqual(['SIGINT'])
    now = 3000
    receive('SIGINT')
    expect(calls).toEqual(['SIGINT', 'second'])
    expect(isInterrupted()).toBe(true)
    await expect(interrupted).rejects.toThrow('SIGINT')
  })
})

describe('environments', () => {
  it('refuses services of one’s own in npm start, by name', () => {
    expect(ownServicesProblem({ EVENPENNY_DATABASE_URL: 'postgres://x' })).toMatch(
      /^EVENPENNY_DATABASE_URL is set.*docs\/production\.md/,
    )
    expect(ownServicesProblem({ EVENPENNY_PORT: '1' })).toBeNull()
  })
  it('gives the services their addresses, and nothing of npm’s or of psql’s', () => {
    const base = { PATH: '/bin', npm_config_x: '1', PGHOST: 'elsewhere', NODE_ENV: 'test' }
    const env = localEnvironment({ base, data: '/d', ports, databaseUrl: 'postgres://y', dev: false })
    expect(env).toMatchObject({ PATH: '/bin', NODE_ENV: 'production', EVENPENNY_LOCAL: 'yes', EVENPENNY_PORT: '1' })
    expect(Object.keys(env)).not.toContain('PGHOST')
    expect(Object.keys(env)).not.toContain('npm_config_x')
    expect(env.EVENPENNY_DEV).toBeUndefined()
    // The name and value that @aws-sdk/core reads.
    expect(env.AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED).toBe('true')
  })
  it('keeps a real service’s address out of the tests', () => {
    expect(testEnvironment({ HOME: '/h', EVENPENNY_DATABASE_URL: 'postgres://real', PGPASSWORD: 'x' })).toEqual({
      HOME: '/h',
      NO_COLOR: '1',
      AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
    })
  })
})

describe('welcome', () => {
  it('says where to open the site and the mail, and lines the sign-ins up', () => {
    const signIns = [
      { role: 'promoter', name: 'A', email: 'a@one.example', password: 'pw', organisation: 'One' },
      { role: 'administrator', name: 'B', email: 'b@site.example', password: 'longer', organisation: null },
    ]
    const now = new Date('2026-05-01T10:00:00Z')
    const text = welcome({ data: '.data', ports, signIns, nextDraw: null, now })
    expect(text).toContain('http://localhost:1/')
    expect(text).toContain('http://localhost:5/')
    expect(text).toContain('  promoter       a@one.example   pw        A     One\n')
    expect(text).not.toContain('Watch it')
    expect(welcome({ data: '.data', ports, signIns: [], nextDraw: null, now })).not.toContain('sign-ins')
  })
  it('sends a newcomer to the demo draw while it is still to come, and not to one that is past or far', () => {
    const said = (drawAt: string) =>
      welcome({
        data: '.data',
        ports,
        signIns: [],
        nextDraw: { title: 'Kettle draw', slug: 'kettle-draw', drawAt },
        now: new Date('2026-05-01T10:00:00Z'),
      })
    expect(said('2026-05-01T10:02:40Z')).toContain(
      'A demo draw is drawn by itself in about 3 minutes: Kettle draw. Watch it at\n  http://localhost:1/draws/kettle-draw\n',
    )
    expect(said('2026-05-01T10:00:20Z')).toContain('in less than a minute')
    expect(said('2026-05-01T09:59:59Z')).not.toContain('Watch it')
    expect(said('2026-05-01T10:10:00Z')).not.toContain('Watch it')
  })
})

describe('startService', () => {
  let folder = ''
  beforeEach(() => {
    folder = mkdtempSync(join(tmpdir(), 'evenpenny-unit-'))
  })
  afterEach(() => rmSync(folder, { recursive: true }))
  const start = (script: string, troubles: string[] = []) =>
    startService({
      name: 'worker',
      args: ['-e', script],
      cwd: folder,
      env: process.env,
      logFile: join(folder, 'worker.log'),
      onTrouble: (line: string) => troubles.push(line),
    })

  it('becomes ready by its line, shows trouble, logs everything and stops when asked', async () => {
    const troubles: string[] = []
    const service = start(
      `process.on('SIGTERM', () => { console.log('bye'); process.exit(0) }); setInterval(() => {}, 1000)
       console.log('{"level":50,"msg":"bad"}'); console.log('{"level":30,"msg":"worker ready"}')`,
      troubles,
    )
    await waitReady(service, service.sawLine('worker ready'), 10_000)
    await service.stop(10_000)
    expect(await service.ended).toBe('with exit code 0')
    expect(troubles).toEqual(['error: bad'])
    expect(service.tail().at(-1)).toBe('bye')
    expect(readFileSync(join(folder, 'worker.log'), 'utf8')).toContain('worker ready')
  })
  it('reports a service that dies before it is ready, with its last words', async () => {
    const service = start(`console.error('cannot reach the database'); process.exit(3)`)
    const ready = waitReady(service, service.sawLine('worker ready'), 10_000)
    await expect(ready).rejects.toThrow(/worker ended with exit code 3.*cannot reach the database/s)
  })
  it('kills one that does not stop in time', async () => {
    const service = start(`process.on('SIGTERM', () => {}); console.log('worker ready'); setInterval(() => {}, 1000)`)
    await waitReady(service, service.sawLine('worker ready'), 10_000)
    await service.stop(200)
    expect(await service.ended).toBe('by SIGKILL')
  })
})
