import { describe, expect, it } from 'vitest'
import {
  addCounts,
  closingLine,
  countCommand,
  countPlaywright,
  countVitest,
  oneFailed,
} from '#server/setup/lib/counts.mjs'
import { readTestOptions } from '#server/setup/lib/test-options.mjs'

const vitest = (...files: Array<{ status: string; tests: string[] }>) =>
  JSON.stringify({
    testResults: files.map(({ status, tests }, i) => ({
      name: `file-${i}`,
      status,
      assertionResults: tests.map((each, j) => ({ status: each, fullName: `test ${j}` })),
    })),
  })
const playwright = (statuses: string[], errors: string[] = []) =>
  JSON.stringify({
    suites: [
      {
        title: 'a.spec.ts',
        specs: [],
        suites: [{ title: 'inner', specs: statuses.map((status, i) => ({ title: `s${i}`, tests: [{ status }] })) }],
      },
    ],
    errors: errors.map((message) => ({ message })),
  })
const figures = ({ passed, failed, skipped }: { passed: number; failed: number; skipped: number }) => [
  passed,
  failed,
  skipped,
]

describe('countVitest', () => {
  it('counts tests, and everything that did not run as skipped', () => {
    const report = vitest(
      { status: 'passed', tests: ['passed', 'passed', 'skipped'] },
      { status: 'failed', tests: ['failed', 'passed', 'todo', 'pending'] },
    )
    const counts = countVitest(report, 1)
    expect(figures(counts)).toEqual([3, 1, 3])
    expect(counts.failures).toEqual(['file-1 > test 0'])
    expect(counts.skippedNames).toContain('file-0 > test 2')
  })
  it('counts a file that could not be loaded, and a hook that failed behind passing tests', () => {
    expect(figures(countVitest(vitest({ status: 'failed', tests: [] }), 1))).toEqual([0, 1, 0])
    expect(figures(countVitest(vitest({ status: 'failed', tests: ['passed'] }), 1))).toEqual([1, 1, 0])
    const both = vitest({ status: 'failed', tests: [] }, { status: 'failed', tests: ['passed'] })
    expect(countVitest(both, 1).failures.map((name) => name.slice(0, 7))).toEqual(['file-0 ', 'file-1 '])
  })
  it('counts a crash: no report, half a report, or a bad exit code behind passing tests', () => {
    expect(figures(countVitest(null, 134))).toEqual([0, 1, 0])
    expect(figures(countVitest('{"testResults": [', 0))).toEqual([0, 1, 0])
    expect(figures(countVitest('{}', 0))).toEqual([0, 1, 0])
    expect(figures(countVitest(vitest({ status: 'passed', tests: ['passed'] }), 1))).toEqual([1, 1, 0])
    expect(figures(countVitest(vitest({ status: 'passed', tests: ['passed'] }), null))).toEqual([1, 1, 0])
  })
  it('does not take a run without a test for a good one', () => {
    expect(figures(countVitest(vitest(), 0))).toEqual([0, 1, 0])
    expect(figures(countVitest(vitest({ status: 'passed', tests: ['skipped'] }), 0))).toEqual([0, 1, 1])
  })
})

describe('countPlaywright', () => {
  it('counts nested suites; a test that passed at a second try has failed', () => {
    const counts = countPlaywright(playwright(['expected', 'unexpected', 'flaky', 'skipped', 'expected']), 1)
    expect(figures(counts)).toEqual([2, 2, 1])
    expect(counts.failures[0]).toBe('a.spec.ts > inner > s1')
  })
  it('counts an error outside any test, such as a stack that does not start', () => {
    expect(figures(countPlaywright(playwright(['skipped'], ['not ready']), 1))).toEqual([0, 1, 1])
  })
  it('counts a crash', () => {
    expect(figures(countPlaywright(null, 1))).toEqual([0, 1, 0])
    expect(figures(countPlaywright(playwright(['expected']), 130))).toEqual([1, 1, 0])
    expect(figures(countPlaywright(playwright([]), 0))).toEqual([0, 1, 0])
  })
})

describe('the closing line', () => {
  it('adds up, and names skipped tests only where there are any', () => {
    const all = addCounts([countCommand('typecheck', 0), countCommand('lint', 2), oneFailed('x')])
    expect(closingLine(all)).toBe('1 passed, 2 failed')
    expect(closingLine({ ...all, skipped: 4 })).toBe('1 passed, 2 failed, 4 skipped')
    expect(closingLine(addCounts([oneFailed('the set-up')]))).toBe('0 passed, 1 failed')
  })
})

describe('readTestOptions', () => {
  it('runs everything, or the parts asked for; a pattern means the parts that have files', () => {
    expect(readTestOptions([]).parts).toEqual(['typecheck', 'lint', 'unit', 'e2e'])
    expect(readTestOptions(['--only', 'unit', 'coin'])).toEqual({ parts: ['unit'], patterns: ['coin'] })
    expect(readTestOptions(['--only=lint', '--only=e2e']).parts).toEqual(['lint', 'e2e'])
    expect(readTestOptions(['coin'])).toEqual({ parts: ['unit', 'e2e'], patterns: ['coin'] })
  })
  it.each([[['--only']], [['--only', 'units']], [['--fast']]])('refuses %j with what it takes', (args) => {
    expect(() => readTestOptions(args)).toThrow(/--only/)
  })
})
