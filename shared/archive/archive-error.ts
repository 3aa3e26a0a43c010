/** Why an archive is refused before anything in it is read (PROTOCOL section 9). A closed list. */
export type ArchiveErrorCode =
  | 'not-a-zip'
  | 'zip-comment'
  | 'zip-trailing-bytes'
  | 'zip-split'
  | 'zip64'
  | 'zip-too-many-members'
  | 'zip-directory'
  | 'zip-extra-field'
  | 'zip-encrypted'
  | 'zip-data-descriptor'
  | 'zip-flags'
  | 'zip-method'
  | 'zip-not-a-file'
  | 'zip-local-header'
  | 'zip-gap'
  | 'zip-overlap'
  | 'member-name'
  | 'member-doubled'
  | 'member-size'
  | 'member-crc'
  | 'member-compression'
  | 'member-missing'
  | 'archive-too-large'

/**
 * An archive that cannot be written or must not be read. `member` is the name of the member at fault, or null where
 * the fault lies in the archive as a whole. The name comes from the archive: show it, never use it as a path.
 */
export class ArchiveError extends Error {
  readonly code: ArchiveErrorCode
  readonly member: string | null

  constructor(code: ArchiveErrorCode, member: string | null, message: string) {
    super(message)
    this.name = 'ArchiveError'
    this.code = code
    this.member = member
  }
}
