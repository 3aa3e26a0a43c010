/** The members of a proof archive (PROTOCOL section 9), in the order in which we write them. */
export const ARCHIVE_MEMBERS = [
  'CHECKING.txt',
  'seal.json',
  'seal.sig',
  'terms.txt',
  'entries.csv',
  'result.json',
  'result.sig',
  'transcript.jsonl',
  'labels.jsonl',
  'site-key.pem',
  'check.mjs',
  'bls12-381.mjs',
  'SHA256SUMS',
] as const

export type ArchiveMember = (typeof ARCHIVE_MEMBERS)[number]

/** What is put together anew whenever the archive is asked for, so that a name can be withdrawn. */
export const UNLOCKED_MEMBERS = ['labels.jsonl', 'SHA256SUMS'] as const satisfies readonly ArchiveMember[]
export type UnlockedMember = (typeof UNLOCKED_MEMBERS)[number]

/** What is kept for good, under a lock. */
export type LockedMember = Exclude<ArchiveMember, UnlockedMember>
export const LOCKED_MEMBERS = ARCHIVE_MEMBERS.filter((name): name is LockedMember => !isUnlocked(name))

/**
 * Members that an archive may have besides, in the order in which we write them: the head of the site's log and what the
 * log says of the draw; a head from before the draw that outside witnesses cosigned, with the path of the seal's entry;
 * the seal's timestamp; the seals that were replaced. Archives from before they were added have none.
 */
export const LATER_MEMBERS = [
  'checkpoint.txt',
  'log-proof.json',
  'witnessed.txt',
  'witnessed-proof.json',
  'seal.tsr',
  'replaced.json',
] as const
export type LaterMember = (typeof LATER_MEMBERS)[number]

/** A seal that was replaced, its signature and its timestamp; numbers from 1, oldest first. */
export type ReplacedMember = `replaced-${number}.${'json' | 'sig' | 'tsr'}`

/** Whether a name is that of a file of a replaced seal. */
export const isReplacedMember = (name: string): name is ReplacedMember =>
  /^replaced-[1-9][0-9]{0,3}\.(?:json|sig|tsr)$/.test(name)

/** Whether this version reads a member of this name, needed or not. */
export function isKnownMember(name: string): boolean {
  return isArchiveMember(name) || (LATER_MEMBERS as readonly string[]).includes(name) || isReplacedMember(name)
}

/** Whether a name is that of a member which every archive has. */
export function isArchiveMember(name: string): name is ArchiveMember {
  return (ARCHIVE_MEMBERS as readonly string[]).includes(name)
}

/** How a member is packed: signatures do not shrink, and `openssl` users may want them at a glance. */
export function memberMethod(name: string): 'stored' | 'deflated' {
  return name.endsWith('.sig') ? 'stored' : 'deflated'
}

function isUnlocked(name: ArchiveMember): name is UnlockedMember {
  return (UNLOCKED_MEMBERS as readonly string[]).includes(name)
}
