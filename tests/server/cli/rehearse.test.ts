import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { runCheck } from '#server/cli/check/run-check.ts'
import { runRehearse } from '#server/cli/rehearse/run-rehearse.ts'
import { unzipSync } from 'fflate'

let folder = ''
const at = (name: string) => join(folder, name)
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'evenpenny-rehearse-'))
  const rows = Array.from({ length: 40 }, (_, i) => `"Kask, Member ${i}",${1 + (i % 5)},m${i}@club.example,,,`)
  writeFileSync(at('members.csv'), `name,tickets,email,phone,numbers,label\n${rows.join('\n')}\n`)
})
afterAll(() => rmSync(folder, { recursive: true }))

async function run(command: typeof runRehearse | typeof runCheck, ...args: string[]) {
  const lines: string[] = []
  const errors: string[] = []
  const status = await command(args, { out: (l) => void lines.push(l), error: (l) => void errors.push(l) })
  return { status, out: lines.join('\n'), errors: errors.join('\n') }
}

describe('npm run rehearse', () => {
  it.each(['one-prize-each', 'every-ticket'])('holds a whole draw that the check accepts: %s', async (rule) => {
    const out = at(`${rule}.zip`)
    const receipts = at(`receipts-${rule}`)
    const args = ['--entrants', at('members.csv'), '--prizes', '1,2,10', '--reserves', '5', '--out', out]
    const rehearsed = await run(runRehearse, ...args, '--rule', rule, '--receipts', receipts)
    expect(rehearsed.errors).toBe('')
    expect(rehearsed.status).toBe(0)
    expect(rehearsed.out).not.toContain('ended early')
    for (const step of ['import', 'commitments and tree', 'seal', 'draw', 'archive', 'receipts']) {
      expect(rehearsed.out).toMatch(new RegExp(`^${step} +\\d+ ms$`, 'm'))
    }
    expect(readdirSync(receipts)).toHaveLength(40)
    const checked = await run(runCheck, '--test-beacon', out, join(receipts, 'receipt-7.json'))
    expect(checked.status).toBe(0)
    expect(checked.out).toContain('18 picks')

    const members = unzipSync(new Uint8Array(readFileSync(out)))
    const json = (name: string) => JSON.parse(Buffer.from(members[name] ?? []).toString()) as Record<string, unknown>
    expect(json('seal.json')).toMatchObject({
      title: 'Rehearsal, not a draw',
      rule,
      reserves: 5,
      prizes: [{ quantity: 1 }, { quantity: 2 }, { quantity: 10 }],
      entries: { count: 40, tickets: 120 },
    })
    const labels = Buffer.from(members['labels.jsonl'] ?? []).toString()
    // The default label gives no family name and no address away.
    expect(labels).toMatch(/"label":"Member K\."/)
    expect(labels).not.toContain('Kask')
  })

  it('says where there are more prizes than entrants who can win one', async () => {
    const args = ['--entrants', at('members.csv'), '--prizes', '30', '--reserves', '11', '--out', at('early.zip')]
    const early = await run(runRehearse, ...args)
    expect([early.status, early.errors]).toEqual([0, ''])
    expect(early.out).toContain('Rehearsed: 40 picks from 40 entrants')
    expect(early.out).toContain('ended early: it has 41 prizes and reserves')
  })

  it('draws two different lists of winners from the same file', async () => {
    const winners = async (name: string) => {
      await run(runRehearse, '--entrants', at('members.csv'), '--prizes', '10', '--out', at(name))
      const members = unzipSync(new Uint8Array(readFileSync(at(name))))
      return Buffer.from(members['transcript.jsonl'] ?? []).toString()
    }
    expect(await winners('first.zip')).not.toBe(await winners('second.zip'))
  })

  it('refuses a bad file with all its rows, and writes nothing', async () => {
    writeFileSync(at('bad.csv'), 'name,tickets\nRita Voss,0\nUwe Brandt,3\n=cmd,1\n')
    const { status, errors } = await run(
      runRehearse,
      '--entrants',
      at('bad.csv'),
      '--prizes',
      '1',
      '--out',
      at('bad.zip'),
    )
    expect(status).toBe(1)
    expect(errors).toMatch(/^Row 2: it has no tickets/m)
    expect(errors).toMatch(/^Row 4: the name begins with =/m)
    expect(errors).toContain('Nothing was drawn')
    expect(existsSync(at('bad.zip'))).toBe(false)
  })

  it('writes over nothing', async () => {
    writeFileSync(at('there.zip'), 'mine')
    const args = ['--entrants', at('members.csv'), '--prizes', '1', '--out', at('there.zip')]
    const { status, errors } = await run(runRehearse, ...args)
    expect(status).toBe(2)
    expect(errors).toContain('is there already')
    expect(readFileSync(at('there.zip'), 'utf8')).toBe('mine')
  })

  it.each([
    [['--prizes', '1', '--out', 'x.zip'], '--entrants FILE.csv is missing'],
    [['--entrants', 'none.csv', '--prizes', '1', '--out', 'x.zip'], 'There is no none.csv'],
    [['--entrants', 'a.csv', '--prizes', '1,0', '--out', 'x.zip'], '--prizes wants whole numbers from 1'],
    [['--entrants', 'a.csv', '--prizes', '1,,2', '--out', 'x.zip'], '--prizes wants whole numbers from 1'],
    [['--entrants', 'a.csv', '--prizes', '99999', '--reserves', '2', '--out', 'x.zip'], 'at most 100000'],
    [['--entrants', 'a.csv', '--prizes', '1', '--rule', 'any', '--out', 'x.zip'], '--rule is one-prize-each'],
    [['--entrants', 'a.csv', '--prizes', '1', '--out', 'x.zip', '--winner', 'me'], "Unknown option '--winner'"],
  ])('answers wrong usage %j with a sentence and status 2', async (args, sentence) => {
    const { status, errors } = await run(runRehearse, ...args)
    expect(status).toBe(2)
    expect(errors).toContain(sentence)
    expect(errors).toContain('Usage: npm run rehearse')
  })
})
