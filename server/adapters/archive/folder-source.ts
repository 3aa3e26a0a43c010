import { createReadStream } from 'node:fs'
import { readdir, stat } from 'node:fs/promises'
import { join } from 'node:path'
import { ArchiveError } from '#shared/archive/archive-error.ts'
import type { MembersSource } from '#shared/archive/members-source.ts'
import { checkMemberName, checkNameIsNew, MAX_UNPACKED } from '#shared/archive/zip-format.ts'

/**
 * The files of a folder into which a proof archive was unpacked. Refuses what could not have come out of one: folders,
 * links, names outside the archive's alphabet, over 1 GiB.
 */
export async function openFolder(folder: string): Promise<MembersSource> {
  const sizes = new Map<string, number>()
  const seen = new Set<string>()
  let total = 0
  const files = await readdir(folder, { withFileTypes: true })
  files.sort((a, b) => (a.name < b.name ? -1 : 1))
  for (const file of files) {
    checkMemberName(file.name)
    checkNameIsNew(file.name, seen)
    if (!file.isFile()) {
      throw new ArchiveError('zip-not-a-file', file.name, `${file.name} is not an ordinary file.`)
    }
    const { size } = await stat(join(folder, file.name))
    total += size
    if (total > MAX_UNPACKED) {
      throw new ArchiveError('archive-too-large', file.name, `With ${file.name}, the folder holds over 1 GiB.`)
    }
    sizes.set(file.name, size)
  }
  const find = (name: string) => {
    const size = sizes.get(name)
    if (size === undefined) throw new ArchiveError('member-missing', name, `The folder has no ${name}.`)
    return size
  }
  return {
    names: [...sizes.keys()],
    size: find,
    open: (name) => readFile(join(folder, name), name, find(name)),
  }
}

async function* readFile(path: string, name: string, size: number): AsyncGenerator<Uint8Array> {
  let read = 0
  for await (const chunk of createReadStream(path, { highWaterMark: 65_536 })) {
    read += (chunk as Uint8Array).length
    yield chunk as Uint8Array
  }
  if (read !== size) throw new ArchiveError('member-size', name, `${name} changed while it was being read.`)
}
