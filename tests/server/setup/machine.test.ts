import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { createServer, type Server } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { installPlan } from '#server/setup/lib/debian.mjs'
import { nodeVersionProblem } from '#server/setup/lib/node-version.mjs'
import { choosePorts, freePorts, portProblem, portState, PORTS, type Ports } from '#server/setup/lib/ports.mjs'
import { choosePostgres, findPostgres } from '#server/setup/lib/postgres-programs.mjs'
import { readFileSync } from 'node:fs'

describe('nodeVersionProblem', () => {
  it.each(['20.19.0', '20.20.2', '20.100.0'])('takes %s', (version) => {
    expect(nodeVersionProblem(version)).toBeNull()
  })
  it.each([
    ['18.20.4', 'too old'],
    ['20.18.3', 'too old'],
    ['20.9.0', 'too old'],
    ['21.0.0', 'newer'],
    ['22.11.0', 'newer'],
  ])('refuses %s, says that it is %s and which one is wanted', (version, reason) => {
    const problem = nodeVersionProblem(version)
    expect(problem).toContain(`Node.js ${version}`)
    expect(problem).toContain(reason)
    expect(problem).toContain('20.19')
  })
  it('states the range of package.json', () => {
    const { engines } = JSON.parse(readFileSync('package.json', 'utf8')) as { engines: { node: string } }
    expect(engines.node).toBe('>=20.19 <21')
  })
})

describe('installPlan', () => {
  const debian = { root: false, apt: true, sudo: 'none' } as const
  it('uses apt-get itself as root', () => {
    expect(installPlan(['postgresql'], { ...debian, root: true })).toEqual({ prefix: [] })
  })
  it('uses sudo without a question where it may, and with one at a terminal', () => {
    expect(installPlan(['postgresql'], { ...debian, sudo: 'free' })).toEqual({ prefix: ['sudo', '-n'] })
    expect(installPlan(['postgresql'], { ...debian, sudo: 'asks' })).toEqual({ prefix: ['sudo'] })
  })
  it('names every package and the command to run where it may install none', () => {
    const plan = installPlan(['postgresql', 'chromium'], debian)
    expect(plan).toEqual({
      problem: expect.stringContaining('apt-get install -y --no-install-recommends postgresql chromium'),
    })
  })
  it('does not speak of apt-get install where there is no apt-get, even to root', () => {
    const plan = installPlan(['chromium'], { root: true, apt: false, sudo: 'none' })
    expect(plan).toEqual({ problem: expect.stringMatching(/package chromium is needed.*no apt-get/) })
  })
})

describe('findPostgres and choosePostgres', () => {
  let root = ''
  const put = (version: string, programs: string[]) => {
    mkdirSync(join(root, version, 'bin'), { recursive: true })
    for (const program of programs) writeFileSync(join(root, version, 'bin', program), '')
  }
  const all = ['initdb', 'pg_ctl', 'postgres', 'psql', 'createdb']
  beforeEach(() => {
    root = mkdtempSync(join(tmpdir(), 'evenpenny-unit-'))
  })
  afterEach(() => rmSync(root, { recursive: true }))

  it('finds whole installations only, the newest by number first', () => {
    put('9', all)
    put('15', all)
    put('100', all)
    put('17', ['psql'])
    put('notes', all)
    expect(findPostgres(root).map(({ major }) => major)).toEqual([100, 15])
  })
  it('finds none where Debian has put none', () => {
    expect(findPostgres(join(root, 'nowhere'))).toEqual([])
  })
  it('opens a cluster with the version that made it, not with a newer one', () => {
    const found = [
      { major: 17, bin: '/a' },
      { major: 15, bin: '/b' },
    ]
    expect(choosePostgres(found, null, '/data').major).toBe(17)
    expect(choosePostgres(found, 15, '/data').major).toBe(15)
    expect(() => choosePostgres(found, 16, '/data')).toThrow(/made by PostgreSQL 16.*postgresql-16/s)
    expect(() => choosePostgres([], null, '/data')).toThrow(/Install the Debian package postgresql /)
  })
})

describe('ports', () => {
  let server: Server | undefined
  afterEach(() => new Promise<void>((resolve) => (server ? server.close(() => resolve()) : resolve())))

  it('takes the usual ports, and those of the variables instead', () => {
    expect(choosePorts({}).site).toBe(4780)
    expect(choosePorts({ EVENPENNY_PORT: '9001', EVENPENNY_FAKE_S3_PORT: '' })).toMatchObject({ site: 9001, s3: 4782 })
  })
  it.each(['0', '65536', '80a', '-1', '4780.5', ' 4780'])('refuses "%s" as a port, naming the variable', (text) => {
    expect(() => choosePorts({ EVENPENNY_DATABASE_PORT: text })).toThrow(/EVENPENNY_DATABASE_PORT/)
  })
  it('refuses one port for two services', () => {
    expect(() => choosePorts({ EVENPENNY_PORT: '4783' })).toThrow(/4783.*EVENPENNY_PORT or EVENPENNY_FAKE_SMTP_PORT/)
  })
  it('says which port is taken, by which process, and which variable chooses another', async () => {
    const numbers = await freePorts(PORTS.length)
    expect(new Set(numbers).size).toBe(PORTS.length)
    const ports = Object.fromEntries(PORTS.map(({ name }, i) => [name, numbers[i]])) as unknown as Ports
    expect(await portProblem(ports)).toBeNull()
    server = createServer()
    await new Promise<void>((resolve) => server?.listen(ports.beacon, '127.0.0.1', resolve))
    expect(await portState(ports.beacon)).toBe('taken')
    const problem = await portProblem(ports)
    expect(problem?.split('\n')).toHaveLength(1)
    expect(problem).toContain(`Port ${ports.beacon}`)
    expect(problem).toContain(`process ${process.pid}`)
    expect(problem).toContain('EVENPENNY_FAKE_BEACON_PORT')
    expect(await portProblem(ports, (name) => name !== 'beacon')).toBeNull()
  })
  it('sees a listener on all addresses as well', async () => {
    const [port = 0] = await freePorts(1)
    server = createServer()
    await new Promise<void>((resolve) => server?.listen(port, '::', resolve))
    expect(await portState(port)).toBe('taken')
  })
})
