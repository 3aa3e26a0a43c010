import { ArchiveError } from '#shared/archive/archive-error.ts'
import {
  ARCHIVE_MEMBERS,
  isArchiveMember,
  isReplacedMember,
  LATER_MEMBERS,
  type LaterMember,
  LOCKED_MEMBERS,
  type LockedMember,
  memberMethod,
  type ReplacedMember,
} from '#shared/archive/members.ts'
import { digestOf, type StreamingHash, SUMS_MEMBER, sumsBytes } from '#shared/archive/sums.ts'
import type { ZipSource } from '#shared/archive/zip-reader.ts'
import { bytesMember, type PackedZipMember, type ZipMember } from '#shared/archive/zip-writer.ts'

/** Bytes, or something that gives them in pieces, from the start, each time that it is called. */
export type MemberContent = Uint8Array | (() => AsyncIterable<Uint8Array>)

/** A member as the zip writer takes it, packed as `memberMethod` says. */
export function proofMember(name: string, content: MemberContent): ZipMember {
  const method = memberMethod(name)
  return content instanceof Uint8Array ? bytesMember(name, content, method) : { name, method, open: content }
}

/** What the archive under a lock is made of: all its members, and the later ones that there are. */
export type LockedContents = Readonly<
  Record<LockedMember, MemberContent> &
    Partial<Record<LaterMember, MemberContent>> & { [name: ReplacedMember]: MemberContent }
>

/** The members of the archive that is kept under a lock (PROTOCOL section 9), ready for `writeZip`. */
export function lockedMembers(contents: LockedContents): ZipMember[] {
  const replaced = Object.keys(contents)
    .filter(isReplacedMember)
    .sort((left, right) => numberOf(left) - numberOf(right))
  return [...LOCKED_MEMBERS, ...LATER_MEMBERS, ...replaced].flatMap((name) => {
    const content = contents[name]
    return content === undefined ? [] : [proofMember(name, content)]
  })
}

const numberOf = (name: ReplacedMember): number => Number(/\d+/.exec(name)?.[0])

/** A member of a public archive and the digest of its bytes, in hex. */
export interface SummedMember {
  readonly member: ZipMember | PackedZipMember
  readonly digest: string
}

/** Reads a member through once, for its digest. */
export async function sumMember(member: ZipMember, hash: StreamingHash): Promise<SummedMember> {
  return { member, digest: await digestOf(member.open(), hash) }
}

/**
 * The public archive's members in their order, `SHA256SUMS` over all of them at the end, later members (log proofs,
 * timestamps) before it. Throws ArchiveError where a member of the format is missing.
 */
export function publicMembers(members: readonly SummedMember[]): (ZipMember | PackedZipMember)[] {
  const byName = new Map(members.map((summed) => [summed.member.name, summed]))
  const ordered: SummedMember[] = []
  for (const name of ARCHIVE_MEMBERS) {
    if (name === SUMS_MEMBER) continue
    const summed = byName.get(name)
    if (!summed) throw new ArchiveError('member-missing', name, `A proof archive needs ${name}.`)
    ordered.push(summed)
  }
  ordered.push(...members.filter(({ member }) => !isArchiveMember(member.name)))
  const sums = sumsBytes(ordered.map(({ member, digest }) => [member.name, digest]))
  return [...ordered.map(({ member }) => member), proofMember(SUMS_MEMBER, sums)]
}

/**
 * The public archive's members out of the locked archive and the labels that are open today. Members are copied as they
 * are packed; `digests` holds theirs in hex, as they were when the locked archive was written.
 */
export function publicFromLocked(
  locked: ZipSource,
  digests: ReadonlyMap<string, string>,
  labels: SummedMember,
): (ZipMember | PackedZipMember)[] {
  const kept = locked.names.map((name) => {
    const digest = digests.get(name)
    if (digest === undefined) throw new ArchiveError('member-missing', name, `The digest of ${name} is not known.`)
    return { member: locked.packed(name), digest }
  })
  return publicMembers([...kept, labels])
}
