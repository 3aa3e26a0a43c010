import { DIRECTORY_LENGTH, END_LENGTH, LOCAL_LENGTH } from '#shared/archive/zip-format.ts'
import type { PackedZipMember } from '#shared/archive/zip-writer.ts'

/** The size, in bytes, of the zip that `writeZip` makes of these members: known before its first byte is written. */
export function zipSize(members: readonly Pick<PackedZipMember, 'name' | 'packed'>[]): number {
  return members.reduce(
    (sum, { name, packed }) => sum + LOCAL_LENGTH + name.length + packed + DIRECTORY_LENGTH + name.length,
    END_LENGTH,
  )
}
