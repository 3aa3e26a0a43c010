import fc from 'fast-check'
import { describe, expect, test } from 'vitest'
import { makeLeaves, root } from '#tests/reference/record.ts'
import { sha256 } from '#server/adapters/hash/sha256.ts'
import { concatBytes, utf8 } from '#shared/bytes/bytes.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { isReference, parseIdentity, referenceFromEntropy } from '#shared/protocol/commitments.ts'
import { duplicateCommit } from '#shared/protocol/duplicate-commit.ts'
import { prepareEntries, type SealEntrant } from '#shared/protocol/entrants.ts'
import { EntriesParser, parseEntries, writeEntries } from '#shared/protocol/entries-csv.ts'

const HEAD = 'tickets,entry_commit\n'
const commit = 'ab'.repeat(32)
const code = (text: string): string => {
  const parsed = parseEntries(utf8(text))
  return parsed.ok ? 'ok' : `${parsed.error.code} ${parsed.error.at}`.trim()
}

describe('entries.csv', () => {
  test('what is written is read back, in chunks of any size', () => {
    fc.assert(
      fc.property(
        fc.array(fc.tuple(fc.integer({ min: 1, max: 2 ** 32 - 1 }), fc.uint8Array({ minLength: 32, maxLength: 32 })), {
          minLength: 1,
          maxLength: 20,
        }),
        fc.integer({ min: 1, max: 50 }),
        (leaves, size) => {
          const tickets = leaves.map(([count]) => count)
          const commits = concatBytes(...leaves.map(([, bytes]) => bytes))
          const file = writeEntries(tickets, commits)
          expect(new TextDecoder().decode(file)).toBe(
            HEAD + leaves.map(([count, bytes]) => `${count},${toHex(bytes)}\n`).join(''),
          )
          const whole = parseEntries(file)
          expect(whole.ok && [Array.from(whole.value.tickets), toHex(whole.value.entryCommits)]).toEqual([
            tickets,
            toHex(commits),
          ])
          const seen: string[] = []
          const parser = new EntriesParser((count, bytes) => seen.push(`${count},${toHex(bytes)}`))
          for (let i = 0; i < file.length; i += size) expect(parser.push(file.subarray(i, i + size))).toBeNull()
          expect(parser.end()).toMatchObject({ ok: true, value: { count: leaves.length } })
          expect(seen).toEqual(leaves.map(([count, bytes]) => `${count},${toHex(bytes)}`))
        },
      ),
      { seed: 31 },
    )
  })
  test.each([
    [`${HEAD}1,${commit}\n`, 'ok'],
    [`${HEAD}4294967295,${commit}\n`, 'ok'],
    ['', 'header-wrong line 1'],
    [HEAD, 'empty line 2'],
    [HEAD.trimEnd(), 'header-wrong line 1'],
    [`\ufeff${HEAD}1,${commit}\n`, 'header-wrong line 1'],
    [`tickets;entry_commit\n1,${commit}\n`, 'header-wrong line 1'],
    [`${HEAD}0,${commit}\n`, 'tickets-out-of-range line 2'],
    [`${HEAD}01,${commit}\n`, 'tickets-out-of-range line 2'],
    [`${HEAD}4294967296,${commit}\n`, 'tickets-out-of-range line 2'],
    [`${HEAD}${'9'.repeat(400)},${commit}\n`, 'tickets-out-of-range line 2'],
    [`${HEAD}-1,${commit}\n`, 'line-wrong line 2'],
    [`${HEAD}+1,${commit}\n`, 'line-wrong line 2'],
    [`${HEAD}1.0,${commit}\n`, 'line-wrong line 2'],
    [`${HEAD}1e3,${commit}\n`, 'line-wrong line 2'],
    [`${HEAD},${commit}\n`, 'line-wrong line 2'],
    [`${HEAD} 1,${commit}\n`, 'line-wrong line 2'],
    [`${HEAD}1, ${commit}\n`, 'line-wrong line 2'],
    [`${HEAD}"1",${commit}\n`, 'line-wrong line 2'],
    [`${HEAD}1,${commit.toUpperCase()}\n`, 'line-wrong line 2'],
    [`${HEAD}1,${commit.slice(1)}\n`, 'line-wrong line 2'],
    [`${HEAD}1,${commit}0\n`, 'line-wrong line 2'],
    [`${HEAD}1,${commit}\r\n`, 'line-wrong line 2'],
    [`${HEAD}1,${commit}`, 'unfinished-line line 2'],
    [`${HEAD}1,${commit}\n2`, 'unfinished-line line 3'],
    [`${HEAD}1,${commit}\n\n`, 'line-wrong line 3'],
    [`${HEAD}1,${commit}\n${HEAD}`, 'line-wrong line 3'],
  ])('%j: %s', (text, expected) => {
    expect(code(text)).toBe(expected)
  })
})

