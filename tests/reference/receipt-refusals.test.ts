// Step 12 of the check: receipts that do not lead to the seal.
import { describe, expect, it } from 'vitest'
import { type Changeable, makeArchive } from './archives.ts'
import { jcs, type Json, utf8 } from './record.ts'
import { base, inside, refusals } from './refusals.ts'

const { file, outcomeOf, step } = refusals()

describe('a receipt', () => {
  const made = makeArchive(base)
  const judged = (bytes: Uint8Array): Promise<string> => step(made.zip, file('receipt.json', bytes))
  const changed = (change: (receipt: Changeable) => void): Buffer => {
    const receipt = JSON.parse(made.receipt(5).toString()) as Changeable
    change(receipt)
    return utf8(jcs(receipt))
  }
  it('of every leaf leads to the seal', async () => {
    const files = made.leaves.map((_, leaf) => file(`every-${leaf}.json`, made.receipt(leaf)))
    const outcome = await outcomeOf(made.zip, ...files)
    expect(outcome.message).toContain('The arithmetic holds')
  })
  const rows: [string, (receipt: Changeable) => void, string][] = [
    ['for another seal', (r) => void (r.seal = '0'.repeat(64)), '12 receipt.json seal'],
    ['with another number on the same side', (r) => void (r.leaf = 7), '12 receipt.json path[1].side'],
    ['for a leaf beyond the list', (r) => void (r.leaf = 12), '12 receipt.json leaf'],
    ['with another ticket count', (r) => void (r.tickets = Number(r.tickets) - 1 || 2), '12 receipt.json path'],
    ['with another label', (r) => void (r.label = 'Somebody else'), '12 receipt.json path'],
    ['with another name', (r) => void (inside(r, 'identity').name = 'Somebody else'), '12 receipt.json path'],
    ['without a name', (r) => void (inside(r, 'identity').name = ''), '12 receipt.json identity.name'],
    [
      'with a bad reference',
      (r) => void (inside(r, 'identity').reference = 'ABCDEFG1'),
      '12 receipt.json identity.reference',
    ],
    ['with a shorter path', (r) => void (r.path as Json[]).pop(), '12 receipt.json path'],
    ['with an unknown member', (r) => void (r.signature = ''), '12 receipt.json'],
    ['of another kind', (r) => void (r.kind = 'proof'), '12 receipt.json'],
  ]
  it.each(rows)('%s fails', async (_, change, where) => {
    expect(await judged(changed(change))).toBe(where)
  })
  it('with a line feed behind it fails', async () => {
    expect(await judged(Buffer.concat([made.receipt(5), utf8('\n')]))).toBe('12 receipt.json')
  })
})
