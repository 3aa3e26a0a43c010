import { createHash } from 'node:crypto'
import { unzipSync } from 'fflate'
import { expect, it } from 'vitest'
import { createSha256 } from '#server/adapters/archive/check-tools.ts'
import { memorySource } from '#shared/archive/byte-source.ts'
import { ARCHIVE_MEMBERS, LOCKED_MEMBERS, type LockedMember } from '#shared/archive/members.ts'
import {
  lockedMembers,
  proofMember,
  publicFromLocked,
  publicMembers,
  type SummedMember,
  sumMember,
} from '#shared/archive/proof-archive.ts'
import { parseSums } from '#shared/archive/sums.ts'
import { openZip } from '#shared/archive/zip-reader.ts'
import { writeZip } from '#shared/archive/zip-writer.ts'
import { utf8 } from '#shared/bytes/bytes.ts'
import { collect } from '#tests/support/archive/collect.ts'

const contents = Object.fromEntries(LOCKED_MEMBERS.map((name) => [name, utf8(`content of ${name}`)])) as Record<
  LockedMember,
  Uint8Array
>
const digest = (bytes: Uint8Array) => createHash('sha256').update(bytes).digest('hex')

it('locks everything but the labels and the sums', () => {
  expect(ARCHIVE_MEMBERS.filter((name) => !(LOCKED_MEMBERS as readonly string[]).includes(name))).toEqual([
    'labels.jsonl',
    'SHA256SUMS',
  ])
  expect(lockedMembers(contents).map(({ name }) => name)).toEqual(LOCKED_MEMBERS)
})

it('puts the public archive together from the locked one and the labels that are open today', async () => {
  const locked = await openZip(memorySource(await collect(writeZip(lockedMembers(contents)))))
  const digests = new Map(LOCKED_MEMBERS.map((name) => [name as string, digest(contents[name])]))
  const open = async (labels: string) => {
    const summed = await sumMember(proofMember('labels.jsonl', utf8(labels)), createSha256())
    return unzipSync(await collect(writeZip(publicFromLocked(locked, digests, summed))))
  }
  const before = await open('{"label":"Marta Q."}\n')
  const after = await open('')
  expect(Object.keys(before)).toEqual(ARCHIVE_MEMBERS)
  for (const name of LOCKED_MEMBERS) expect(after[name]).toEqual(contents[name])
  expect(after['labels.jsonl']).toHaveLength(0)
  for (const members of [before, after]) {
    const sums = parseSums(members['SHA256SUMS'] ?? new Uint8Array())
    expect(sums.ok && [...sums.value]).toEqual(
      Object.entries(members)
        .filter(([name]) => name !== 'SHA256SUMS')
        .map(([name, bytes]) => [name, digest(bytes)]),
    )
  }
})

it('refuses an archive that lacks a member, and puts later members before the sums', async () => {
  const summed: SummedMember[] = []
  for (const member of [...lockedMembers(contents), proofMember('labels.jsonl', utf8(''))]) {
    summed.push(await sumMember(member, createSha256()))
  }
  expect(() => publicMembers(summed.slice(1))).toThrow(expect.objectContaining({ code: 'member-missing' }))
  const later = await sumMember(proofMember('timestamp.tsr', utf8('x')), createSha256())
  const names = publicMembers([later, ...summed]).map(({ name }) => name)
  expect(names.slice(-2)).toEqual(['timestamp.tsr', 'SHA256SUMS'])
})
