// The parts of the zip format (PKWARE APPNOTE 6.3) that a proof archive uses: no zip64, no encryption, no descriptors.
import { ArchiveError } from '#shared/archive/archive-error.ts'

export const LOCAL_SIGNATURE = 0x04034b50
export const DIRECTORY_SIGNATURE = 0x02014b50
export const END_SIGNATURE = 0x06054b50
export const LOCAL_LENGTH = 30
export const DIRECTORY_LENGTH = 46
export const END_LENGTH = 22

export const STORED = 0
export const DEFLATED = 8
/** Version 2.0, the lowest that knows deflate. */
export const VERSION_NEEDED = 20
/** 1 January 1980, 00:00:00, the first moment that a zip can hold: the same draw gives the same bytes at any time. */
export const FIXED_DATE = 0x0021
export const FIXED_TIME = 0

/** Everything in an archive, unpacked, is at most 1 GiB (PROTOCOL, Limits). */
export const MAX_UNPACKED = 2 ** 30
/** Far more members than any archive has; keeps a hostile directory small. */
export const MAX_MEMBERS = 4096
const MAX_NAME_LENGTH = 120

/** The size, in bytes, of the chunks that streams are read in. */
export const CHUNK_LENGTH = 1 << 16

/** Refuses a member name that could be read as a path or that two systems could read differently (PROTOCOL section 9). */
export function checkMemberName(name: string): void {
  if (!/^[A-Za-z0-9._-]+$/.test(name) || name.length > MAX_NAME_LENGTH || /^\.+$/.test(name)) {
    throw new ArchiveError(
      'member-name',
      name,
      `A member is named ${JSON.stringify(name)}. Names may hold letters, digits, full stop, low line and hyphen only.`,
    )
  }
}

/** Refuses the second of two names that are equal in any letter case. `seen` holds the names before, in lower case. */
export function checkNameIsNew(name: string, seen: Set<string>): void {
  const folded = name.toLowerCase()
  if (seen.has(folded)) {
    throw new ArchiveError('member-doubled', name, `Two members are named ${name}, letter case aside.`)
  }
  seen.add(folded)
}

/** The ASCII bytes of a checked member name. */
export function nameBytes(name: string): Uint8Array {
  return Uint8Array.from(name, (character) => character.charCodeAt(0))
}
