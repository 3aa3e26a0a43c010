import { ArchiveError } from '#shared/archive/archive-error.ts'
import { ARCHIVE_MEMBERS, isKnownMember } from '#shared/archive/members.ts'
import { parseSums, SUMS_MEMBER } from '#shared/archive/sums.ts'
import { toHex } from '#shared/bytes/hex.ts'
import { createEntriesReader } from '#shared/protocol/check/entries-reader.ts'
import { need, StepFailure } from '#shared/protocol/check/failure.ts'
import { type CheckStep, memberBytes, throwIfCancelled } from '#shared/protocol/check/state.ts'

/** Bytes between two tellings of progress. */
const TELL_EVERY = 2 ** 20

/** Step 1: the zip, its members and SHA256SUMS (PROTOCOL section 9). Unpacks everything once. */
export const checkMembers: CheckStep = async (state) => {
  const source = await state.open()
  state.source = source
  const present = new Set(source.names)
  for (const name of ARCHIVE_MEMBERS) {
    if (!present.has(name)) throw new ArchiveError('member-missing', name, `The archive has no ${name}.`)
  }
  const sums = need(parseSums(await memberBytes(state, SUMS_MEMBER)), SUMS_MEMBER)
  for (const name of sums.keys()) {
    if (!present.has(name)) {
      throw new StepFailure('sum-without-member', SUMS_MEMBER, `It names ${name}, which is not in the archive.`)
    }
  }
  const total = source.names.reduce((sum, name) => sum + source.size(name), 0)
  const digests = new Map<string, string>()
  state.digests = digests
  let done = 0
  for (const name of source.names) {
    if (name === SUMS_MEMBER) continue
    const expected = sums.get(name)
    if (expected === undefined) {
      throw new StepFailure('sum-missing', SUMS_MEMBER, `It does not name ${name}, which is in the archive.`)
    }
    const hash = state.tools.createSha256()
    const entries = name === 'entries.csv' ? createEntriesReader(source.size(name)) : null
    let told = done
    for await (const chunk of source.open(name)) {
      hash.update(chunk)
      entries?.push(chunk)
      done += chunk.length
      if (done - told < TELL_EVERY) continue
      told = done
      throwIfCancelled(state)
      state.progress(done, total)
      await state.tools.pause?.()
    }
    const digest = toHex(hash.digest())
    digests.set(name, digest)
    if (digest !== expected) {
      throw new StepFailure('sum-mismatch', name, `${name} does not have the digest in ${SUMS_MEMBER}.`)
    }
    if (entries !== null) state.entries = entries.end()
  }
  state.progress(total, total)
  state.notExamined = [...source.names.filter((name) => !isKnownMember(name)), ...(source.strays ?? [])]
  return `${source.names.length} members, ${total} bytes unpacked, each with the digest that SHA256SUMS states.`
}
