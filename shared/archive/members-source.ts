/** The members of a proof archive, wherever they lie: in a zip, in a folder, in memory. */
export interface MembersSource {
  /** Checked names, no two equal in any letter case, in the archive's order. */
  readonly names: readonly string[]
  /** What lies beside the members and is no part of the archive, as may happen in a folder. */
  readonly strays?: readonly string[]
  /** Unpacked size in bytes, as the archive states it. Throws ArchiveError where there is no such member. */
  size(name: string): number
  /**
   * The member's bytes, from the start, each time. Throws ArchiveError, at once or while reading, where there is no such
   * member or where its bytes are not what the archive states.
   */
  open(name: string): AsyncIterable<Uint8Array>
}

/** All of one member, at most `limit` bytes of it; null where it is longer. */
export async function readMember(source: MembersSource, name: string, limit: number): Promise<Uint8Array | null> {
  const size = source.size(name)
  if (size > limit) return null
  const bytes = new Uint8Array(size)
  let at = 0
  for await (const chunk of source.open(name)) {
    if (at + chunk.length > size) return null
    bytes.set(chunk, at)
    at += chunk.length
  }
  return bytes.subarray(0, at)
}