describe('equal commitments', () => {
  test('the first leaf that repeats another is named', () => {
    const leaves = Array.from({ length: 50 }, (_, i) => sha256(Uint8Array.of(i)))
    for (const key of [leaves[1], leaves[2], new Uint8Array(32)] as Uint8Array[]) {
      expect(duplicateCommit(concatBytes(...leaves), key)).toBeNull()
      const twice = leaves.map((leaf, i) => (i === 37 ? leaves[5] : i === 44 ? leaves[6] : leaf)) as Uint8Array[]
      expect(duplicateCommit(concatBytes(...twice), key)).toBe(37)
      // The same bytes at an odd place in memory.
      expect(duplicateCommit(concatBytes(Uint8Array.of(0), ...twice).subarray(1), key)).toBe(37)
    }
  })
})

describe('entrants', () => {
  const entrants = (n: number): SealEntrant[] =>
    Array.from({ length: n }, (_, i) => ({
      label: `Row ${i}, “Ünïted” 🌿`,
      tickets: 1 + (i % 5),
      identity: {
        contact: i % 2 === 0 ? '' : `row${i}@larkwater.example`,
        name: `Name "${i}" \\`,
        numbers: '',
        reference: referenceFromEntropy(sha256(Uint8Array.of(i)).subarray(0, 12)),
      },
    }))
  const key = new Uint8Array(32).fill(5)

  test('leaves, order and root agree with the second implementation', () => {
    const list = entrants(40)
    const prepared = prepareEntries(sha256, key, list)
    if (!prepared.ok) throw new Error(prepared.error.message)
    const leaves = makeLeaves(
      key,
      list.map(({ identity, ...rest }) => ({ ...rest, identity: { ...identity } })),
    )
    expect(toHex(prepared.value.entryCommits)).toBe(leaves.map((leaf) => toHex(leaf.entryCommit)).join(''))
    expect(toHex(prepared.value.tree.root)).toBe(toHex(root(leaves)))
    const references = Array.from(prepared.value.order, (i) => list[i]?.identity.reference as string)
    expect(references).toEqual([...references].sort())
  })

  test.each([
    ['no entrants', () => [], 'too-few'],
    ['tickets 0', () => [{ ...entrants(1)[0], tickets: 0 }], 'tickets-out-of-range'],
    ['tickets 2^32', () => [{ ...entrants(1)[0], tickets: 2 ** 32 }], 'tickets-out-of-range'],
    ['tickets true', () => [{ ...entrants(1)[0], tickets: true }], 'tickets-out-of-range'],
    ['a reference twice', () => [...entrants(3), ...entrants(1)], 'reference-twice'],
    ['an empty label', () => [{ ...entrants(1)[0], label: '' }], 'text-wrong'],
    ['a label over two lines', () => [{ ...entrants(1)[0], label: 'a\nb' }], 'text-wrong'],
    [
      'a reference with a forbidden letter',
      () => [{ ...entrants(1)[0], identity: { ...entrants(1)[0]?.identity, reference: 'ABCDEFGO' } }],
      'reference-wrong',
    ],
  ])('%s cannot be sealed', (_, list, expected) => {
    expect(prepareEntries(sha256, key, list() as SealEntrant[])).toMatchObject({ error: { code: expected } })
  })

  test('references have 8 to 64 characters of their alphabet', () => {
    expect(['23456789', 'ABCDEFGHJKLMNPQRSTUVWXYZ', 'Z'.repeat(64)].every(isReference)).toBe(true)
    expect(
      ['2345678', 'Z'.repeat(65), 'ABCDEFG1', 'ABCDEFG0', 'ABCDEFGI', 'abcdefgh', 'ABCDEFG\n', 12345678].some(
        isReference,
      ),
    ).toBe(false)
    expect(isReference(referenceFromEntropy(Uint8Array.from({ length: 64 }, (_, i) => i * 5)))).toBe(true)
  })

  test.each([
    [{ contact: '', name: 'A', numbers: '', reference: 'ABCDEFGH' }, true],
    [{ contact: '', name: '', numbers: '', reference: 'ABCDEFGH' }, false],
    [{ contact: null, name: 'A', numbers: '', reference: 'ABCDEFGH' }, false],
    [{ contact: '', name: 'A', numbers: 5, reference: 'ABCDEFGH' }, false],
    [{ contact: '', name: 'A', reference: 'ABCDEFGH' }, false],
    [{ contact: '', name: 'A', numbers: '', reference: 'ABCDEFGH', age: 9 }, false],
  ])('identity %j: %s', (identity, fine) => {
    expect(parseIdentity(identity).ok).toBe(fine)
  })
})
