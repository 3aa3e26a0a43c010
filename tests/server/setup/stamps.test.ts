import { mkdirSync, mkdtempSync, rmSync, utimesSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import {
  buildDigest,
  buildOutdated,
  packagesOutdated,
  packagesState,
  stampBuild,
  stampPackages,
} from '#server/setup/lib/stamps.mjs'

let root = ''
beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), 'evenpenny-unit-'))
  put('package-lock.json', '{"a":1}', 1000)
})
afterEach(() => rmSync(root, { recursive: true }))

/** Writes a file as of a second of the clock. */
function put(name: string, content: string, second: number) {
  const path = join(root, name)
  mkdirSync(join(path, '..'), { recursive: true })
  writeFileSync(path, content)
  utimesSync(path, second, second)
}
const outdated = () => packagesOutdated(packagesState(root))

describe('packagesOutdated', () => {
  it('wants an installation where there is none, or one that npm did not finish', () => {
    expect(outdated()).toBe(true)
    put('node_modules/react/index.js', '', 2000)
    expect(outdated()).toBe(true)
  })
  it('accepts a finished installation by hand that is newer than the lock, not one that is older', () => {
    put('node_modules/.package-lock.json', '{}', 2000)
    expect(outdated()).toBe(false)
    put('package-lock.json', '{"a":2}', 3000)
    expect(outdated()).toBe(true)
  })
  it('goes by the content of the lock once stamped: a checkout that only touches it costs nothing', () => {
    put('node_modules/.package-lock.json', '{}', 2000)
    stampPackages(root)
    put('package-lock.json', '{"a":1}', 9_000_000_000)
    expect(outdated()).toBe(false)
  })
  it('wants a new installation when the lock changes, even to one with an older time', () => {
    put('node_modules/.package-lock.json', '{}', 2000)
    stampPackages(root)
    put('package-lock.json', '{"a":3}', 500)
    expect(outdated()).toBe(true)
  })
})

describe('buildOutdated', () => {
  beforeEach(() => {
    put('src/entry/client.tsx', 'one', 1000)
    put('build/client/index.js', '', 1000)
    put('build/ssr/server.js', '', 1000)
    put('build/check-page/check.html', '', 1000)
  })
  const build = () => stampBuild(root, buildDigest(root))

  it('wants a build where none was stamped, or where half of one is gone', () => {
    expect(buildOutdated(root)).toBe(true)
    build()
    expect(buildOutdated(root)).toBe(false)
    rmSync(join(root, 'build/ssr'), { recursive: true })
    expect(buildOutdated(root)).toBe(true)
  })
  it('sees a changed, an added, a renamed and a removed source, and no mere touch', () => {
    build()
    put('src/entry/client.tsx', 'one', 5000)
    expect(buildOutdated(root)).toBe(false)
    put('src/entry/client.tsx', 'two', 1000)
    expect(buildOutdated(root)).toBe(true)
    build()
    put('shared/new.ts', '', 1000)
    expect(buildOutdated(root)).toBe(true)
    build()
    rmSync(join(root, 'shared/new.ts'))
    expect(buildOutdated(root)).toBe(true)
    put('shared/renamed.ts', '', 1000)
    expect(buildOutdated(root)).toBe(true)
  })
  it('does not care for what the build is not made from', () => {
    build()
    put('server/app.ts', 'changed', 1000)
    put('README.md', 'changed', 1000)
    expect(buildOutdated(root)).toBe(false)
  })
})
